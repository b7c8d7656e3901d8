"""Designs whose blocks are dealt into complete replicates."""

from __future__ import annotations

from collections.abc import Iterator
from functools import cache
from itertools import islice

from search.designs.building import build, directly
from search.designs.conditions import Balanced, with_meetings
from search.designs.constructions.common import Built
from search.designs.constructions.orbits import LIGHT, base_blocks, described, developed, promising
from search.designs.constructions.sums import together
from search.designs.records import Blocks, Design
from search.designs.theorems import obstruction
from search.foundation.cpsat import Answer, solve

EFFORT = 2.0
"""Deterministic work of CP-SAT for one design."""
GROUPS = 120
"""Groups under which further designs are looked for when the first has no replicates."""
DEALT = 8
"""Designs whose blocks are tried to be dealt into replicates."""

Replicates = tuple[tuple[int, ...], ...]


def resolved(sizes: Balanced) -> Design | None:
    """A resolvable design with its replicates, or None where none was found."""
    built = _resolved(sizes)
    return None if built is None else Design(sizes, built.blocks, built.how, built.replicates)


@cache
def _resolved(sizes: Balanced) -> Built | None:
    if obstruction(sizes, resolvable=True):
        return None
    at_hand = directly(sizes)
    if at_hand is not None and at_hand.replicates:
        return at_hand
    return _by_sum(sizes) or _by_search(sizes)


def _by_sum(sizes: Balanced) -> Built | None:
    for less in range(1, sizes.meetings // 2 + 1):
        first_sizes = with_meetings(sizes.t, sizes.k, less)
        second_sizes = with_meetings(sizes.t, sizes.k, sizes.meetings - less)
        first = _resolved(first_sizes) if first_sizes and second_sizes else None
        second = _resolved(second_sizes) if first and second_sizes else None
        if first and second:
            return together(first, second)
    return None


def _by_search(sizes: Balanced) -> Built | None:
    """Deal the blocks of one design after another, as not every one can be dealt."""
    for candidate in islice(_candidates(sizes), DEALT):
        replicates = dealt(candidate.blocks, sizes, effort=EFFORT)
        if replicates:
            return Built(candidate.blocks, f"{candidate.how}; dealt into replicates by CP-SAT", replicates)
    return None


def _candidates(sizes: Balanced) -> Iterator[Built]:
    at_hand = build(sizes)
    if at_hand is None:
        return
    yield at_hand
    for group in promising(sizes)[:GROUPS]:
        base = base_blocks(sizes, group, LIGHT)
        if base is not None:
            yield Built(developed(group, base), described(group, base))


def dealt(blocks: Blocks, sizes: Balanced, *, effort: float) -> Replicates:
    """Numbers of the blocks of each replicate; empty where the effort found no way to deal them."""
    from ortools.sat.python import cp_model

    model = cp_model.CpModel()
    takes = [[model.new_bool_var("") for _ in blocks] for _ in range(sizes.r)]
    for j in range(len(blocks)):
        model.add_exactly_one(takes[g][j] for g in range(sizes.r))
    holding = [[j for j, block in enumerate(blocks) if x in block] for x in range(sizes.t)]
    for take in takes:
        for here in holding:
            model.add_exactly_one(take[j] for j in here)
    for g, j in enumerate(holding[0]):  # the blocks of one treatment all stand in different replicates
        model.add(takes[g][j] == 1)
    wanted = [take for row in takes for take in row]
    solved = solve(model, wanted, seconds=300 * effort, effort=effort)
    if solved.answer is not Answer.SOLUTION:
        return ()
    b = len(blocks)
    return tuple(tuple(j for j in range(b) if solved.values[g * b + j]) for g in range(sizes.r))
