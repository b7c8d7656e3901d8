"""The plots of a trial without blocks: the yardstick of every efficiency, in whole replications."""

from __future__ import annotations

from collections.abc import Callable, Sequence
from fractions import Fraction
from heapq import heapify, heapreplace
from math import prod

from search.proof.records import Refuted
from search.trial.records import Trial


def least_mean_variance(trial: Trial, weights: Sequence[Fraction]) -> Fraction:
    """The least Σ w_i/r_i over whole replications in the stated ranges that use every plot.

    Each term is convex, so handing out plots one by one where they help most is exact.
    """
    least = [max(x.least, 1) if w else x.least for x, w in zip(trial.treatments, weights, strict=True)]
    best = best_replication(
        least,
        [x.most for x in trial.treatments],
        trial.n,
        lambda i, r: weights[i] / (r * (r + 1)) if weights[i] else Fraction(0),
    )
    return mean_variance_without_blocks(best, weights)


def mean_variance_without_blocks(replication: Sequence[int], weights: Sequence[Fraction]) -> Fraction:
    """Σ w_i/r_i, over the treatments that the aim weighs."""
    return sum((w / r for r, w in zip(replication, weights, strict=True) if w), Fraction(0))


def greatest_product(least: Sequence[int], most: Sequence[int], plots: int) -> int:
    """The greatest Π r_i over whole replications in the ranges that use every plot."""
    floor = [max(x, 1) for x in least]
    return prod(best_replication(floor, most, plots, lambda i, r: Fraction(1, r)))


def best_determinant(trial: Trial) -> Fraction:
    """The greatest product of non-zero eigenvalues of C without blocks, Π r_i · t/n (stated ranges)."""
    least = [treatment.least for treatment in trial.treatments]
    most = [treatment.most for treatment in trial.treatments]
    return Fraction(greatest_product(least, most, trial.n) * trial.t, trial.n)


def best_replication(
    least: Sequence[int],
    most: Sequence[int],
    plots: int,
    gain: Callable[[int, int], Fraction],
) -> list[int]:
    """Hand out plots one by one, each to the treatment that gains most from one more.

    Parameters
    ----------
    least, most : range of each treatment
    plots : plots to hand out in all
    gain : what treatment i gains from plot r + 1, falling in r

    Raises
    ------
    Refuted : the ranges do not sum to the number of plots
    """
    _check(least, most, plots)
    replication = list(least)
    waiting = [(-gain(i, r), i) for i, r in enumerate(replication) if r < most[i]]
    heapify(waiting)
    for _ in range(plots - sum(least)):
        i = waiting[0][1]
        replication[i] += 1
        nothing = replication[i] == most[i]
        # A treatment at its most gains less than nothing, so it is never asked before another.
        heapreplace(waiting, (Fraction(1) if nothing else -gain(i, replication[i]), i))
    return replication


def least_worst_pair(trial: Trial) -> Fraction:
    """The least that the largest 1/r_i + 1/r_j can be over replications in the stated ranges.

    Only the two smallest r count: every treatment but one stands on `second` plots or more, and that one
    on as many of what is left as it may have. All treatments and all values of `second` are tried.

    Raises
    ------
    Refuted : the ranges do not sum to the number of plots
    """
    least = [treatment.least for treatment in trial.treatments]
    most = [treatment.most for treatment in trial.treatments]
    _check(least, most, trial.n)
    found = []
    for second in range(1, trial.n // (trial.t - 1) + 1):
        lifted = [max(x, second) for x in least]
        total = sum(lifted)
        lacking = [i for i, x in enumerate(most) if x < second]
        if len(lacking) > 1:
            break
        for i in lacking or range(trial.t):
            left = min(most[i], trial.n - (total - lifted[i]))
            if left >= max(least[i], 1):
                found.append(Fraction(1, min(left, second)) + Fraction(1, second))
    return min(found)


def worst_pair_without_blocks(replication: Sequence[int]) -> Fraction:
    """The largest 1/r_i + 1/r_j."""
    plots = list(replication)
    fewest = plots.index(min(plots))
    return Fraction(1, plots[fewest]) + Fraction(1, min(plots[:fewest] + plots[fewest + 1 :]))


def _check(least: Sequence[int], most: Sequence[int], plots: int) -> None:
    crossed = any(low > high for low, high in zip(least, most, strict=True))
    if crossed or not sum(least) <= plots <= sum(most):
        raise Refuted("the stated ranges of plots cannot sum to the plots of the trial")
