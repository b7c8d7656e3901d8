"""Cutting a field into connected parts of nearly equal size: along its lines, or compactly by CP-SAT."""

from __future__ import annotations

from collections import deque
from collections.abc import Sequence
from dataclasses import dataclass
from itertools import groupby
from math import dist, sqrt
from typing import TYPE_CHECKING

from search.foundation.cpsat import Answer, solve
from search.trial.numbering import Place

if TYPE_CHECKING:
    from ortools.sat.python.cp_model import CpModel, IntVar

NEAREST = 10
"""A plot is offered to so many of the nearest bays."""
ROUNDS = 3
EFFORT = 0.8
"""Deterministic work of the solver a round, so that a field is always cut the same way."""
SECONDS = 30.0
MOST_PLOTS = 1_200
"""Larger fields are cut along their lines alone."""
CENTIMETRES = 100


@dataclass(frozen=True, slots=True)
class Cut:
    """A field in parts: for each plot the number of its bay."""

    bay_of: tuple[int, ...]
    count: int
    how: str

    @property
    def parts(self) -> frozenset[frozenset[int]]:
        """The bays as sets of plots, whatever their numbers."""
        return frozenset(frozenset(_members(self, bay)) for bay in range(self.count))


@dataclass(frozen=True, slots=True)
class Field:
    """Plots as a graph.

    Parameters
    ----------
    sites : the plots
    middles : where they lie, in metres
    beside : for each plot those that share an edge with it; parts that no edge joins are joined where
        they come nearest to one another
    """

    sites: tuple[Place, ...]
    middles: tuple[tuple[float, float], ...]
    beside: tuple[frozenset[int], ...]

    @classmethod
    def of(cls, sites: Sequence[Place], middles: Sequence[tuple[float, float]]) -> Field:
        """The field of some plots."""
        at = {(site.row, site.column): p for p, site in enumerate(sites)}
        beside: list[set[int]] = [set() for _ in sites]
        for (row, column), p in at.items():
            for beyond in ((row + 1, column), (row, column + 1)):
                if beyond in at:
                    beside[p].add(at[beyond])
                    beside[at[beyond]].add(p)
        _join(beside, middles)
        return cls(tuple(sites), tuple(middles), tuple(map(frozenset, beside)))

    def steps_from(self, start: int) -> list[int]:
        """Steps from plot to plot beside it, from one plot to every other."""
        steps = [-1] * len(self.sites)
        steps[start] = 0
        waiting = deque([start])
        while waiting:
            p = waiting.popleft()
            for q in self.beside[p]:
                if steps[q] < 0:
                    steps[q] = steps[p] + 1
                    waiting.append(q)
        return steps

    def holds_together(self, cut: Cut) -> bool:
        """Whether every bay is connected."""
        seen: set[int] = set()
        pieces = 0
        for p in range(len(self.sites)):
            if p in seen:
                continue
            pieces += 1
            waiting = [p]
            seen.add(p)
            while waiting:
                at = waiting.pop()
                more = [q for q in self.beside[at] if q not in seen and cut.bay_of[q] == cut.bay_of[p]]
                seen.update(more)
                waiting += more
        return pieces == cut.count


def walked(field: Field, count: int, strips: int) -> Cut:
    """Bays cut off one after another from a walk through the field, strip by strip and back again.

    Parameters
    ----------
    field : the field
    count : bays
    strips : bundles of lines that are walked across; as many as lines makes bays along the lines
    """
    lines = 1 + max(site.row for site in field.sites)
    at = [(site.row * strips // lines, site.column, site.row) for site in field.sites]
    plots = sorted(range(len(at)), key=lambda p: at[p])
    order: list[int] = []
    for turn, (_, strip) in enumerate(groupby(plots, key=lambda p: at[p][0])):
        order += reversed(list(strip)) if turn % 2 else strip
    size, larger = divmod(len(order), count)
    bay_of = [0] * len(order)
    start = 0
    for bay in range(count):
        end = start + size + (bay < larger)
        for p in order[start:end]:
            bay_of[p] = bay
        start = end
    how = {1: "along the columns", lines: "along the lines"}.get(strips, f"in {strips} strips")
    return Cut(tuple(bay_of), count, how)


def square_strips(field: Field, count: int) -> int:
    """Strips for which bays cut from them come out about as long as wide."""
    xs, ys = zip(*field.middles, strict=True)
    wide, long = max(xs) - min(xs), max(ys) - min(ys)
    lines = 1 + max(site.row for site in field.sites)
    return min(lines, max(1, round(sqrt(count * long / wide)))) if wide > 0 else lines


def compact(field: Field, start: Cut) -> Cut:
    """Bays gathered about middles, which then move to where their bays lie, a few times over.

    Each round is the least sum of squared distances from plots to the middles of their bays, sizes as
    even as the count allows and every bay connected (Lloyd 1982, with sizes). The cut that it starts
    from comes back where the solver finds none.
    """
    best = start
    if len(field.sites) > MOST_PLOTS:
        return best
    for _ in range(ROUNDS):
        found = _gathered(field, best, NEAREST) or _gathered(field, best, best.count)
        if found is None or found.bay_of == best.bay_of:
            break
        best = found
    return best


def _gathered(field: Field, cut: Cut, nearest: int) -> Cut | None:
    from ortools.sat.python import cp_model

    model = cp_model.CpModel()
    middles = [_middle(field, cut, bay) for bay in range(cut.count)]
    seats = [_seat(field, cut, bay, middle) for bay, middle in enumerate(middles)]
    joins: dict[tuple[int, int], IntVar] = {}
    for p, place in enumerate(field.middles):
        near = sorted(range(cut.count), key=lambda bay: dist(place, middles[bay]))[:nearest]
        for bay in dict.fromkeys((*near, cut.bay_of[p])):
            joins[p, bay] = model.new_bool_var("")
        model.add_exactly_one(joins[p, bay] for bay in dict.fromkeys((*near, cut.bay_of[p])))
    _even_sizes(model, joins, len(field.sites), cut.count)
    for bay, seat in enumerate(seats):
        steps = field.steps_from(seat)
        model.add(joins[seat, bay] == 1)
        for p in range(len(field.sites)):
            if p != seat and (p, bay) in joins:
                # A plot may join where one a step nearer to the seat has joined: so bays stay connected.
                nearer = [joins[q, bay] for q in field.beside[p] if steps[q] < steps[p] and (q, bay) in joins]
                model.add_bool_or(~joins[p, bay], *nearer)
    cost = {
        key: round((CENTIMETRES * dist(field.middles[key[0]], middles[key[1]])) ** 2 / CENTIMETRES)
        for key in joins
    }
    model.minimize(sum(cost[key] * joined for key, joined in joins.items()))
    for key, joined in joins.items():
        model.add_hint(joined, int(cut.bay_of[key[0]] == key[1]))
    solved = solve(model, list(joins.values()), seconds=SECONDS, effort=EFFORT)
    if solved.answer is not Answer.SOLUTION:
        return None
    bay_of = {p: bay for (p, bay), on in zip(joins, solved.values, strict=True) if on}
    return Cut(tuple(bay_of[p] for p in range(len(field.sites))), cut.count, "gathered about their middles")


def _even_sizes(model: CpModel, joins: dict[tuple[int, int], IntVar], plots: int, count: int) -> None:
    for bay in range(count):
        size = sum(joined for (_, of), joined in joins.items() if of == bay)
        model.add_linear_constraint(size, plots // count, -(-plots // count))


def _members(cut: Cut, bay: int) -> list[int]:
    return [p for p, of in enumerate(cut.bay_of) if of == bay]


def _seat(field: Field, cut: Cut, bay: int, middle: tuple[float, float]) -> int:
    """The plot of a bay that lies nearest to its middle."""
    return min(_members(cut, bay), key=lambda p: dist(field.middles[p], middle))


def _middle(field: Field, cut: Cut, bay: int) -> tuple[float, float]:
    places = [field.middles[p] for p in _members(cut, bay)]
    return sum(x for x, _ in places) / len(places), sum(y for _, y in places) / len(places)


def _join(beside: list[set[int]], middles: Sequence[tuple[float, float]]) -> None:
    """Join the parts of the graph, each to the nearest plot of those before it."""
    left = set(range(len(beside)))
    joined: list[int] = []
    while left:
        part = _part(beside, min(left))
        if joined:
            p, q = min(
                ((p, q) for p in part for q in joined),
                key=lambda pair: dist(middles[pair[0]], middles[pair[1]]),
            )
            beside[p].add(q)
            beside[q].add(p)
        joined += sorted(part)
        left -= part


def _part(beside: list[set[int]], start: int) -> set[int]:
    part, waiting = {start}, [start]
    while waiting:
        more = beside[waiting.pop()] - part
        part |= more
        waiting += more
    return part
