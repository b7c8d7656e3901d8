"""Kind "second moment by pairs": tr C² from below through the blocks that pairs of treatments share."""

from __future__ import annotations

from collections import Counter
from collections.abc import Iterator
from fractions import Fraction

import numpy as np

from search.proof.certificates.case import Case
from search.proof.certificates.claims import Claim, claim_of_spectrum
from search.proof.certificates.lattice import Coordinate, least_cost
from search.proof.certificates.multipliers import (
    Partners,
    known,
    partner_prices,
    prices_by_size,
    sum_prices,
)
from search.proof.certificates.spectrum import second_moment_spectrum
from search.proof.parts import Part
from search.proof.records import Refuted
from search.trial.records import AimKind

AIMS = (AimKind.ALL_PAIRS, AimKind.OVERALL)


def derive(case: Case, multipliers: Part) -> Claim:
    """tr C² = Σ_i D_i² + 2 Σ_{i<j} c_ij², D_i = Σ_s m_is (1 − 1/s), c_ij = Σ_s a_ijs/s.

    m_is blocks of size s hold treatment i, and i and j share a_ijs of them. Every plan has
    Σ_j a_ijs = m_is (s−1) and Σ_i m_is = s b_s; with a price on each of these equations the sum falls
    apart into one small minimum for each treatment and one for each pair. Any prices give a true bound.
    """
    if not case.nothing_twice:
        raise Refuted("this kind of certificate is for trials in which nothing stands twice in a block")
    known(multipliers, ("rows", "plots", "sums"))
    return claim_of_spectrum(case, second_moment_spectrum(case, least_squares(case, multipliers)))


def least_squares(case: Case, multipliers: Part) -> Fraction:
    """A number that tr C² is not below in any plan of the trial."""
    number_of_blocks = Counter(int(size) for size in case.rules.sizes)
    plots = prices_by_size(multipliers, "plots", case)
    partners = partner_prices(multipliers, case)
    each, total = sum_prices(multipliers, case)
    squares = sum((plots[s] * s * b for s, b in number_of_blocks.items()), -total)
    return squares + sum(_treatments(case, plots, partners, each)) + sum(_pairs(case, partners))


def _treatments(
    case: Case, plots: dict[int, Fraction], partners: Partners, each: list[Fraction]
) -> Iterator[Fraction]:
    """For each treatment the least of D² plus the prices of its blocks."""
    for i, row in enumerate(partners.row_of):
        blocks = [
            Coordinate(
                value=1 - Fraction(1, s),
                cost=partners.rows[row][s] * (s - 1) - price + each[i],
                low=int(case.rules.low[i, case.rules.sizes == s].sum()),
                high=int(case.rules.high[i, case.rules.sizes == s].sum()),
            )
            for s, price in plots.items()
        ]
        yield _found(least_cost(blocks, 1, *case.plots_of(i)))


def _pairs(case: Case, partners: Partners) -> Iterator[Fraction]:
    """Over pairs that may meet the least of 2 c² less the prices of their meetings, alike pairs together."""
    rules, sizes = case.rules, list(partners.rows[0])
    i, j = np.nonzero(np.triu(~rules.apart, 1))
    most = np.minimum(rules.meet_most, np.minimum.outer(case.implied.most, case.implied.most))
    one, other = partners.row_of[i], partners.row_of[j]
    columns = [np.minimum(one, other), np.maximum(one, other), rules.meet_least[i, j], most[i, j]]
    for s in sizes:
        low, high = rules.low[:, rules.sizes == s], rules.high[:, rules.sizes == s]
        columns += [(low @ low.T)[i, j], (high @ high.T)[i, j]]
    kinds, numbers = np.unique(np.stack(columns, axis=1), axis=0, return_counts=True)
    for kind, number in zip(kinds.tolist(), numbers.tolist(), strict=True):
        first, second, fewest, greatest, *ranges = kind
        prices = partners.rows[first], partners.rows[second]
        blocks = [
            Coordinate(Fraction(1, s), -prices[0][s] - prices[1][s], low, high)
            for s, low, high in zip(sizes, ranges[::2], ranges[1::2], strict=True)
        ]
        yield number * _found(least_cost(blocks, 2, fewest, greatest))


def _found(cost: Fraction | None) -> Fraction:
    if cost is None:
        raise Refuted("the rules leave a treatment or a pair no blocks that add up")
    return cost
