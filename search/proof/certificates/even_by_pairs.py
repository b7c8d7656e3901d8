"""Kind "even meetings by pairs": Σ λ² from below through what the blocks of each treatment bring it."""

from __future__ import annotations

from collections import Counter
from collections.abc import Iterator
from fractions import Fraction

import numpy as np

from search.proof.certificates.case import Case
from search.proof.certificates.claims import LeastSum, claim_of_meetings
from search.proof.certificates.multipliers import (
    known,
    prices_by_size,
    rows_of,
    sum_prices,
    treatments_of,
)
from search.proof.parts import Part
from search.proof.records import Refuted
from search.trial.records import AimKind

AIMS = (AimKind.EVEN_MEETINGS,)


def derive(case: Case, multipliers: Part) -> LeastSum:
    """Σ_{i<j} λ_ij² under Σ_j λ_ij = Σ_s m_is (s−1) and Σ_i m_is = s b_s, m_is blocks of size s that hold i.

    With a price on each of these equations the sum falls apart into one small minimum for each pair and one
    for each treatment. Any prices give a true bound.
    """
    if not case.nothing_twice:
        raise Refuted("this kind of certificate is for trials in which nothing stands twice in a block")
    known(multipliers, ("partners", "plots", "sums"))
    partners, plots = _partners(case, multipliers), prices_by_size(multipliers, "plots", case)
    each, total = sum_prices(multipliers, case)
    number_of_blocks = Counter(int(size) for size in case.rules.sizes)
    squares = sum((plots[s] * s * b for s, b in number_of_blocks.items()), -total)
    squares += sum(_treatments(case, partners, plots, each)) + sum(_pairs(case, partners))
    return claim_of_meetings(case, squares)


def _partners(case: Case, multipliers: Part) -> list[Fraction]:
    """The price of a meeting for each treatment; 0 where the certificate names none."""
    prices, named = [Fraction(0)] * case.trial.t, set[int]()
    for row in rows_of(multipliers, "partners"):
        members = treatments_of(row, case)
        if named & set(members):
            raise Refuted(f"{row.where} names a treatment that another row has already")
        named.update(members)
        for i in members:
            prices[i] = row.ratio("price")
    return prices


def _treatments(
    case: Case, partners: list[Fraction], plots: dict[int, Fraction], each: list[Fraction]
) -> Iterator[Fraction]:
    """For each treatment the least cost of blocks that it could stand in.

    Block by block: as many as must hold it, then the cheapest until it has its fewest plots, then such as
    cost less than nothing until it has its most.
    """
    rules = case.rules
    for i, price in enumerate(partners):
        fewest, most = case.plots_of(i)
        cost, taken = Fraction(0), 0
        free: list[Fraction] = []
        for s, mu in plots.items():
            here = rules.sizes == s
            must, may = int(rules.low[i, here].sum()), int(rules.high[i, here].sum())
            one = price * (s - 1) - mu + each[i]
            cost, taken = cost + must * one, taken + must
            free.extend([one] * (may - must))
        for one in sorted(free):
            if taken < fewest or (one < 0 and taken < most):
                cost, taken = cost + one, taken + 1
        if not fewest <= taken <= most:
            raise Refuted("the rules leave a treatment no blocks that add up")
        yield cost


def _pairs(case: Case, partners: list[Fraction]) -> Iterator[Fraction]:
    """Over pairs the least of λ² less the prices of their meetings, pairs with the same range together."""
    rules, most = case.rules, case.implied.most
    price_numbers = {price: number for number, price in enumerate(dict.fromkeys(partners))}
    prices = list(price_numbers)
    number_of = np.array([price_numbers[price] for price in partners])
    fewest = np.maximum(rules.meet_least, rules.low @ rules.low.T)
    greatest = np.minimum(
        rules.high @ rules.high.T, np.minimum(rules.meet_most, np.minimum.outer(most, most))
    )
    i, j = np.nonzero(np.triu(~rules.apart, 1))
    columns = [number_of[i], number_of[j], fewest[i, j], greatest[i, j]]
    kinds, numbers = np.unique(np.stack(columns, axis=1), axis=0, return_counts=True)
    for (one, other, low, high), number in zip(kinds.tolist(), numbers.tolist(), strict=True):
        if low > high:
            raise Refuted("the rules leave a pair no number of meetings")
        price = prices[one] + prices[other]
        yield number * min(x * x - price * x for x in range(low, high + 1))
