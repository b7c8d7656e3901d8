"""Is a plan balanced, or nearly so? Decided with whole numbers, never by a tolerance."""

from __future__ import annotations

from fractions import Fraction
from math import lcm

import numpy as np

from search.efficiency.filling import least_square_sum
from search.efficiency.records import NearBalance
from search.trial.records import Contents, Trial
from search.trial.tables import Ints, Tables, incidence, tables


def least_repeats(rules: Tables) -> tuple[int, ...] | None:
    """For each block the least `Σ_i n_iB²` that its rules allow: its size where nothing repeats.

    Returns None where some block cannot be filled at all.
    """
    least = []
    for low, high, size in zip(rules.low.T, rules.high.T, rules.sizes, strict=True):
        squares = least_square_sum(low, high, int(size))
        if squares is None:
            return None
        least.append(squares)
    return tuple(least)


def greatest_trace(rules: Tables) -> Fraction | None:
    """`n − Σ_B min Σ_i n_iB² / k_B`: no plan's information matrix has a greater trace.

    It is n − b where no treatment has to stand twice in a block. None where no plan exists.
    """
    repeats = least_repeats(rules)
    if repeats is None:
        return None
    lost = sum((Fraction(q, int(k)) for q, k in zip(repeats, rules.sizes, strict=True)), Fraction())
    return rules.n - lost


def greatest_information(trial: Trial, rules: Tables) -> Fraction | None:
    """A number that `tr C`, or `tr C(γ)` where blocks are random, passes in no plan; None where none exists.

    `tr C(γ) = n − Σ_B Σ_i n_iB² γ/(1+γk_B) − Σ_i s_i²/Σs`; the last term is least, `Σs/t`, where all s_i are
    alike, and Σs is the same for all plans.
    """
    if trial.blocks_random is None:
        return greatest_trace(rules)
    repeats = least_repeats(rules)
    if repeats is None:
        return None
    trace, ratio = Fraction(rules.n), trial.blocks_random
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
    repeats = least_repeats(tables(trial))
    if repeats is None or tuple((counts * counts).sum(axis=0).tolist()) != repeats:
        return False
    wide, shares = _scaled_shares(counts, trial.blocks_random)
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
    counts = incidence(contents, t)
    return counts @ counts.T


def near_balance(trial: Trial, contents: Contents) -> NearBalance:
    """Whether the plan has the least `Σ_{i<j} λ_ij²` of all plans that the trial admits.

    YES where the sum meets a lower bound that holds for every plan; else UNKNOWN. Where a treatment
    may stand twice in a block the total of the λ is not fixed and nothing is said.
    """
    rules = tables(trial)
    least = least_concurrence_squares(rules)
    achieved = int((np.triu(concurrences(contents, trial.t), 1) ** 2).sum())
    return NearBalance.YES if achieved == least else NearBalance.UNKNOWN


def least_concurrence_squares(rules: Tables) -> int | None:
    """A number that `Σ_{i<j} λ_ij²` of no plan is below; None where treatments may repeat.

    The total of the λ is `Σ k(k−1)/2`, and with equal blocks a treatment of r plots has
    `r (k−1)` meetings: as even as the rules for each pair allow, over all pairs and row by row.
    """
    if (rules.high > 1).any():
        return None
    low = rules.meet_least
    high = np.minimum(rules.meet_most, np.minimum.outer(rules.most, rules.most))
    pairs = np.triu_indices(rules.t, 1)
    total = int((rules.sizes * (rules.sizes - 1) // 2).sum())
    overall = least_square_sum(low[pairs], high[pairs], total)
    if overall is None or len(set(rules.sizes.tolist())) > 1 or (rules.least < rules.most).any():
        return overall
    twice = 0
    for i, r in enumerate(rules.least.tolist()):
        others = np.arange(rules.t) != i
        row = least_square_sum(low[i, others], high[i, others], r * (int(rules.sizes[0]) - 1))
        if row is None:
            return None
        twice += row
    return max(overall, -(-twice // 2))
