"""Even meetings by pairs: what each treatment's blocks bring it is shared out over whole numbers.

Statement. Where nothing stands twice in a block, for every plan
`Σ_{i<j} λ_ij² ≥ Σ_{i<j} min_λ [λ² − (ν_i + ν_j) λ] + Σ_i min_m Σ_s m_s (ν_i (s−1) − μ_s + π_i)`
`+ Σ_s μ_s s b_s − Σ π most`.

Proof. Let m_is be the number of blocks of size s that hold i. In every plan `Σ_j λ_ij = Σ_s m_is (s−1)`,
`Σ_i m_is = s b_s` and `Σ_{i∈S} Σ_s m_is ≤ most` for each sum limit. Taking these into the sum with prices
ν, μ of any sign and π ≥ 0 and then the least of each term alone gives the right side. The ranges: λ_ij of
the blocks that must and that may hold both, at least `meet_at_least`, at most `meet_at_most` and either
replication; m_is between the blocks of size s that must and that may hold i, with `Σ_s m_is` in the range of
the replication.

Source. Equal blocks and replications: John and Mitchell 1977 (regular graph designs; from memory); prices
found by linear programming.
"""

from __future__ import annotations

from dataclasses import dataclass
from fractions import Fraction
from typing import Any

import numpy as np

from search.efficiency.bounds import evenness
from search.efficiency.bounds.lattice import alike
from search.efficiency.bounds.problem import Problem, text
from search.efficiency.bounds.program import Program
from search.efficiency.bounds.second_moment import MOST_COLUMNS
from search.efficiency.bounds.sums import Sums
from search.efficiency.records import Bound
from search.foundation.exact import near
from search.trial.tables import Ints

NAME = "even meetings by pairs"
SENTENCE = (
    "The blocks of a treatment bring it a number of meetings, and pairs meet a whole number of times, so the "
    "meetings cannot be spread perfectly evenly."
)
applies = evenness.applies


@dataclass(frozen=True, slots=True, eq=False)
class _Rows:
    """Treatments with the same possibilities.

    Parameters
    ----------
    treatments : their numbers
    least, most : range of their plots
    low, high : for each block size the blocks that must and that may hold them
    memberships : for each type of sum limit in how many of that type they stand
    """

    treatments: Ints
    least: int
    most: int
    low: list[int]
    high: list[int]
    memberships: list[int]


@dataclass(frozen=True, slots=True)
class _Pairs:
    """Pairs of two row classes with the same range of meetings."""

    first: int
    second: int
    count: int
    low: int
    high: int


@dataclass(frozen=True, slots=True, eq=False)
class _Layout:
    """Everything that the program chooses from."""

    sizes: Ints
    blocks: Ints
    sums: Sums
    rows: list[_Rows]
    pairs: list[_Pairs]


@dataclass(frozen=True, slots=True)
class _Prices:
    """ν by row class, μ by size, π by type of sum."""

    partners: list[Fraction]
    plots: list[Fraction]
    sums: list[Fraction]


def find(given: Problem) -> Bound | None:
    """The bound, or None where the program is too large or is not solved."""
    layout = _layout(given, fine=True)
    if _columns(layout) > MOST_COLUMNS:
        layout = _layout(given, fine=False)
    if _columns(layout) > MOST_COLUMNS or any(pairs.low > pairs.high for pairs in layout.pairs):
        return None
    prices = _prices(layout)
    squares = None if prices is None else _least_squares(layout, prices)
    if prices is None or squares is None:
        return None
    return evenness.bound_on_meetings(given, NAME, squares, _multipliers(layout, prices))


def _columns(layout: _Layout) -> int:
    return sum(pairs.high - pairs.low + 1 for pairs in layout.pairs) + len(layout.rows) * len(layout.sizes)


def _layout(given: Problem, *, fine: bool) -> _Layout:
    rules, limits, sums = given.rules, given.limits, Sums.of(given)
    sizes, blocks = np.unique(rules.sizes, return_counts=True)
    by_size = rules.sizes[:, None] == sizes
    low, high = rules.low @ by_size, rules.high @ by_size
    ranges = _ranges(given)
    kinds = alike(ranges)
    np.fill_diagonal(kinds, -1)
    around = alike(np.sort(kinds, axis=1)) if fine else np.zeros(rules.t, dtype=np.int64)
    row_of = alike(np.column_stack([limits.least, limits.most, low, high, sums.memberships, around]))
    rows = []
    for c in range(int(row_of.max()) + 1):
        members = np.flatnonzero(row_of == c)
        i = members[0]
        rows.append(
            _Rows(
                treatments=members,
                least=int(limits.least[i]),
                most=int(limits.most[i]),
                low=low[i].tolist(),
                high=high[i].tolist(),
                memberships=sums.memberships[i].tolist(),
            )
        )
    first, second = np.triu_indices(rules.t, 1)
    ends = np.sort(np.column_stack([row_of[first], row_of[second]]), axis=1)
    found = np.column_stack([ends, ranges[first, second]])
    _, examples, counts = np.unique(alike(found), return_index=True, return_counts=True)
    pairs = [
        _Pairs(a, b, count, least, most)
        for (a, b, least, most), count in zip(found[examples].tolist(), counts.tolist(), strict=True)
    ]
    return _Layout(sizes, blocks, sums, rows, pairs)


def _ranges(given: Problem) -> Ints:
    """Least and most meetings of each pair, (t, t, 2)."""
    rules, most = given.rules, given.limits.most
    least = np.maximum(rules.meet_least, rules.low @ rules.low.T)
    greatest = np.minimum(
        np.minimum(rules.meet_most, np.minimum.outer(most, most)), rules.high @ rules.high.T
    )
    greatest[rules.apart] = 0
    return np.stack([least, greatest], axis=-1)


# -- prices -------------------------------------------------------------------------------------


def _prices(layout: _Layout) -> _Prices | None:
    """From the linear program; what the blocks of a treatment cost is linear, so they need not be listed."""
    program = Program()
    layout.sums.add_rows(program)
    for s, (size, number) in enumerate(zip(layout.sizes, layout.blocks, strict=True)):
        program.equal(("plots", s), size * number)
    for c, rows in enumerate(layout.rows):
        many = len(rows.treatments)
        program.equal(("partners", c), 0)
        program.at_most(("most", c), rows.most * many)
        program.at_most(("least", c), -rows.least * many)
        for s, size in enumerate(layout.sizes):
            program.at_most(("high", c, s), rows.high[s] * many)
            program.at_most(("low", c, s), -rows.low[s] * many)
            entries = {
                ("plots", s): 1,
                ("partners", c): 1 - size,
                ("most", c): 1,
                ("least", c): -1,
                ("high", c, s): 1,
                ("low", c, s): -1,
                **layout.sums.entries(rows.memberships, 1),
            }
            program.add([0.0], entries)
    for p, pairs in enumerate(layout.pairs):
        meetings = np.arange(pairs.low, pairs.high + 1)
        program.equal(("pair", p), pairs.count)
        entries = {("pair", p): 1}
        for c in {pairs.first, pairs.second}:
            entries["partners", c] = meetings * ((pairs.first == c) + (pairs.second == c))
        program.add(meetings.astype(float) ** 2, entries)
    found = program.prices()
    if found is None:
        return None
    return _Prices(
        [near(found["partners", c]) for c in range(len(layout.rows))],
        [near(found["plots", s]) for s in range(len(layout.sizes))],
        [near(pi) for pi in layout.sums.values(found)],
    )


# -- the exact value ----------------------------------------------------------------------------


def _least_squares(layout: _Layout, prices: _Prices) -> Fraction | None:
    """The right side at the prices; None where a treatment cannot be placed, so that no plan exists."""
    total = -layout.sums.constant(prices.sums)
    for size, number, mu in zip(layout.sizes.tolist(), layout.blocks.tolist(), prices.plots, strict=True):
        total += mu * size * number
    for rows, nu in zip(layout.rows, prices.partners, strict=True):
        of_sums = layout.sums.each(rows.memberships, prices.sums)
        costs = [
            nu * (size - 1) - mu + of_sums
            for size, mu in zip(layout.sizes.tolist(), prices.plots, strict=True)
        ]
        least = _cheapest(costs, rows)
        if least is None:
            return None
        total += len(rows.treatments) * least
    for pairs in layout.pairs:
        price = prices.partners[pairs.first] + prices.partners[pairs.second]
        nearest = min(max(round(price / 2), pairs.low), pairs.high)
        total += pairs.count * (nearest**2 - price * nearest)
    return total


def _cheapest(costs: list[Fraction], rows: _Rows) -> Fraction | None:
    """The least cost of the blocks of a treatment: the cheapest first, and none too many that costs."""
    total, taken = Fraction(0), sum(rows.low)
    for cost, low in zip(costs, rows.low, strict=True):
        total += cost * low
    for cost, low, high in sorted(zip(costs, rows.low, rows.high, strict=True)):
        wanted = rows.most - taken if cost < 0 else rows.least - taken
        more = max(0, min(high - low, wanted))
        total, taken = total + cost * more, taken + more
    return total if rows.least <= taken <= rows.most else None


def _multipliers(layout: _Layout, prices: _Prices) -> dict[str, Any]:
    return {
        "partners": [
            {"treatments": rows.treatments.tolist(), "price": text(nu)}
            for rows, nu in zip(layout.rows, prices.partners, strict=True)
        ],
        "plots": {str(size): text(mu) for size, mu in zip(layout.sizes.tolist(), prices.plots, strict=True)},
        "sums": layout.sums.multipliers(prices.sums),
    }
