"""Second moment by pairs: meetings are whole numbers, so they cannot all be equal.

Statement. For every plan `tr C² ≥ S2`, with
`S2 = Σ_i min_m [D(m)² + Σ_s m_s (ν_is (s−1) − μ_s) + π_i Σ_s m_s]`
`+ Σ_{i<j may meet} min_a [2 c(a)² − Σ_s (ν_is + ν_js) a_s] + Σ_s μ_s s b_s − Σ π most`.

Proof. Let m_is be the number of blocks of size s that hold i, and a_ijs of those that hold i and j. Then
`C_ii = D(m_i) = Σ_s m_is (1 − 1/s)` and `−C_ij = c(a_ij) = Σ_s a_ijs / s`, so
`tr C² = Σ_i D(m_i)² + 2 Σ_{i<j} c(a_ij)²`. In every plan `Σ_j a_ijs = m_is (s−1)`,
`Σ_i m_is = s b_s` and `Σ_{i∈S} Σ_s m_is ≤ most` for each sum limit. Taking these into the sum with prices
ν, μ of any sign and π ≥ 0 and then the least of each term alone gives S2. The ranges: m_is between the
blocks of size s that must and that may hold i, `Σ_s m_is` in the range of the replication; a_ijs between the
blocks that must and that may hold both, `Σ_s a_ijs` at least `meet_at_least` and at most
`meet_at_most` and either replication.

Source. Equal blocks and replications: John and Mitchell 1977 (regular graph designs; from memory);
prices found by linear programming.
"""

from __future__ import annotations

from dataclasses import dataclass
from fractions import Fraction
from itertools import chain
from typing import Any

import numpy as np
from numpy.typing import NDArray

from search.efficiency.bounds import second_moment
from search.efficiency.bounds.lattice import alike, lattice
from search.efficiency.bounds.problem import Problem, text
from search.efficiency.bounds.program import Program
from search.efficiency.bounds.second_moment import MOST_COLUMNS, Grid
from search.efficiency.bounds.sums import Sums
from search.efficiency.records import Bound
from search.trial.tables import Ints

NAME = "second moment by pairs"
SENTENCE = "Two treatments share a whole number of blocks, so meetings cannot be spread perfectly evenly."
applies = second_moment.applies


@dataclass(frozen=True, slots=True, eq=False)
class Rows:
    """Treatments with the same possibilities, all the m they may have, and the sum limits they stand in."""

    treatments: Ints
    vectors: Ints
    memberships: list[int]


@dataclass(frozen=True, slots=True, eq=False)
class Pairs:
    """Pairs with the same possibilities, from two row classes, and all the a they may have."""

    first: int
    second: int
    count: int
    vectors: Ints


@dataclass(frozen=True, slots=True, eq=False)
class Columns:
    """Everything that the program chooses from."""

    sizes: Ints
    blocks: Ints
    sums: Sums
    rows: list[Rows]
    pairs: list[Pairs]


@dataclass(frozen=True, slots=True)
class _Prices:
    """ν by row class and size, μ by size, π by type of sum."""

    partners: list[list[Fraction]]
    plots: list[Fraction]
    sums: list[Fraction]


def find(given: Problem) -> Bound | None:
    """The bound, or None where the program is too large or is not solved."""
    columns = columns_of(given, np.zeros(given.trial.t, dtype=np.int64))
    if columns is None:
        return None
    prices = _prices(columns)
    if prices is None:
        return None
    squares = _least_squares(given, columns, prices)
    return second_moment.bound_from(given, NAME, squares, _multipliers(columns, prices))


# -- what a treatment and a pair can have -------------------------------------------------------


def columns_of(given: Problem, labels: Ints) -> Columns | None:
    """By fine row classes, by coarse ones where those make too many columns, or None.

    Parameters
    ----------
    given : the trial
    labels : (t,) treatments with unlike ones are never in one class
    """
    return _columns_by(given, labels, fine=True) or _columns_by(given, labels, fine=False)


def _columns_by(given: Problem, labels: Ints, *, fine: bool) -> Columns | None:
    """None where there are too many, or where something cannot be had at all."""
    rules, limits = given.rules, given.limits
    sizes, blocks = np.unique(rules.sizes, return_counts=True)
    by_size = rules.sizes[:, None] == sizes
    row_ranges = np.column_stack([limits.least, limits.most, rules.low @ by_size, rules.high @ by_size])
    pair_ranges = _pair_ranges(given, by_size)
    sums = Sums.of(given)
    room = MOST_COLUMNS

    kinds = alike(pair_ranges)
    own = np.column_stack([labels, row_ranges, sums.memberships])
    classes = _row_classes(own, kinds if fine else np.zeros_like(kinds))
    rows = []
    for members in classes:
        vectors = _listed(row_ranges[members[0]], room)
        if vectors is None:
            return None
        room -= len(vectors)
        rows.append(Rows(members, vectors, sums.memberships[members[0]].tolist()))
    pairs = []
    for first, second, count, (i, j) in _pair_classes(classes, kinds):
        if pair_ranges[i, j, 1] == 0:
            continue
        vectors = _listed(pair_ranges[i, j], room)
        if vectors is None:
            return None
        room -= len(vectors)
        pairs.append(Pairs(first, second, count, vectors))
    return Columns(sizes, blocks, sums, rows, pairs)


def _listed(ranges: Ints, room: int) -> Ints | None:
    """All vectors within (least and most of the sum, least of each entry, most of each entry)."""
    least, most, entries = int(ranges[0]), int(ranges[1]), ranges[2:]
    low, high = np.split(entries, 2)
    vectors = lattice(low, np.minimum(high, most), least, most, room)
    return vectors if vectors is not None and len(vectors) else None


def _pair_ranges(given: Problem, by_size: NDArray[np.bool_]) -> Ints:
    """Least and most meetings in all, then least and most in blocks of each size, (t, t, 2 + 2k)."""
    rules, most = given.rules, given.limits.most
    meet_most = np.minimum(rules.meet_most, np.minimum.outer(most, most))
    parts = [rules.meet_least, meet_most]
    for counts in (rules.low, rules.high):
        parts.extend(counts[:, chosen] @ counts[:, chosen].T for chosen in by_size.T)
    ranges = np.stack(parts, axis=-1)
    ranges[rules.apart] = 0
    return ranges


def _row_classes(own: Ints, kinds: Ints) -> list[Ints]:
    """Treatments that have the same ranges and sums, and as many pairs of each kind."""
    with_others = kinds.copy()
    np.fill_diagonal(with_others, -1)
    labels = alike(np.column_stack([own, alike(np.sort(with_others, axis=1))]))
    return [np.flatnonzero(labels == c) for c in range(labels.max() + 1)]


def _pair_classes(classes: list[Ints], kinds: Ints) -> list[tuple[int, int, int, tuple[int, int]]]:
    """Two row classes, number of pairs alike between them, and one such pair."""
    t = len(kinds)
    row_class = np.zeros(t, dtype=np.int64)
    for c, members in enumerate(classes):
        row_class[members] = c
    i, j = np.triu_indices(t, 1)
    ends = np.sort(np.column_stack([row_class[i], row_class[j]]), axis=1)
    labels = alike(np.column_stack([ends, kinds[i, j]]))
    _, example, counts = np.unique(labels, return_index=True, return_counts=True)
    return [
        (int(ends[p, 0]), int(ends[p, 1]), int(count), (int(i[p]), int(j[p])))
        for p, count in zip(example, counts, strict=True)
    ]


# -- prices -------------------------------------------------------------------------------------


def _prices(columns: Columns) -> _Prices | None:
    sizes = columns.sizes
    program = Program()
    columns.sums.add_rows(program)
    for s, (size, number) in enumerate(zip(sizes, columns.blocks, strict=True)):
        program.equal(("plots", s), size * number)
        for c in range(len(columns.rows)):
            program.equal(("partners", c, s), 0)
    for c, rows in enumerate(columns.rows):
        program.equal(("row", c), len(rows.treatments))
        m = rows.vectors
        entries = {("row", c): 1, **columns.sums.entries(rows.memberships, m.sum(axis=1))}
        for s, size in enumerate(sizes):
            entries["plots", s] = m[:, s]
            entries["partners", c, s] = -m[:, s] * (size - 1)
        program.add((m @ (1 - 1 / sizes)) ** 2, entries)
    for p, pairs in enumerate(columns.pairs):
        program.equal(("pair", p), pairs.count)
        entries = {("pair", p): 1}
        for s in range(len(sizes)):
            for c in {pairs.first, pairs.second}:
                ends = (pairs.first == c) + (pairs.second == c)
                entries["partners", c, s] = pairs.vectors[:, s] * ends
        program.add(2 * (pairs.vectors @ (1 / sizes)) ** 2, entries)
    found = program.prices()
    if found is None:
        return None
    grid = Grid(sizes)
    return _Prices(
        [[grid.price(found["partners", c, s]) for s in range(len(sizes))] for c in range(len(columns.rows))],
        [grid.price(found["plots", s]) for s in range(len(sizes))],
        [grid.price(pi) for pi in columns.sums.values(found)],
    )


# -- the exact value ----------------------------------------------------------------------------


def _least_squares(given: Problem, columns: Columns, prices: _Prices) -> Fraction:
    """S2 at the prices, in whole numbers over one denominator."""
    sizes = columns.sizes
    grid = Grid(sizes)
    unit_square = grid.scale // grid.unit**2
    shares = np.array([grid.unit // s for s in sizes.tolist()], dtype=object)
    each = [*chain.from_iterable(prices.partners), *prices.plots, *prices.sums]
    ceiling = max((abs(price) for price in each), default=Fraction(0))
    largest = int(2 * given.trial.n**2 * (2 * ceiling + 2))

    def least(vectors: Ints, weights: NDArray[Any], factor: int, linear: list[Fraction]) -> int:
        wide = grid.array(vectors, largest)
        kind = wide.dtype
        squares = (wide @ weights.astype(kind)) ** 2 * (factor * unit_square)
        line = wide @ np.array([grid.whole(x) for x in linear], dtype=kind)
        return int((squares + line).min())

    total = 0
    for c, rows in enumerate(columns.rows):
        of_sums = columns.sums.each(rows.memberships, prices.sums)
        linear = [
            nu * (s - 1) - mu + of_sums
            for nu, mu, s in zip(prices.partners[c], prices.plots, sizes.tolist(), strict=True)
        ]
        total += len(rows.treatments) * least(rows.vectors, shares * (sizes - 1), 1, linear)
    for pairs in columns.pairs:
        ends = zip(prices.partners[pairs.first], prices.partners[pairs.second], strict=True)
        total += pairs.count * least(pairs.vectors, shares, 2, [-(x + y) for x, y in ends])
    constant = sum(
        (mu * int(s * b) for mu, s, b in zip(prices.plots, sizes, columns.blocks, strict=True)),
        Fraction(0),
    )
    return Fraction(total, grid.scale) + constant - columns.sums.constant(prices.sums)


def _multipliers(columns: Columns, prices: _Prices) -> dict[str, Any]:
    sizes = [str(s) for s in columns.sizes.tolist()]
    return {
        "rows": [
            {
                "treatments": rows.treatments.tolist(),
                "partners": {s: text(nu) for s, nu in zip(sizes, partners, strict=True)},
            }
            for rows, partners in zip(columns.rows, prices.partners, strict=True)
        ],
        "plots": {s: text(mu) for s, mu in zip(sizes, prices.plots, strict=True)},
        "sums": columns.sums.multipliers(prices.sums),
    }
