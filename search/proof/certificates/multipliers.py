"""The multipliers of a certificate, from raw JSON; any values prove something, so only form is checked."""

from __future__ import annotations

from collections.abc import Iterable, Iterator
from dataclasses import dataclass
from fractions import Fraction

import numpy as np

from search.proof.certificates.case import Case
from search.proof.parts import Part, listed, ratio, whole
from search.proof.records import Refuted
from search.trial.tables import Ints

MOST_DIGITS_IN_ALL = 100_000
"""Digits of all multipliers together; sums of rationals grow with them."""


def known(multipliers: Part, keys: Iterable[str]) -> None:
    """Refuse multipliers that this kind of certificate does not have, and more than can be added up."""
    if multipliers.content.keys() - set(keys):
        raise Refuted(f"{multipliers.where} has multipliers that its kind does not know")
    if _digits(multipliers.content) > MOST_DIGITS_IN_ALL:
        raise Refuted(f"{multipliers.where} has more digits than can be checked")


def _digits(content: object) -> int:
    """Characters of all texts within, however deep they stand."""
    waiting, found = [content], 0
    while waiting:
        item = waiting.pop()
        if isinstance(item, dict):
            waiting.extend(item.values())
        elif isinstance(item, list):
            waiting.extend(item)
        elif isinstance(item, str):
            found += len(item)
    return found


def rows_of(multipliers: Part, key: str) -> Iterator[Part]:
    """The objects of a list; none where the key is missing."""
    if multipliers.has(key):
        for at, value in enumerate(multipliers.items(key), start=1):
            yield Part.of(f"{multipliers.at(key)}[{at}]", value)


def treatments_of(row: Part, case: Case) -> list[int]:
    """The treatments of a row by number, each once."""
    where = row.at("treatments")
    numbers = [whole(where, value) for value in row.items("treatments")]
    if len(set(numbers)) < len(numbers) or not all(0 <= i < case.trial.t for i in numbers):
        raise Refuted(f"{where} must name treatments of the trial by number, each once")
    return numbers


def prices_by_size(row: Part, key: str, case: Case) -> dict[int, Fraction]:
    """A price for each block size; 0 where none is given."""
    sizes = {str(size): int(size) for size in case.rules.sizes}
    prices = dict.fromkeys(sizes.values(), Fraction(0))
    if row.has(key):
        given = row.part(key)
        for name in given.content:
            if name not in sizes:
                raise Refuted(f"{given.where} prices a block size that the trial has not")
            prices[sizes[name]] = given.ratio(name)
    return prices


@dataclass(frozen=True, slots=True, eq=False)
class Partners:
    """Prices of partners by block size, one row for treatments alike, and the row of each treatment."""

    rows: list[dict[int, Fraction]]
    row_of: Ints


def partner_prices(multipliers: Part, case: Case) -> Partners:
    """The prices of partners; row 0 is for treatments that no row of the certificate names."""
    rows = [{int(size): Fraction(0) for size in case.rules.sizes}]
    row_of = np.zeros(case.trial.t, dtype=np.int64)
    for row in rows_of(multipliers, "rows"):
        members = treatments_of(row, case)
        if row_of[members].any():
            raise Refuted(f"{row.where} names a treatment that another row has already")
        row_of[members] = len(rows)
        rows.append(prices_by_size(row, "partners", case))
    return Partners(rows, row_of)


def sum_prices(multipliers: Part, case: Case) -> tuple[list[Fraction], Fraction]:
    """What the limits on sums cost each plot of a treatment, and their prices times their limits.

    A limit Σ r_i ≤ most with a price π ≥ 0 adds π (Σ r_i − most) ≤ 0 to what a plan costs.
    """
    limits = {frozenset(limit.treatments): limit.most for limit in case.implied.sums}
    each, total = [Fraction(0)] * case.trial.t, Fraction(0)
    for row in rows_of(multipliers, "sums"):
        members = frozenset(treatments_of(row, case))
        price = row.ratio("price")
        if members not in limits:
            raise Refuted(f"{row.where} names a limit on a sum that the trial does not imply")
        if price < 0:
            raise Refuted(f"{row.where} has a price below 0")
        total += price * limits[members]
        for i in members:
            each[i] += price
    return each, total


def symmetric_matrix(multipliers: Part, key: str, size: int) -> list[list[Fraction]]:
    """A symmetric matrix of rationals."""
    where = multipliers.at(key)
    rows = [listed(where, row) for row in multipliers.items(key)]
    if len(rows) != size or any(len(row) != size for row in rows):
        raise Refuted(f"{where} is no matrix of {size} by {size}")
    matrix = [[ratio(where, x) for x in row] for row in rows]
    if any(matrix[i][j] != matrix[j][i] for i in range(size) for j in range(i)):
        raise Refuted(f"{where} is not symmetric")
    return matrix
