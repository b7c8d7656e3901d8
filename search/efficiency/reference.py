"""The yardstick of every efficiency: the same plots without blocks, replicated as well as stated.

Without blocks the information is `R − rr'/n`, so a mean variance is `Σ W_ii / r_i` and the
pseudo-determinant `Π r_i · t / n`. Both are separable and convex in r (the second in its logarithm),
therefore giving out the plots one by one, each where it helps most, ends at the best whole numbers
(marginal allocation: Gross 1956; Fox 1966; from memory).
"""

from __future__ import annotations

from collections.abc import Callable, Sequence
from fractions import Fraction
from heapq import heapify, heappop, heapreplace
from math import prod

from search.efficiency.aims import exact_diagonal
from search.trial.records import AimKind, Trial

Gain = Callable[[int, int], Fraction]
"""What treatment i gains from one plot more than r."""


def give_out(least: Sequence[int], most: Sequence[int], plots: int, gain: Gain) -> tuple[int, ...]:
    """Give plots out one by one to the treatment that gains most, lower numbers first on ties.

    Parameters
    ----------
    least, most : (t,) range of plots of each treatment
    plots : plots to give out in all
    gain : gain of treatment i from a plot more than r, falling in r

    Returns
    -------
    replication : (t,) plots of each treatment

    Raises
    ------
    ValueError : the ranges cannot sum to the plots
    """
    r = list(least)
    left = plots - sum(r)
    if left < 0 or sum(most) < plots:
        raise ValueError("the ranges of replication cannot sum to the number of plots")
    # ties go to the treatment with fewer plots, so that even shares stay even where gains are 0
    heap = [(-gain(i, r[i]), r[i], i) for i in range(len(r)) if r[i] < most[i]]
    heapify(heap)
    for _ in range(left):
        i = heap[0][2]
        r[i] += 1
        if r[i] < most[i]:
            heapreplace(heap, (-gain(i, r[i]), r[i], i))
        else:
            heappop(heap)
    return tuple(r)


def best_for_trace(
    diagonal: Sequence[Fraction], least: Sequence[int], most: Sequence[int], plots: int
) -> tuple[int, ...]:
    """The replication with the least `Σ W_ii / r_i`; no treatment is left without a plot."""
    floor = [max(1, r) for r in least]
    return give_out(floor, most, plots, lambda i, r: diagonal[i] / (r * (r + 1)))


def best_for_product(least: Sequence[int], most: Sequence[int], plots: int) -> tuple[int, ...]:
    """The replication with the greatest `Π r_i`; no treatment is left without a plot."""
    return give_out([max(1, r) for r in least], most, plots, lambda _, r: Fraction(1, r))


def _stated(trial: Trial) -> tuple[list[int], list[int]]:
    return [x.least for x in trial.treatments], [x.most for x in trial.treatments]


def reference_replication(trial: Trial, aim: AimKind | None = None) -> tuple[int, ...]:
    """The whole-number replication within the stated ranges that is best for the aim without blocks.

    Parameters
    ----------
    trial : the trial
    aim : all pairs or overall to ask for that aim's reference in place of the trial's own
    """
    least, most = _stated(trial)
    aim = aim or trial.aim.kind
    if aim is AimKind.OVERALL:
        return best_for_product(least, most, trial.n)
    if aim is AimKind.ALL_PAIRS:
        return best_for_trace([Fraction(2, trial.t)] * trial.t, least, most, trial.n)
    if aim is AimKind.WORST_PAIR:
        raise ValueError("many replications may share the least largest 1/r_i + 1/r_j")
    return best_for_trace(exact_diagonal(trial), least, most, trial.n)


def mean_variance(diagonal: Sequence[Fraction], replication: Sequence[int]) -> Fraction:
    """`Σ W_ii / r_i`: the aim's mean variance without blocks, in units of the plot variance."""
    return sum((w / r for w, r in zip(diagonal, replication, strict=True)), Fraction(0))


def product(replication: Sequence[int]) -> Fraction:
    """`Π r_i · t / n`: the pseudo-determinant of the information without blocks."""
    return Fraction(prod(replication) * len(replication), sum(replication))


def reference_variance(trial: Trial) -> Fraction:
    """The trial's aim at its reference: the least mean or largest variance without blocks (not overall)."""
    if trial.aim.kind is AimKind.WORST_PAIR:
        return least_worst_pair(trial)
    return mean_variance(exact_diagonal(trial), reference_replication(trial))


def reference_product(trial: Trial) -> Fraction:
    """The greatest pseudo-determinant without blocks within the stated ranges."""
    return product(reference_replication(trial, AimKind.OVERALL))


def least_worst_pair(trial: Trial) -> Fraction:
    """The least possible largest `1/r_i + 1/r_j` over the stated ranges.

    Only the two least replications matter: one treatment with p plots or more, every other with
    q ≥ p or more. The greatest q that the plots allow falls as p rises, so one walk meets every pair.
    """
    least, most = _stated(trial)
    candidates = []
    q = (trial.n - 1) // (trial.t - 1)  # t − 1 treatments with q each, and one with a plot
    for p in range(1, trial.n // trial.t + 1):
        while q >= p and not _affordable(least, most, trial.n, p, q):
            q -= 1
        if q < p:
            break
        candidates.append(Fraction(1, p) + Fraction(1, q))
    if not candidates:
        raise ValueError("the ranges of replication leave a treatment without a plot")
    return min(candidates)


def worst_pair(replication: Sequence[int]) -> Fraction:
    """The largest `1/r_i + 1/r_j` of a replication: that of the two treatments with the fewest plots."""
    fewest, next_fewest = sorted(replication)[:2]
    return Fraction(1, fewest) + Fraction(1, next_fewest)


def _affordable(least: Sequence[int], most: Sequence[int], plots: int, p: int, q: int) -> bool:
    """Whether one treatment can have p plots or more and each other one q ≥ p or more."""
    low = [i for i, r in enumerate(most) if r < q]
    if len(low) > 1 or any(most[i] < p for i in low):
        return False
    needed = sum(max(r, q) for r in least)
    saved = max(max(least[i], q) - max(least[i], p) for i in (low or range(len(least))))
    return needed - saved <= plots
