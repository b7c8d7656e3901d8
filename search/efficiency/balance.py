"""Is a plan balanced, or nearly so? Decided with whole numbers, never by a tolerance."""

from __future__ import annotations

from fractions import Fraction
from math import lcm

import numpy as np

from search.efficiency.filling import least_square_sum
from search.efficiency.one_thread import one_thread
from search.efficiency.records import NearBalance
from search.trial.records import Contents, Trial
from search.trial.settled import settled_trial
from search.trial.tables import Ints, Tables, incidence, tables


def _fullest(rules: Tables) -> Ints:
    """The most plots that can be planted in each block: its size, unless too few may enter a block that
    may stay partly empty."""
    room = rules.high.sum(axis=0)
    return np.where(rules.fewest < rules.sizes, np.minimum(rules.sizes, room), rules.sizes)


def least_repeats(rules: Tables) -> tuple[int, ...] | None:
    """For each block the least `Σ_i n_iB²` that its rules allow when it is full: its size where nothing
    repeats.

    Returns None where some block cannot be filled at all.
    """
    least = []
    for low, high, size in zip(rules.low.T, rules.high.T, _fullest(rules), strict=True):
        squares = least_square_sum(low, high, int(size))
        if squares is None:
            return None
        least.append(squares)
    return tuple(least)


def greatest_trace(rules: Tables, planted: int | None = None) -> Fraction | None:
    """`n − Σ_B min Σ_i n_iB² / k_B`: no plan's information matrix has a greater trace.

    It is n − b where no treatment has to stand twice in a block. None where no plan exists. A plot more
    never takes information away, so blocks that may stay partly empty count as full; and a plan with n
    plots loses at least one to each block, whatever is left empty.

    Parameters
    ----------
    rules : tables of the trial
    planted : no plan has more plots; what sizes and stated ranges allow where left out
    """
    repeats, sizes = least_repeats(rules), _fullest(rules)
    if repeats is None or (sizes < 1).any():
        return None
    lost = sum((Fraction(q, int(k)) for q, k in zip(repeats, sizes, strict=True)), Fraction())
    planted = rules.n if planted is None else planted
    return min(int(sizes.sum()) - lost, Fraction(planted - rules.b))


def greatest_information(trial: Trial, rules: Tables, planted: int) -> Fraction | None:
    """A number that `tr C`, or `tr C(γ)` where blocks are random, passes in no plan; None where none exists.

    `tr C(γ) = n − Σ_B Σ_i n_iB² γ/(1+γk_B) − Σ_i s_i²/Σs`; the last term is least, `Σs/t`, where all s_i are
    alike, and Σs is the same for all plans. A plan with filler tells less than one with anything in its
    place, so there blocks count as full, of whatever kind.

    Parameters
    ----------
    trial, rules : the trial and its tables
    planted : no plan has more plots
    """
    if trial.blocks_random is None:
        return greatest_trace(rules, planted)
    repeats = least_repeats(rules) if rules.exact else tuple(rules.sizes.tolist())
    if repeats is None:
        return None
    trace, ratio = Fraction(int(rules.sizes.sum())), trial.blocks_random
    for q, k in zip(repeats, rules.sizes.tolist(), strict=True):
        trace -= (q * ratio + Fraction(k, rules.t)) / (1 + ratio * k)
    return trace


def is_balanced(trial: Trial, contents: Contents) -> bool:
    """Whether all pairs have one variance and no information is lost that need not be.

    All pair variances of a connected plan are equal when all off-diagonal entries of
    `N K⁻¹ N'` are; where blocks are random, `K + 1/γ` stands for K, and what the block totals tell must be
    shared out evenly. With the greatest possible trace as well, no plan is better for an aim that
    treats all pairs alike (universal optimality: Kiefer 1975; from memory).
    """
    counts = incidence(contents, trial.t)
    squares, sizes = (counts * counts).sum(axis=0).tolist(), counts.sum(axis=0).tolist()
    lost = sum((Fraction(q, k) for q, k in zip(squares, sizes, strict=True)), Fraction())
    exact = settled_trial(trial)
    if sum(sizes) - lost != greatest_trace(tables(exact)):
        return False
    full = [block.plots for block in exact.blocks]
    if trial.blocks_random is not None and exact.may_be_emptier and not sizes == squares == full:
        return False  # the trace is not known to be the greatest
    wide, shares = _scaled_shares(counts, trial.blocks_random)
    one = (wide[0] * shares) @ wide.T
    if len(set(one[1:].tolist())) > 1:
        return False  # one row tells it of nearly all plans
    weighted = (wide * shares) @ wide.T
    off_diagonal = weighted[np.triu_indices(trial.t, 1)]
    alike = bool((off_diagonal == off_diagonal[0]).all())
    if trial.blocks_random is None:
        return alike and bool(off_diagonal[0] > 0)
    between = wide @ shares
    return alike and bool((between == between[0]).all())


def _scaled_shares(counts: Ints, blocks_random: Fraction | None) -> tuple[Ints, Ints]:
    """The counts, and for each block `1/k`, or `1/(k + 1/γ)`, in whole numbers on one common scale."""
    over, under = (1, 0) if blocks_random is None else blocks_random.as_integer_ratio()
    sizes = [over * k + under for k in counts.sum(axis=0).tolist()]
    scale = lcm(*sizes)
    exact_in_64_bits = scale * sum(sizes) ** 2 < 2**62
    kind = np.int64 if exact_in_64_bits else object
    return counts.astype(kind), np.array([scale // k for k in sizes], dtype=kind)


def concurrences(contents: Contents, t: int) -> Ints:
    """`λ_ij = Σ_B n_iB n_jB`, shape (t, t), the diagonal included."""
    counts = incidence(contents, t).astype(np.float64)  # exact, and many times as fast as whole numbers
    with one_thread():
        return np.asarray((counts @ counts.T).astype(np.int64))


def squared_meetings(contents: Contents, t: int) -> int:
    """`Σ_{i<j} λ_ij²`, what the aim even meetings makes least.

    A plot of i and a plot of j in one block are one meeting, so a block that holds i twice and j once
    gives two; two plots of one treatment do not meet.
    """
    counts = incidence(contents, t).astype(np.float64)  # whole numbers, multiplied fast
    meets = counts.T @ counts if len(contents) < t else counts @ counts.T  # equal sums of squares
    own = (counts**2).sum(axis=1)
    return (int((meets**2).sum()) - int((own**2).sum())) // 2


def near_balance(trial: Trial, contents: Contents) -> NearBalance:
    """Whether the plan has the least `Σ_{i<j} λ_ij²` of all plans that the trial admits.

    YES where the sum meets a lower bound that holds for every plan; else UNKNOWN. Where a treatment
    may stand twice in a block the total of the λ is not fixed and nothing is said.
    """
    rules = tables(settled_trial(trial))
    least = least_concurrence_squares(rules)
    return NearBalance.YES if squared_meetings(contents, trial.t) == least else NearBalance.UNKNOWN


def least_concurrence_squares(rules: Tables) -> int | None:
    """A number that `Σ_{i<j} λ_ij²` of no plan is below; None where treatments may repeat, and where
    it is not settled how many plots are planted.

    The total of the λ is `Σ k(k−1)/2`, and with equal blocks a treatment of r plots has
    `r (k−1)` meetings: as even as the rules for each pair allow, over all pairs and row by row.
    """
    if (rules.high > 1).any() or not rules.exact:
        return None
    low = rules.meet_least
    high = np.minimum(rules.meet_most, np.minimum.outer(rules.most, rules.most))
    pairs = np.triu_indices(rules.t, 1)
    total = int((rules.sizes * (rules.sizes - 1) // 2).sum())
    overall = least_square_sum(low[pairs], high[pairs], total)
    if overall is None or len(set(rules.sizes.tolist())) > 1 or (rules.least < rules.most).any():
        return overall
    twice, alike = 0, not rules.limits_meetings and not rules.apart.any()
    alike &= len(set(rules.least.tolist())) == 1
    for i, r in enumerate(rules.least.tolist()[: 1 if alike else None]):
        others = np.arange(rules.t) != i
        row = least_square_sum(low[i, others], high[i, others], r * (int(rules.sizes[0]) - 1))
        if row is None:
            return None
        twice += row * (rules.t if alike else 1)
    return max(overall, -(-twice // 2))
