"""The orbit engine: designs with a group of automorphisms, in place of one program per named family.

A design that a group carries into itself is a union of orbits of blocks, and each orbit covers the pairs
of one orbit of pairs equally often. So it is enough to know how often every orbit of blocks covers every
orbit of pairs, and to choose orbits that sum to λ everywhere (Kramer and Mesner 1976).
"""

from __future__ import annotations

from collections.abc import Iterator, Sequence
from dataclasses import dataclass

import numpy as np

from search.designs.conditions import Balanced
from search.designs.constructions.action import Action, stabilisers
from search.designs.constructions.columns import Budget, Column, Packing, columns
from search.designs.constructions.common import Build, Built
from search.designs.constructions.covering import cover, cover_by_solver
from search.designs.constructions.groups import Group, groups
from search.designs.records import Blocks


@dataclass(frozen=True, slots=True)
class Effort:
    """How hard one group is tried.

    Parameters
    ----------
    steps : of the search for blocks, for each stabiliser
    columns : orbits of blocks kept
    cover : steps of the cover
    solver : deterministic work of CP-SAT where the cover was cut short
    """

    steps: int
    columns: int
    cover: int
    solver: float


LIGHT = Effort(3_000, 2_000, 30_000, 0.03)
MEDIUM = Effort(40_000, 10_000, 1_000_000, 0.5)
SEARCHED_TREATMENTS = 100
SEARCHED_REPLICATION = 20
"""Up to here every set was searched once for longer than a user would wait; what was found is stored."""
MOST_TREATMENTS = 150
"""Beyond this even one group takes too long for an answer while somebody waits."""
MOST_ROWS = 400
"""Orbits of pairs beyond which a group is of no help."""
SYMMETRIC = 8
"""Times as many steps for symmetric designs, where few blocks pass the test that any two meet in λ points."""
TRIED = 60
"""Groups tried with light effort; a sixth of them once more with medium effort."""


def orbits(sizes: Balanced, build: Build) -> Built | None:
    """The first design that a bounded search under groups of many kinds comes upon."""
    searched_before = sizes.t <= SEARCHED_TREATMENTS and sizes.r <= SEARCHED_REPLICATION
    if searched_before or sizes.t > MOST_TREATMENTS:
        return None
    candidates = promising(sizes)
    for effort, many in ((LIGHT, TRIED), (MEDIUM, TRIED // 6)):
        for group in candidates[:many]:
            base = base_blocks(sizes, group, effort)
            if base is not None:
                return Built(developed(group, base), described(group, base))
    return None


def described(group: Group, base: Sequence[tuple[int, ...]]) -> str:
    """A design known by its group, in a sentence."""
    many = f"{len(base)} base {'block' if len(base) == 1 else 'blocks'}"
    return f"{many} under a group of order {group.order}: {group} (orbit method, Kramer and Mesner 1976)"


def promising(sizes: Balanced, *, most_fixed: int = 2) -> list[Group]:
    """Groups worth trying, the largest interleaved with those of about half as many elements as blocks."""
    largest = groups(sizes.t, least=max(3, sizes.b // 12), most=16 * sizes.b, most_fixed=most_fixed)
    middling = sorted(largest, key=lambda group: abs(2 * group.order - sizes.b))
    both = (group for pair in zip(largest, middling, strict=True) for group in pair)
    return list(dict.fromkeys(both))


def base_blocks(sizes: Balanced, group: Group, effort: Effort) -> Blocks | None:
    """Blocks whose orbits make a design, or None where the effort did not find any."""
    action = Action.of(group.permutations())
    if len(action.lengths) > MOST_ROWS:
        return None
    packing = Packing(len(action.lengths), sizes.meetings)
    found = list(_columns(sizes, action, packing, effort))
    budget = Budget(effort.cover)
    chosen = cover(found, packing, budget)
    if chosen is None and budget.spent:
        chosen = cover_by_solver(found, packing, effort=effort.solver, seconds=30 * effort.solver)
    if chosen is None:
        return None
    return tuple(block for column in chosen for block in _as_often(action, column))


def _columns(sizes: Balanced, action: Action, packing: Packing, effort: Effort) -> Iterator[Column]:
    seen = set[tuple[int, int]]()
    for stabiliser in stabilisers(action):
        if action.order // stabiliser.order > sizes.b:
            continue
        steps = effort.steps * (SYMMETRIC if sizes.b == sizes.t else 1)
        for column in columns(action, stabiliser, sizes.k, packing, Budget(steps)):
            key = column.counts, column.blocks
            if key in seen or not _may_stand(sizes, action, column):
                continue
            if len(seen) == effort.columns:
                return
            seen.add(key)
            yield column


def _may_stand(sizes: Balanced, action: Action, column: Column) -> bool:
    """In a symmetric design any two blocks meet in λ points, those of one orbit among them."""
    if sizes.b != sizes.t:
        return True
    inside = np.zeros(action.elements.shape[1], dtype=np.int64)
    inside[list(column.block)] = 1
    met = inside[action.elements[:, list(column.block)]].sum(axis=1)
    return bool(((met == sizes.meetings) | (met == sizes.k)).all())


def _as_often(action: Action, column: Column) -> Blocks:
    """The block as often as its orbit is taken: more than once if its stabiliser is larger than asked for."""
    return (column.block,) * (column.blocks // len(action.developed(column.block)))


def developed(group: Group, base: Sequence[tuple[int, ...]]) -> Blocks:
    """The orbits of base blocks, one after another."""
    action = group.permutations()
    blocks: list[tuple[int, ...]] = []
    for block in base:
        images = np.unique(np.sort(action[:, list(block)], axis=1), axis=0)
        blocks += map(tuple, images.tolist())
    return tuple(blocks)
