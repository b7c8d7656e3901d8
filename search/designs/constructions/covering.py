"""Choose orbits of blocks that together cover every orbit of pairs exactly λ times.

Kramer and Mesner 1976: t-designs on hypergraphs. Discrete Mathematics 15, 263–296.
"""

from __future__ import annotations

from collections.abc import Sequence

from search.designs.constructions.columns import Budget, Column, Packing
from search.foundation.cpsat import Answer, solve


def cover(columns: Sequence[Column], packing: Packing, budget: Budget) -> tuple[Column, ...] | None:
    """Depth-first: the first row that lacks something, every column that helps; the last one is looked up."""
    last = {column.counts: column for column in columns}
    rows = [[c for c in columns if packing.count(c.counts, i)] for i in range(packing.rows)]
    order = sorted(range(packing.rows), key=lambda i: len(rows[i]))

    def extend(room: int, row: int, start: int, chosen: tuple[Column, ...]) -> tuple[Column, ...] | None:
        if room in last:
            return (*chosen, last[room])
        while row < len(order) and not packing.count(room, order[row]):
            row, start = row + 1, 0
        if row == len(order):
            return None
        helpers = rows[order[row]]
        for i in range(start, len(helpers)):
            if not budget.spend():
                return None
            if packing.fits(helpers[i].counts, room):
                found = extend(room - helpers[i].counts, row, i, (*chosen, helpers[i]))
                if found is not None:
                    return found
        return None

    return extend(packing.target, 0, 0, ()) if all(rows) else None


def cover_by_solver(
    columns: Sequence[Column], packing: Packing, *, effort: float, seconds: float
) -> tuple[Column, ...] | None:
    """The same by CP-SAT, for systems with many columns to choose."""
    from ortools.sat.python import cp_model

    model = cp_model.CpModel()
    times = [model.new_int_var(0, packing.most, "") for _ in columns]
    terms: list[list[tuple[int, int]]] = [[] for _ in range(packing.rows)]
    for i, column in enumerate(columns):
        for row in range(packing.rows):
            if many := packing.count(column.counts, row):
                terms[row].append((i, many))
    if not all(terms):
        return None
    for helpers in terms:
        model.add(sum(many * times[i] for i, many in helpers) == packing.most)
    solved = solve(model, times, seconds=seconds, effort=effort)
    if solved.answer is not Answer.SOLUTION:
        return None
    return tuple(c for c, many in zip(columns, solved.values, strict=True) for _ in range(many))
