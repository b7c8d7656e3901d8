"""Even meetings and worst pair: scores are those of a full count, and walks end where they should."""

from __future__ import annotations

import numpy as np
import pytest
from hypothesis import assume, given, settings
from hypothesis import strategies as st

from search.efficiency.balance import squared_meetings
from search.efficiency.evaluator import components, pair_variances
from search.foundation.stopping import Limits, Stop
from search.solvers.anneal import connected
from search.solvers.board import contents_on, objective
from search.solvers.compiled import kernel
from search.solvers.even_walk import EvenWalk
from search.solvers.records import Goal, Problem
from search.solvers.rounds import search
from search.solvers.streams import stream
from search.solvers.walks import walk_from
from search.solvers.worst_walk import WorstWalk
from search.trial.records import Contents
from search.trial.tables import incidence
from tests.solvers.problems import FOREVER, in_turn, moves_from, pairs, plain_tables, within


def problem_for(goal: Goal, t: int, sizes: list[int], plots: tuple[int, int] | None, twice: bool) -> Problem:
    return Problem(plain_tables(t, sizes, plots=plots, twice=twice), pairs(t), goal)


@st.composite
def walks(draw: st.DrawFn, goal: Goal) -> tuple[Problem, EvenWalk | WorstWalk]:
    """Unequal blocks, ranges of plots, repeats or none; and a connected plan to walk from."""
    t = draw(st.integers(3, 7))
    twice = draw(st.booleans())
    sizes = draw(st.lists(st.integers(2, t + 2 if twice else t), min_size=2, max_size=7))
    assume(sum(sizes) >= t + len(sizes) - 1)
    plots = (1, sum(sizes)) if draw(st.booleans()) else None
    problem = problem_for(goal, t, sizes, plots, twice)
    random = stream(draw(st.integers(0, 99)), 0)
    start = connected(problem, in_turn(t, sizes), random, FOREVER)
    assume(start is not None and within(problem.tables, start))
    assert start is not None
    walk = walk_from(problem, start, random, FOREVER)
    assert isinstance(walk, EvenWalk | WorstWalk)
    return problem, walk


def legal_moves(problem: Problem, walk: EvenWalk | WorstWalk) -> list[tuple[int, int, Contents]]:
    return [move for move in moves_from(walk.board) if within(problem.tables, move[2])]


@settings(max_examples=60, deadline=None)
@given(walks(Goal.MEETINGS))
def test_carried_meetings_are_those_of_a_fresh_count(drawn: tuple[Problem, EvenWalk]) -> None:
    """Move after move, repeats and replacements among them: the sum and all three tables stay exact."""
    problem, walk = drawn
    for hot in (1e9, 3.0, 0.0):
        walk.cool(hot, hot, 40)
        counts = incidence(walk.contents, problem.tables.t)
        meetings = counts @ counts.T
        for carried, fresh in zip(
            walk._table, (meetings, counts.T @ meetings, counts.T @ counts), strict=True
        ):
            np.testing.assert_array_equal(carried, fresh)
        assert walk.squares == squared_meetings(walk.contents, problem.tables.t)
        assert components(walk.contents, problem.tables.t) == 1
        assert within(problem.tables, walk.contents)


@settings(max_examples=60, deadline=None)
@given(walks(Goal.MEETINGS))
def test_the_best_even_move_is_the_best_of_all(drawn: tuple[Problem, EvenWalk]) -> None:
    """A scan finds the least sum of squared meetings, and among equal ones the least average."""
    problem, walk = drawn
    after = [objective(problem, x) for *_, x in legal_moves(problem, walk)]
    best = min(after, default=np.inf)
    assume(best < 1e6)
    assert walk.step(np.inf)
    assert objective(problem, walk.contents) == pytest.approx(best, abs=1e-9)
    assert walk.squares == squared_meetings(walk.contents, problem.tables.t)


@settings(max_examples=40, deadline=None)
@given(walks(Goal.MEETINGS))
def test_the_descent_never_leaves_more_than_it_found(drawn: tuple[Problem, EvenWalk]) -> None:
    """It goes back to its start where heat made the plan less even, and ends where no move helps."""
    problem, walk = drawn
    before = objective(problem, walk.contents)
    walk.cool(1e9, 1e9, 30)
    walk.descend(20_000)
    after = objective(problem, walk.contents)
    assert after <= before + 1e-9
    others = [objective(problem, x) for *_, x in legal_moves(problem, walk)]
    assert min(others, default=np.inf) >= after - 1e-8


@settings(max_examples=60, deadline=None)
@given(walks(Goal.WORST))
def test_the_best_worst_move_is_the_best_of_all(drawn: tuple[Problem, WorstWalk]) -> None:
    """A scan finds the least largest variance that a move can leave, if below the present one."""
    problem, walk = drawn
    before = objective(problem, walk.contents)
    best = min((objective(problem, x) for *_, x in legal_moves(problem, walk)), default=np.inf)
    moved = walk.step(-1e-9)
    after = objective(problem, walk.contents)
    assert after == pytest.approx(min(best, before), abs=1e-8)
    if best < before - 1e-8:
        assert moved


@settings(max_examples=40, deadline=None)
@given(walks(Goal.WORST))
def test_listed_pairs_are_the_worst_ones(drawn: tuple[Problem, WorstWalk]) -> None:
    """In falling order, after annealing too, and the first is the largest of the slow evaluator."""
    problem, walk = drawn
    walk.descend(500)
    variances = pair_variances(walk.contents, problem.tables.t)
    assert variances is not None
    largest = kernel().list_worst(walk.board.plain, walk._worst)
    assert largest == pytest.approx(variances.max(), rel=1e-9)
    first, second, listed, state = walk._worst
    found = int(state[0])
    assert found >= 1
    assert (np.diff(listed[:found]) <= 0).all()
    np.testing.assert_allclose(variances[first[:found], second[:found]], listed[:found], rtol=1e-9)


@pytest.mark.parametrize("goal", [Goal.MEETINGS, Goal.WORST])
def test_any_number_of_workers_finds_the_same_plan(goal: Goal) -> None:
    """With a limit in moves the seed alone decides."""
    problem = problem_for(goal, 9, [4, 4, 3, 3, 4, 3, 4], None, False)
    start = connected(problem, in_turn(9, [4, 4, 3, 3, 4, 3, 4]), stream(1, 0), FOREVER)
    assert start is not None
    found = [
        search(
            problem,
            start,
            kept=None,
            target=lambda number: -np.inf,
            stop=Stop(Limits(moves=200_000)),
            seed=7,
            workers=workers,
            watch=lambda *_: None,
        )
        for workers in (1, 2, 3)
    ]
    assert len({(one.contents, one.objective, one.moves) for one in found}) == 1
    assert contents_on(walk_from(problem, found[0].contents, stream(1, 1), FOREVER).board)
