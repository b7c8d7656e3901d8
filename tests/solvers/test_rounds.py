"""The whole search: reproducible, within its limits, never worse than what it was given."""

from __future__ import annotations

import threading
import time
from dataclasses import replace
from itertools import combinations, product
from typing import Any

import numpy as np
import pytest
from hypothesis import assume, given, settings
from hypothesis import strategies as st

from search.efficiency import evaluator
from search.foundation.errors import Impossible
from search.foundation.stopping import Ended, Limits, Stop
from search.solvers import crew
from search.solvers.anneal import Cooling, Found
from search.solvers.board import objective
from search.solvers.filler import emptied
from search.solvers.records import Outcome, Problem
from search.solvers.rounds import RUNS, Best, Prepared, Way, best_of, runs_of, search
from search.trial.checker import broken_rules
from search.trial.reading import trial_from_document
from search.trial.records import Contents, Trial
from tests.drawn import all_plans, small_trials
from tests.solvers.problems import filled_problem, in_turn, pairs, plain, plain_tables, within


def found(
    problem: Problem,
    start: Contents,
    *,
    seconds: float | None = None,
    moves: int | None = None,
    **more: Any,
) -> Outcome:
    """A search with the given limits; nothing else needs to be said."""
    given = {"kept": None, "target": lambda _: -np.inf, "seed": 1, "workers": 2, "watch": lambda *_: None}
    return search(problem, start, stop=Stop(Limits(seconds, moves)), **{**given, **more})


def variance_of(efficiency: float, r: int) -> float:
    """The average pair variance of an equally replicated plan with this A-efficiency."""
    return 2 / r / efficiency


@pytest.mark.parametrize(
    ("t", "b", "k", "efficiency"),
    [
        (7, 7, 3, 7 / 9),  # balanced: E = λt/(rk), Yates 1936
        (9, 12, 3, 3 / 4),
        (13, 13, 4, 13 / 16),
        (8, 14, 4, 6 / 7),
        (10, 15, 2, 9 / 19.8),  # the Petersen graph, by its resistance distances
        (20, 16, 5, 0.8351648),  # the dual of a balanced design: linked blocks, Youden 1951
    ],
)
def test_known_best_plans_are_found(t: int, b: int, k: int, efficiency: float) -> None:
    """Balanced designs, a dual of one and the Petersen graph are reached from a plan taken in turn."""
    problem, start = plain(t, b, k)
    goal = variance_of(efficiency, b * k // t) * (1 + 1e-7)
    outcome = found(problem, start, moves=5_000_000, target=lambda _: goal)
    assert outcome.ended is Ended.BOUND_MET
    assert outcome.objective <= goal * (1 + 1e-9)


def test_a_square_lattice_is_found_replicate_by_replicate() -> None:
    """Three replicates of nine in threes: E = (k+1)/(k+1 + r/(r−1)), Yates 1936, Cheng & Bailey 1991."""
    table = replace(
        plain_tables(9, [3] * 9), group=np.repeat([2, 0, 1], 3), share=np.ones((9, 3), dtype=np.int64)
    )
    goal = variance_of(4 / (4 + 3 / 2), 3)
    outcome = found(Problem(table, pairs(9)), in_turn(9, [3] * 9), moves=2_000_000, target=lambda _: goal)
    assert outcome.ended is Ended.BOUND_MET
    for replicate in range(3):
        assert sorted(sum(outcome.contents[3 * replicate : 3 * replicate + 3], ())) == list(range(9))


@settings(max_examples=40, deadline=None)
@given(small_trials(), st.integers(0, 9))
def test_no_rule_is_broken_and_no_plan_beats_the_best(trial: Trial, seed: int) -> None:
    """On small trials with all rules mixed, the plan is one of those that exist, and truly scored."""
    try:
        problem, start = filled_problem(trial)
    except Impossible:
        assume(False)
    outcome = found(problem, start, moves=3_000, seed=seed)
    assert broken_rules(trial, emptied(outcome.contents, trial.t)) == ()
    assert outcome.objective == objective(problem, outcome.contents)
    assert outcome.objective <= objective(problem, start)
    try:
        plans = list(all_plans(trial, most=2_000))
    except OverflowError:
        return
    best = min(evaluator.objective(plan, trial) for plan in plans)
    assert outcome.objective >= best - 1e-9


def test_a_trial_whose_plans_all_fall_apart_is_searched_all_the_same() -> None:
    """Two plots of B fill a block, so that five plots cannot join three treatments and three blocks."""
    trial = trial_from_document(
        {
            "trial": "apart",
            "treatments": ["A", "B", "C"],
            "blocks": {"b0": 2, "b1": 1, "b2": 2},
            "rules": {"twice_in_block": True, "keep_out": {"A": ["b0"]}, "planted": {"101": "B", "102": "B"}},
        }
    )
    problem, start = filled_problem(trial)
    for seed in range(4):
        outcome = found(problem, start, moves=3_000, seed=seed)
        assert outcome.objective == float("inf")
        assert broken_rules(trial, outcome.contents) == ()


def test_small_trials_without_rules_are_solved() -> None:
    """Where legal moves lead everywhere, the best of all plans is found."""
    for t, sizes in ((4, [3, 2, 2]), (5, [3, 3, 2]), (4, [2, 2, 2, 2])):
        problem = Problem(plain_tables(t, sizes, plots=(1, 3)), pairs(t))
        outcome = found(problem, in_turn(t, sizes), moves=50_000)
        assert outcome.objective == pytest.approx(min(_all_objectives(problem, t, sizes)))


def _all_objectives(problem: Problem, t: int, sizes: list[int]) -> list[float]:
    plans = product(*(combinations(range(t), size) for size in sizes))
    return [objective(problem, plan) for plan in plans if within(problem.tables, plan)]


@pytest.mark.parametrize("weighted", [True, False])
def test_the_plan_does_not_depend_on_the_workers(weighted: bool) -> None:
    """One, two and three workers find the same plan by the same run after the same moves."""
    problem, start = plain(15, 15, 4)
    problem = replace(problem, weights=problem.weights if weighted else None)
    outcomes = [found(problem, start, moves=600_000, workers=workers) for workers in (1, 2, 3)]
    assert len({(x.contents, x.objective, x.moves, x.run, x.ended) for x in outcomes}) == 1
    assert found(problem, start, moves=600_000, seed=2).contents != outcomes[0].contents


def test_nor_when_the_target_ends_the_search() -> None:
    """A target reached ends it after the same round, whoever works."""
    problem, start = plain(13, 13, 4)
    goal = variance_of(13 / 16, 4)
    outcomes = [found(problem, start, target=lambda _: goal, workers=workers) for workers in (1, 2, 3)]
    assert len({(x.contents, x.moves, x.run) for x in outcomes}) == 1
    assert {x.ended for x in outcomes} == {Ended.BOUND_MET}


@pytest.mark.parametrize("moves", [5_000, 100_000, 700_000])
def test_a_limit_in_moves_is_kept_but_for_a_scan(moves: int) -> None:
    """The moves scored come to the limit, less one in a hundred or more a last scan of each run."""
    problem, start = plain(12, 15, 4)
    outcome = found(problem, start, moves=moves)
    assert outcome.ended is Ended.MOVES
    assert 0.99 * moves <= outcome.moves <= moves + RUNS * 60 * 59 / 2


def test_a_limit_in_seconds_cuts_into_runs() -> None:
    """Time is up in the middle of long runs, and the best plan is kept."""
    problem, start = plain(60, 60, 5)
    outcome = found(problem, start, seconds=0.4)
    assert outcome.ended is Ended.SECONDS
    assert 0.4 <= outcome.seconds < 2
    assert within(problem.tables, outcome.contents)
    assert outcome.objective < objective(problem, start)


def test_an_interrupt_keeps_the_best_plan() -> None:
    """The flag is seen at once, and what was found is handed on."""
    problem, start = plain(60, 60, 5)
    stop = Stop(Limits())
    threading.Timer(0.4, stop.interrupt).start()
    began = time.monotonic()
    outcome = search(
        problem,
        start,
        kept=None,
        target=lambda _: -np.inf,
        stop=stop,
        seed=1,
        workers=2,
        watch=lambda *_: None,
    )
    assert outcome.ended is Ended.INTERRUPTED
    assert time.monotonic() - began < 2
    assert within(problem.tables, outcome.contents)


def test_control_c_is_an_interrupt(monkeypatch: pytest.MonkeyPatch) -> None:
    """The first one ends the search and keeps the plan, the second one goes on to the caller."""
    problem, start = plain(12, 15, 4)
    really, presses = crew.wait, iter([True])

    def pressed(*args: Any, **more: Any) -> Any:
        if next(presses, False):
            raise KeyboardInterrupt
        return really(*args, **more)

    monkeypatch.setattr(crew, "wait", pressed)
    assert found(problem, start).ended is Ended.INTERRUPTED
    presses = iter([True, True])
    with pytest.raises(KeyboardInterrupt):
        found(problem, start)


def test_an_error_in_a_run_is_not_swallowed(monkeypatch: pytest.MonkeyPatch) -> None:
    """What goes wrong in a thread comes out of the search, at once."""

    def broken(*_: Any) -> None:
        raise ArithmeticError

    monkeypatch.setattr("search.solvers.rounds.scrambled", broken)
    with pytest.raises(ArithmeticError):
        found(*plain(12, 15, 4))


def test_a_kept_plan_is_never_lost() -> None:
    """A search too short to find as good a plan hands the kept one back; a longer one may better it."""
    problem, start = plain(30, 30, 5)
    kept = found(problem, start, moves=1_000_000).contents
    short = found(problem, start, moves=1_000, kept=kept, seed=5)
    assert short.objective <= objective(problem, kept)
    if short.contents == kept:
        assert (short.run, short.start) == (-1, "kept plan")
    longer = found(problem, start, moves=2_000_000, kept=kept, seed=5)
    assert longer.objective <= objective(problem, kept)


def test_a_kept_plan_at_the_target_ends_the_search_before_it_begins() -> None:
    """Nothing is searched where nothing can be gained."""
    problem, start = plain(7, 7, 3)
    goal = variance_of(7 / 9, 3)
    kept = found(problem, start, target=lambda _: goal).contents
    asked: list[int] = []
    again = found(problem, start, kept=kept, target=lambda number: asked.append(number) or goal)
    assert (again.ended, again.moves, again.run, asked) == (Ended.BOUND_MET, 0, -1, [0])


@pytest.mark.parametrize(
    ("t", "sizes"),
    [(5, [5, 5, 5]), (6, [6]), (2, [2, 2, 2]), (3, [3])],
    ids=["complete", "one", "two", "tiny"],
)
def test_where_nothing_can_move_the_start_is_handed_back(t: int, sizes: list[int]) -> None:
    """Complete blocks, one block, two treatments: no legal move, no waiting for the clock."""
    problem, start = Problem(plain_tables(t, sizes), pairs(t)), in_turn(t, sizes)
    outcome = found(problem, start, seconds=30)
    assert (outcome.contents, outcome.ended, outcome.moves) == (start, Ended.MOVES, 0)
    assert outcome.objective == pytest.approx(2 / len(sizes))
    assert outcome.seconds < 5


def test_a_start_that_cannot_be_connected_is_handed_back() -> None:
    """With fewer plots than a connected plan needs, the objective is infinite."""
    problem = Problem(plain_tables(6, [2, 2, 2]), pairs(6))
    outcome = found(problem, ((0, 1), (2, 3), (4, 5)), seconds=30)
    assert (outcome.objective, outcome.ended) == (np.inf, Ended.MOVES)


def test_a_disconnected_start_is_connected() -> None:
    """Four treatments in pairs that only meet each other end in the cycle."""
    problem = Problem(plain_tables(4, [2] * 4), pairs(4))
    outcome = found(problem, ((0, 1), (0, 1), (2, 3), (2, 3)), moves=5_000)
    assert outcome.objective == pytest.approx((4**3 - 4) / 12 * 2 / 6)


def test_the_watcher_is_told_of_progress() -> None:
    """Objectives never rise, moves and seconds never fall, and the last told is the outcome's."""
    problem, start = plain(30, 30, 5)
    told: list[tuple[float, int, float]] = []
    outcome = found(problem, start, moves=2_000_000, watch=lambda *state: told.append(state))
    objectives, moves, seconds = (np.array(x) for x in zip(*told, strict=True))
    assert (np.diff(objectives) <= 0).all()
    assert (np.diff(moves) >= 0).all()
    assert (np.diff(seconds) >= 0).all()
    assert objectives[-1] == outcome.objective
    assert moves[-1] == outcome.moves


def ready(start: Contents, *, crossing: bool = False) -> Prepared:
    """Runs start from one plan, through broken rules too where that is wanted."""
    cooling = Cooling(1.0, 0.1)
    return Prepared((start,), cooling, start if crossing else None, cooling if crossing else None)


def test_runs_of_a_round_do_not_depend_on_workers_or_clock() -> None:
    """Six runs, growing slowly; four of them gentle once there is a plan; fewer where little is left."""
    problem, start = plain(12, 15, 4)
    best = Best(start, 0.5, 3, "random start")
    first, second = (runs_of(number, problem, ready(start), best, False, np.inf) for number in (0, 1))
    assert [run.number for run in [*first, *second]] == list(range(12))
    assert [run.way for run in first] == [Way.SCRAMBLING] * 6
    assert [run.way for run in second] == [Way.REHEATING] * 4 + [Way.SCRAMBLING] * 2
    assert first[0].moves < second[0].moves < 2 * first[0].moves
    assert runs_of(0, problem, ready(start), best, True, np.inf)[0].way is Way.REHEATING
    assert [run.moves for run in runs_of(5, problem, ready(start), best, False, 50_000)] == [25_000, 25_000]
    assert [run.moves for run in runs_of(5, problem, ready(start), best, False, 700)] == [700]


def test_where_rules_may_part_the_plans_some_runs_go_through_broken_rules() -> None:
    """They do in every round, all of them where nothing else can be done; and none where nothing can."""
    problem, start = plain(12, 15, 4)
    best = Best(start, 0.5, 3, "random start")
    for number in (0, 1):
        runs = runs_of(number, problem, ready(start, crossing=True), best, False, np.inf)
        assert {run.way for run in runs} >= {Way.CROSSING, Way.SCRAMBLING}
    alone = replace(ready(start, crossing=True), origins=(), cooling=None)
    assert {run.way for run in runs_of(1, problem, alone, best, False, np.inf)} == {Way.CROSSING}
    nothing = replace(alone, shore=None, crossing=None)
    assert runs_of(1, problem, nothing, best, False, np.inf) == []


def test_of_equal_plans_the_lowest_run_wins() -> None:
    """Rounding does not decide between runs, and the plan before the round stays where none is better."""
    problem, start = plain(12, 15, 4)
    before = Best(start, 0.6, 2, "random start")
    runs = runs_of(1, problem, ready(start), before, False, np.inf)[:3]
    results = [Found(start, 0.5, 1), Found(start, 0.5 - 1e-15, 1), None]
    assert best_of(problem, before, runs, results).run == runs[0].number
    assert best_of(problem, replace(before, objective=0.5), runs, results).run == 2
