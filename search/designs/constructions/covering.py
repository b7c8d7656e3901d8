"""Choose orbits of blocks that together cover every orbit of pairs exactly λ times.

Kramer and Mesner 1976: t-designs on hypergraphs. Discrete Mathematics 15, 263–296.
"""

from __future__ import annotations

from collections.abc import Sequence

from search.designs.constructions.columns import Budget, Column, Packing
from search.foundation.cpsat import Answer, solve


def cover(columns: Sequence[Column], packing: Packing, budget: Budget) -> tuple[Column, ...] | None:
    """Depth-first: every column that helps the first row that lacks something; the last two are looked up.

    None with work left in the budget means that these columns hold no solution.
    """
    by_counts = {column.counts: column for column in columns}
    guards = packing.guards
    masks = packing.masks()
    helping = [sum(1 for counts in by_counts if counts & mask) for mask in masks]
    order = [masks[row] for row in sorted(range(packing.rows), key=helping.__getitem__)]

    def extend(room: int, fitting: list[int], chosen: tuple[int, ...]) -> tuple[int, ...] | None:
        mask = next((mask for mask in order if room & mask), 0)
        helpers = [counts for counts in fitting if counts & mask]
        two = next((counts for counts in helpers if room - counts in by_counts), 0)
        if two:
            return (*chosen, two, room - two)
        others = [counts for counts in fitting if not counts & mask]
        for i, counts in enumerate(helpers):
            if not budget.spend(1 + (len(fitting) - i) // 8):
                return None
            less = room - counts
            guarded = less | guards
            # What came before among the helpers has been tried with everything, so it can be left out.
            left = [c for c in helpers[i:] if (guarded - c) & guards == guards]
            left += [c for c in others if (guarded - c) & guards == guards]
            found = extend(less, left, (*chosen, counts))
            if found is not None:
                return found
        return None

    if packing.target in by_counts:
        return (by_counts[packing.target],)
    found = extend(packing.target, list(by_counts), ()) if all(helping) else None
    return None if found is None else tuple(by_counts[counts] for counts in found)


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
