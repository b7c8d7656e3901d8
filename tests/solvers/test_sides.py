"""The side of the blocks says the same as that of the treatments, move by move and at the end."""

from __future__ import annotations

from dataclasses import replace

import numpy as np
import pytest

from search.foundation.stopping import Limits, Stop
from search.solvers.board import board_of, contents_on, objective, refresh
from search.solvers.compiled import kernel
from search.solvers.records import Problem
from search.solvers.sides import other_side, search_smaller_side
from search.solvers.streams import stream
from search.solvers.walk import Walk
from search.trial.tables import turned
from tests.solvers.problems import FOREVER, in_turn, pairs, plain, plain_tables, within

UNEQUAL = [7, 6, 5, 5, 4, 3]


def unequal(weighted: bool) -> Problem:
    """Fifteen treatments of two plots each in six blocks of 7 to 3 plots."""
    return Problem(plain_tables(15, UNEQUAL), pairs(15) if weighted else None)


@pytest.mark.parametrize("weighted", [True, False])
def test_both_sides_have_one_objective(weighted: bool) -> None:
    """Of forty random plans in unequal blocks, each computed from scratch on either side."""
    problem = unequal(weighted)
    side = other_side(problem)
    assert side is not None
    board, random = board_of(problem, in_turn(15, UNEQUAL)), stream(1, 0)
    compared = 0
    for _ in range(40):
        kernel().wander(board.plain, random, 5, False)
        plan = contents_on(board)
        here, there = objective(problem, plan), objective(side.problem, turned(plan, 15))
        if np.isfinite(here):
            assert side.scale * there + side.constant == pytest.approx(here, rel=1e-9)
            compared += 1
    assert compared > 20


@pytest.mark.parametrize("weighted", [True, False])
def test_a_move_is_worth_the_same_on_both_sides(weighted: bool) -> None:
    """Moves made on the side of the blocks change the trial's objective as they say, in unequal blocks."""
    problem = unequal(weighted)
    side = other_side(problem)
    assert side is not None
    walk = Walk(side.problem, turned(in_turn(15, UNEQUAL), 15), stream(2, 0), FOREVER)
    for _ in range(8):
        before = objective(problem, turned(walk.contents, 6))
        move = walk.best_move(np.inf)
        assert move is not None
        rise = kernel().make_move(walk.board.plain, *move)
        after = objective(problem, turned(walk.contents, 6))
        assert side.scale * rise == pytest.approx(after - before, abs=1e-9)
        walk.cool(1e3, 1e3, 5)  # away from where no move helps
        refresh(side.problem, walk.board)


def test_a_side_is_turned_only_where_it_says_the_same() -> None:
    """Not with fewer treatments than blocks, other aims, other replications, ranges, pairs or replicates."""
    problem, _ = plain(20, 10, 6)
    tables = problem.tables
    assert other_side(problem) is not None
    first = np.eye(20)[0] - np.eye(20)[1]
    apart = np.zeros((20, 20), dtype=bool)
    apart[0, 1] = apart[1, 0] = True
    plots = tables.least + np.eye(20, dtype=np.int64)[0] - np.eye(20, dtype=np.int64)[1]
    for other in (
        plain(10, 20, 3)[0],
        Problem(tables, np.outer(first, first)),
        Problem(replace(tables, least=plots, most=plots), problem.weights),
        Problem(replace(tables, most=tables.most + 1), problem.weights),
        Problem(replace(tables, apart=apart), problem.weights),
        Problem(replace(tables, meet_most=np.full((20, 20), 2)), problem.weights),
        Problem(replace(tables, group=np.arange(10) // 5 - 1), problem.weights),
    ):
        assert other_side(other) is None


def test_turning_twice_returns_the_plan() -> None:
    """Blocks of treatments, treatments of blocks, blocks of treatments."""
    plan = in_turn(15, UNEQUAL)
    assert turned(turned(plan, 15), 6) == plan


def test_barred_and_required_blocks_are_kept_on_the_other_side() -> None:
    """A search that is turned obeys them, and any number of workers finds the same plan."""
    problem, start = plain(20, 10, 6)
    high, low = problem.tables.high.copy(), problem.tables.low.copy()
    high[0, [j for j in range(10) if 0 not in start[j]][:3]] = 0
    low[start[4][0], 4] = 1
    problem = Problem(replace(problem.tables, high=high, low=low), problem.weights)
    assert other_side(problem) is not None
    outcomes = [
        search_smaller_side(
            problem,
            start,
            kept=None,
            target=lambda _: -np.inf,
            stop=Stop(Limits(moves=60_000)),
            seed=1,
            workers=workers,
            watch=lambda *_: None,
        )
        for workers in (1, 2)
    ]
    assert outcomes[0].contents == outcomes[1].contents
    assert within(problem.tables, outcomes[0].contents)
    assert outcomes[0].objective == pytest.approx(objective(problem, outcomes[0].contents), rel=1e-9)
    assert outcomes[0].objective < objective(problem, start)
