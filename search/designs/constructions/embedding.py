"""A quasi-residual design made whole: points are added until it is symmetric.

In a symmetric design (v, k, λ) take away a block and its points: any two of the blocks that are left
meet in at most λ points. The other way round, a design with the numbers of such a rest and no two
blocks that meet in more is given k new points: each block takes λ of them, each new point stands with
each old one in λ blocks, and two blocks that met in m points share λ − m new ones.
Source: the numbers are those of Hall & Connor 1954; the search is CP-SAT's.
"""

from __future__ import annotations

from collections.abc import Iterator
from itertools import islice

import numpy as np

from search.designs.conditions import Balanced, conditions
from search.designs.constructions.action import Ints
from search.designs.constructions.common import Build, Built
from search.designs.constructions.orbits import LIGHT, base_blocks, described, developed, promising
from search.designs.records import Blocks
from search.foundation.cpsat import Answer, solve

EFFORT = 5.0
"""Deterministic work of CP-SAT for one rest."""
RESTS = 4
"""Rests that are tried."""
GROUPS = 40
"""Groups under which rests are looked for."""
MOST_BLOCKS = 40
"""Above this the model is too large to be worth a try."""


def embedding(sizes: Balanced, build: Build) -> Built | None:
    """A symmetric design from its residual, which has more blocks that can be turned than the whole."""
    rest = residual_sizes(sizes)
    if rest is None or sizes.b > MOST_BLOCKS:
        return None
    for how, blocks in islice(rests(rest, build), RESTS):
        whole = embedded(blocks, sizes, effort=EFFORT)
        if whole is not None:
            return Built(whole, f"embedding of: {how}")
    return None


def residual_sizes(sizes: Balanced) -> Balanced | None:
    """The numbers of a symmetric design without a block and its points."""
    if sizes.b != sizes.t:
        return None
    return conditions(sizes.t - sizes.k, sizes.b - 1, sizes.k - sizes.meetings).allowed


def rests(sizes: Balanced, build: Build) -> Iterator[tuple[str, Blocks]]:
    """Quasi-residual designs no two blocks of which meet in more than λ points, the one at hand first."""
    at_hand = build(sizes)
    if at_hand is not None and _meets(at_hand.blocks, sizes.t).max() <= sizes.meetings:
        yield at_hand.how, at_hand.blocks
    for group in promising(sizes)[:GROUPS]:
        base = base_blocks(sizes, group, LIGHT)
        if base is None:
            continue
        blocks = developed(group, base)
        if _meets(blocks, sizes.t).max() <= sizes.meetings:
            yield described(group, base), blocks


def embedded(blocks: Blocks, sizes: Balanced, *, effort: float) -> Blocks | None:
    """The symmetric design whose residual the blocks are, or None where the effort did not find one."""
    from ortools.sat.python import cp_model

    old, new, meetings = sizes.t - sizes.k, sizes.k, sizes.meetings
    meets = _meets(blocks, old)
    model = cp_model.CpModel()
    takes = [[model.new_bool_var("") for _ in blocks] for _ in range(new)]
    for j in range(len(blocks)):
        model.add(sum(takes[p][j] for p in range(new)) == meetings)
    for p in range(new):
        for x in range(old):
            model.add(sum(takes[p][j] for j, block in enumerate(blocks) if x in block) == meetings)
    for i in range(len(blocks)):
        for j in range(i + 1, len(blocks)):
            both = [model.new_bool_var("") for _ in range(new)]
            for p, shared in enumerate(both):
                model.add_implication(shared, takes[p][i])
                model.add_implication(shared, takes[p][j])
                model.add(takes[p][i] + takes[p][j] <= 1 + shared)
            model.add(sum(both) == meetings - int(meets[i, j]))
    for p in range(meetings):
        model.add(takes[p][0] == 1)  # new points are alike, so the first block may take the first of them
    wanted = [take for row in takes for take in row]
    solved = solve(model, wanted, seconds=30 * effort, effort=effort)
    if solved.answer is not Answer.SOLUTION:
        return None
    values = np.array(solved.values).reshape(new, len(blocks))
    added = [tuple((old + np.flatnonzero(column)).tolist()) for column in values.T]
    whole = [block + more for block, more in zip(blocks, added, strict=True)]
    return (*whole, tuple(range(old, old + new)))


def _meets(blocks: Blocks, points: int) -> Ints:
    """Points that each two blocks share, 0 for a block with itself."""
    inside = np.zeros((len(blocks), points), dtype=np.int64)
    for j, block in enumerate(blocks):
        inside[j, list(block)] = 1
    meets = inside @ inside.T
    np.fill_diagonal(meets, 0)
    return meets
