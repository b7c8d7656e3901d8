"""Which treatment takes which point of a design, and which block of the trial which of its blocks.

Every labelling of a design is a plan with the same efficiency; rules about certain treatments in certain
blocks, and replicates, hold for some labellings only. CP-SAT looks for one.
"""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING

import numpy as np

from search.designs.records import Blocks
from search.foundation.cpsat import Answer, solve
from search.foundation.stopping import Stop
from search.trial.records import Contents
from search.trial.tables import Bools, Tables

if TYPE_CHECKING:
    from ortools.sat.python.cp_model import CpModel, IntVar


@dataclass(frozen=True, slots=True)
class Template:
    """Blocks to be labelled.

    Parameters
    ----------
    points : number of points
    blocks : points of each block
    where_from : what it is, in a sentence
    replicates : numbers of the blocks of each replicate, where it has some
    balanced : whether it is a balanced design
    """

    points: int
    blocks: Blocks
    where_from: str
    replicates: tuple[tuple[int, ...], ...] = ()
    balanced: bool = False


def labelled(
    template: Template, rules: Tables, *, effort: float, stop: Stop | None = None
) -> Contents | None:
    """Contents of the trial's blocks under a labelling that obeys its rules on single treatments and blocks.

    Parameters
    ----------
    template : as many points as treatments, as many blocks as blocks, and of the same sizes
    rules : tables of the trial
    stop : ends the solver from outside
    effort : deterministic work of CP-SAT

    Returns
    -------
    None where none was found; limits on meetings are not looked at
    """
    if not rules.low.any() and rules.high.all() and not rules.share.size:
        return _as_it_stands(template, rules)
    return _by_solver(template, rules, effort, stop)


def _as_it_stands(template: Template, rules: Tables) -> Contents:
    """Nothing tells treatments or blocks of one size apart: any order will do."""
    sizes = np.array([len(block) for block in template.blocks])
    contents: list[tuple[int, ...]] = [()] * rules.b
    by_size = zip(np.argsort(rules.sizes, kind="stable"), np.argsort(sizes, kind="stable"), strict=True)
    for j, q in by_size:
        contents[j] = tuple(sorted(template.blocks[q]))
    return tuple(contents)


def _by_solver(template: Template, rules: Tables, effort: float, stop: Stop | None = None) -> Contents | None:
    from ortools.sat.python import cp_model

    t, b = rules.t, rules.b
    model = cp_model.CpModel()
    point = [[model.new_bool_var("") for _ in range(t)] for _ in range(t)]
    block = [[model.new_bool_var("") for _ in range(b)] for _ in range(b)]
    for square in (point, block):
        for line in (*square, *zip(*square, strict=True)):
            model.add_exactly_one(line)
    inside = np.zeros((t, b), dtype=np.bool_)
    for q, held in enumerate(template.blocks):
        inside[list(held), q] = True
    for j in range(b):
        for q in range(b):
            if len(template.blocks[q]) != rules.sizes[j]:
                model.add(block[j][q] == 0)
    for i in range(t):
        for p in range(t):
            if not rules.least[i] <= inside[p].sum() <= rules.most[i]:
                model.add(point[i][p] == 0)
    for i, j in zip(*np.nonzero(rules.low > 0), strict=True):
        _together(model, point[i], block[j], inside)
    for i, j in zip(*np.nonzero(rules.high == 0), strict=True):
        _together(model, point[i], block[j], ~inside)
    if rules.share.size and not _match_replicates(model, template, rules, block):
        return None
    wanted = [x for line in (*point, *block) for x in line]
    solved = solve(model, wanted, seconds=300 * effort, effort=effort, stop=stop)
    if solved.answer is not Answer.SOLUTION:
        return None
    values = np.array(solved.values, dtype=np.bool_)
    to_point = values[: t * t].reshape(t, t).argmax(axis=1)
    to_block = values[t * t :].reshape(b, b).argmax(axis=1)
    treatment = np.argsort(to_point)
    return tuple(tuple(sorted(int(treatment[p]) for p in template.blocks[q])) for q in to_block)


def _together(model: CpModel, point: list[IntVar], block: list[IntVar], allowed: Bools) -> None:
    """A treatment's point and a block's image must be an allowed pair: told for each image of the block."""
    for q, image in enumerate(block):
        model.add_bool_or([image.negated(), *(point[p] for p in np.flatnonzero(allowed[:, q]))])


def _match_replicates(model: CpModel, template: Template, rules: Tables, block: list[list[IntVar]]) -> bool:
    """Each replicate of the trial takes one of the template's; False where it has too few."""
    groups = [np.flatnonzero(rules.group == g) for g in range(rules.share.shape[1])]
    if len(groups) > len(template.replicates) or (rules.share != 1).any():
        return False
    takes = [[model.new_bool_var("") for _ in template.replicates] for _ in groups]
    for line in takes:
        model.add_exactly_one(line)
    for column in zip(*takes, strict=True):
        model.add_at_most_one(column)
    for group, line in zip(groups, takes, strict=True):
        for take, replicate in zip(line, template.replicates, strict=True):
            for j in group:
                model.add_bool_or([take.negated(), *(block[j][q] for q in replicate)])
    return True
