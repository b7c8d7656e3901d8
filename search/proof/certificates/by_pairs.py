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
    known,
    prices_by_size,
    rows_of,
    sum_prices,
    treatments_of,
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
    partners = _partner_prices(case, multipliers)
    each, total = sum_prices(multipliers, case)
    squares = sum((plots[s] * s * b for s, b in number_of_blocks.items()), -total)
    return squares + sum(_treatments(case, plots, partners, each)) + sum(_pairs(case, partners))


def _partner_prices(case: Case, multipliers: Part) -> list[dict[int, Fraction]]:
    """For each treatment the price of a partner, by block size."""
    nothing = {int(size): Fraction(0) for size in case.rules.sizes}
    prices = [nothing] * case.trial.t
    seen: set[int] = set()
    for row in rows_of(multipliers, "rows"):
        members = treatments_of(row, case)
        if not seen.isdisjoint(members):
            raise Refuted(f"{row.where} names a treatment that another row has already")
        seen.update(members)
        price = prices_by_size(row, "partners", case)
        for i in members:
            prices[i] = price
    return prices


def _treatments(
    case: Case,
    plots: dict[int, Fraction],
    partners: list[dict[int, Fraction]],
    each: list[Fraction],
) -> Iterator[Fraction]:
    """For each treatment the least of D² plus the prices of its blocks."""
    for i in range(case.trial.t):
        blocks = [
            Coordinate(
                value=1 - Fraction(1, s),
                cost=partners[i][s] * (s - 1) - price + each[i],
                low=int(case.rules.low[i, case.rules.sizes == s].sum()),
                high=int(case.rules.high[i, case.rules.sizes == s].sum()),
            )
            for s, price in plots.items()
        ]
        yield _found(least_cost(blocks, 1, *case.plots_of(i)))


def _pairs(case: Case, partners: list[dict[int, Fraction]]) -> Iterator[Fraction]:
    """For each pair that may meet the least of 2 c² less the prices of its meetings."""
    rules, sizes = case.rules, list(partners[0])
    of_size = [rules.sizes == s for s in sizes]
    must = [rules.low[:, here] @ rules.low[:, here].T for here in of_size]
    may = [rules.high[:, here] @ rules.high[:, here].T for here in of_size]
    most = np.minimum(rules.meet_most, np.minimum.outer(case.implied.most, case.implied.most))
    solved: dict[tuple[object, ...], Fraction] = {}
    for i, j in zip(*np.nonzero(np.triu(~rules.apart, 1)), strict=True):
        blocks = tuple(
            Coordinate(
                value=Fraction(1, s),
                cost=-partners[i][s] - partners[j][s],
                low=int(must[at][i, j]),
                high=int(may[at][i, j]),
            )
            for at, s in enumerate(sizes)
        )
        key = (blocks, int(rules.meet_least[i, j]), int(most[i, j]))
        if key not in solved:
            solved[key] = _found(least_cost(blocks, 2, *key[1:]))
        yield solved[key]


def _found(cost: Fraction | None) -> Fraction:
    if cost is None:
        raise Refuted("the rules leave a treatment or a pair no blocks that add up")
    return cost
