"""Ways across broken rules: breaches truly counted, plans mended, islands reached."""

from __future__ import annotations

from dataclasses import replace
from itertools import islice

import numpy as np
import pytest

from search.solvers.anneal import scrambled
from search.solvers.board import board_of, contents_on, objective
from search.solvers.compiled import kernel
from search.solvers.crossing import breaches, mended, parts_plans, relaxed
from search.solvers.records import Problem
from search.solvers.start import feasible_start
from search.solvers.streams import stream
from search.solvers.walk import Walk
from search.trial.checker import broken_rules
from search.trial.limits import limits
from search.trial.records import Contents
from tests.drawn import all_plans, plans_within
from tests.measure.tiny_search import best_objective, missed, small_trials, solved
from tests.ruled import ruled
from tests.solvers.problems import FOREVER, plain, problem_of

ISLANDS = {6: 1_000, 42: 224, 59: 10, 163: 1_202}
"""Seeds of small trials whose best plan no legal move leads to from the first ones, and their plans."""


def wandered(problem: Problem, contents: Contents, seed: int) -> Contents:
    """A plan that keeps block sizes and replicates, and hardly any other rule."""
    board = board_of(relaxed(problem), contents)
    kernel().wander(board.plain, stream(seed, 0), 200, False)
    return contents_on(board)


def first_plan(seed: int) -> tuple[Problem, Contents]:
    """The problem of a small trial with rules, and one of its plans."""
    trial = ruled(seed, small=True)
    problem = problem_of(trial)
    start, _ = feasible_start(trial, problem.tables, limits(trial), seed=1, seconds=60)
    return problem, start


@pytest.mark.parametrize("seed", range(12))
def test_plans_are_listed_as_by_trying_every_combination(seed: int) -> None:
    """The quick list of all plans is the slow one."""
    trial = ruled(seed, small=True)
    try:
        slowly = list(all_plans(trial, most=20_000))
    except OverflowError:
        slowly = [plan for plan in plans_within(trial, 10**6) or [] if not broken_rules(trial, plan)]
    assert plans_within(trial, 10**6) == slowly


@pytest.mark.parametrize("seed", range(24))
def test_breaches_counted_move_by_move_are_those_counted_from_scratch(seed: int) -> None:
    """The kernel's count agrees after every stretch of moves; the distances are then those of the plan."""
    problem, start = first_plan(seed)
    if not np.isfinite(objective(problem, start)):
        return
    walk = Walk(problem, start, stream(seed, 1), FOREVER)
    left = breaches(problem.tables, start)
    assert left == 0
    for hot in (10.0, 1.0, 0.1):
        *_, left = kernel().cross(walk.board.plain, walk.random, hot, 1.0, 0.1, left, 300, 3_000, 300)
        assert left == breaches(problem.tables, walk.contents)
        if np.isfinite(of_plan := objective(problem, walk.contents)):
            assert problem.weights is not None
            t = problem.tables.t
            assert (problem.weights * walk.board.metrics.inverse[:t, :t]).sum() == pytest.approx(of_plan)


@pytest.mark.parametrize("seed", range(24))
def test_a_plan_that_breaks_rules_is_mended(seed: int) -> None:
    """Whatever rules are broken, the plan that comes back obeys them all."""
    problem, start = first_plan(seed)
    broken = wandered(problem, start, seed)
    whole = mended(problem, broken, stream(seed, 2), FOREVER)
    assert whole is not None
    assert broken_rules(ruled(seed, small=True), whole) == ()


def test_rules_that_join_all_plans_need_no_way_across() -> None:
    """Without rules, and with ranges or replicates alone, exchanges join all plans (Ryser 1957)."""
    problem, _ = plain(6, 4, 3)
    assert not parts_plans(problem.tables)
    assert parts_plans(replace(problem.tables, meet_most=np.full((6, 6), 2)))
    apart = np.zeros((6, 6), dtype=bool)
    apart[0, 1] = apart[1, 0] = True
    assert parts_plans(replace(problem.tables, apart=apart))


@pytest.mark.parametrize("seed", ISLANDS)
def test_the_best_plan_is_found_on_whatever_island_it_lies(seed: int) -> None:
    """Legal moves do not lead there: runs through broken rules do."""
    trial = ruled(seed, small=True)
    plans = plans_within(trial, 3_000)
    assert plans is not None
    assert len(plans) == ISLANDS[seed]
    assert missed(trial, plans, 120_000) == 0


def test_the_way_to_another_island_is_told() -> None:
    """Scrambling the first plan never gets to the best of ten; a run through broken rules does."""
    trial = ruled(59, small=True)
    problem, plans = problem_of(trial), plans_within(trial, 3_000) or []
    _, outcome = solved(trial, 120_000)
    assert outcome.objective == (best := best_objective(problem, plans))
    start, _ = feasible_start(trial, problem.tables, limits(trial), seed=1, seconds=60)
    for run in range(20):
        assert objective(problem, scrambled(problem, start, stream(1, run), FOREVER)) > best * (1 + 1e-9)
    assert outcome.start == "through broken rules"


@pytest.mark.parametrize("seed", [0, 1, 2, 3])
def test_the_plan_does_not_depend_on_the_workers(seed: int) -> None:
    """Runs through broken rules included, one, two and three workers find the same plan in the same run."""
    outcomes = [solved(ruled(seed), 150_000, workers=workers)[1] for workers in (1, 2, 3)]
    assert len({(x.contents, x.objective, x.moves, x.run, x.ended) for x in outcomes}) == 1
    assert broken_rules(ruled(seed), outcomes[0].contents) == ()


@pytest.mark.slow
def test_of_some_hundreds_of_tiny_trials_every_one_is_solved() -> None:
    """The search finds the best of all plans, whatever rules are mixed."""
    for seed, trial, plans in islice(small_trials(), 300):
        assert missed(trial, plans, 200_000) == 0, seed
