"""The kernel: scores and carried distances are those of a full computation, and every move is legal."""

from __future__ import annotations

import os
import subprocess
import sys
from dataclasses import replace
from fractions import Fraction
from pathlib import Path

import numpy as np
import pytest
from hypothesis import HealthCheck, assume, given, settings
from hypothesis import strategies as st

from search.foundation.errors import Impossible
from search.solvers.anneal import connected
from search.solvers.board import board_of, contents_on, objective, refresh
from search.solvers.compiled import ENTRIES, MORE_ENTRIES, kernel
from search.solvers.filler import emptied
from search.solvers.records import Floats, Problem
from search.solvers.streams import stream
from search.solvers.walk import Walk
from search.trial.checker import broken_rules
from search.trial.records import Trial
from search.trial.tables import tables
from tests.drawn import small_trials
from tests.solvers import plainly
from tests.solvers.problems import (
    FOREVER,
    filled_problem,
    in_turn,
    moves_from,
    pairs,
    plain,
    plain_tables,
    within,
)


def aim_of(kind: str, t: int) -> Floats | None:
    """W of an aim: all pairs, one treatment against the rest, two contrasts, or none for overall."""
    if kind == "all pairs":
        return pairs(t)
    if kind == "against control":
        rows = np.eye(t)[0] - np.eye(t)[1:]
    elif kind == "contrasts":
        rows = np.array([np.eye(t)[0] - np.eye(t)[1], np.eye(t)[0] / 2 + np.eye(t)[1] / 2 - np.eye(t)[2]])
    else:
        return None
    return np.asarray(rows.T @ rows / len(rows))


@st.composite
def connected_problems(draw: st.DrawFn) -> tuple[Problem, Walk]:
    """Unequal blocks, fixed or random, ranges of plots, repeats or none, every aim; a plan to walk from."""
    t = draw(st.integers(3, 7))
    twice = draw(st.booleans())
    sizes = draw(st.lists(st.integers(2, t + 2 if twice else t), min_size=2, max_size=7))
    assume(sum(sizes) >= t + len(sizes) - 1)
    plots = (1, sum(sizes)) if draw(st.booleans()) else None
    aim = draw(st.sampled_from(["all pairs", "against control", "contrasts", "overall"]))
    ratio = draw(st.sampled_from([None, None, None, Fraction(1, 3), Fraction(5)]))
    problem = Problem(plain_tables(t, sizes, plots=plots, twice=twice), aim_of(aim, t), ratio)
    random = stream(draw(st.integers(0, 99)), 0)
    start = connected(problem, in_turn(t, sizes), random, FOREVER)
    assume(start is not None and within(problem.tables, start))
    assert start is not None
    return problem, Walk(problem, start, random, FOREVER)


@settings(max_examples=60, deadline=None)
@given(connected_problems())
def test_a_score_is_what_a_full_computation_says(drawn: tuple[Problem, Walk]) -> None:
    """Every legal move of a plan raises the objective as much as numpy finds from scratch."""
    problem, walk = drawn
    before = objective(problem, walk.contents)
    legal = [(*move, after) for *move, after in moves_from(walk.board) if within(problem.tables, after)]
    assert len(legal) == kernel().best_move(walk.board.plain, 0, problem.tables.b, -np.inf)[0]
    for plot, partner, contents in legal[:: max(1, len(legal) // 20)]:
        after = objective(problem, contents)
        if after > 50:
            continue  # disconnected, or nearly: the search refuses such moves
        board = board_of(problem, walk.contents)
        refresh(problem, board)
        rise = kernel().make_move(board.plain, plot, partner)
        assert contents_on(board) == contents
        assert rise == pytest.approx(after - before, rel=1e-7, abs=1e-10)


@settings(max_examples=40, deadline=None)
@given(connected_problems())
def test_the_best_move_is_the_best_of_all(drawn: tuple[Problem, Walk]) -> None:
    """A scan finds the least rise of all legal moves."""
    problem, walk = drawn
    before = objective(problem, walk.contents)
    after = [objective(problem, x) for _, _, x in moves_from(walk.board) if within(problem.tables, x)]
    best = min(after, default=np.inf)
    assume(np.isfinite(best))
    assert walk.step(np.inf)
    assert objective(problem, walk.contents) - before == pytest.approx(best - before, abs=1e-9)


@settings(max_examples=30, deadline=None)
@given(connected_problems())
def test_exchanging_twice_returns_the_start(drawn: tuple[Problem, Walk]) -> None:
    """The same exchange again leads back to the same contents, distances and objective."""
    problem, walk = drawn
    move = walk.best_move(np.inf)
    assume(move is not None and move[1] < problem.tables.n)
    assert move is not None
    contents, board = walk.contents, walk.board
    inverse, worth = board.metrics.inverse.copy(), board.metrics.worth.copy()
    rises = [kernel().make_move(board.plain, *move) for _ in range(2)]
    assert walk.contents == contents
    assert sum(rises) == pytest.approx(0, abs=1e-9)
    np.testing.assert_allclose(board.metrics.inverse, inverse, atol=1e-9)
    np.testing.assert_allclose(board.metrics.worth, worth, atol=1e-9)


@pytest.mark.parametrize("aim", ["all pairs", "contrasts", "overall"])
@pytest.mark.parametrize("twice", [False, True])
def test_carried_tables_do_not_drift(aim: str, twice: bool) -> None:
    """After 20,000 accepted moves all that is carried equals what is made afresh, to 1e-9."""
    sizes = [5, 5, 4, 4, 4, 3, 3, 2]
    problem = Problem(plain_tables(7, sizes, plots=(2, 7), twice=twice), aim_of(aim, 7))
    walk = Walk(problem, in_turn(7, sizes), stream(1, 0), FOREVER)
    _, _, accepted, _ = kernel().anneal(
        walk.board.plain, walk.random, 1e9, 1.0, 10**7, 10**7, 20_000, np.zeros(0)
    )
    assert accepted == 20_000
    fresh = board_of(problem, walk.contents)
    refresh(problem, fresh)
    for carried, anew in zip(walk.board.metrics[:2], fresh.metrics[:2], strict=True):
        np.testing.assert_allclose(carried, anew, rtol=0, atol=1e-9)
    for name in ("plots", "copies", "gate"):
        np.testing.assert_array_equal(getattr(walk.board.planting, name), getattr(fresh.planting, name))


@settings(max_examples=60, deadline=None)
@given(small_trials(), st.integers(0, 99))
def test_every_move_obeys_every_rule(trial: Trial, seed: int) -> None:
    """Whatever rules are mixed, a walk of legal moves never breaks one and keeps its books in order."""
    try:
        problem, start = filled_problem(trial)
    except Impossible:
        assume(False)
    board, random = board_of(problem, start), stream(seed, 0)
    for _ in range(30):
        kernel().wander(board.plain, random, 5, False)
        contents = contents_on(board)
        # A walk that may disconnect a plan may also leave a block with filler alone.
        held = emptied(contents, trial.t)
        assert broken_rules(trial, held) == () or not all(held)
    books = board_of(problem, contents).planting
    names = ["plots", "copies", "gate"] + ["meetings"] * problem.tables.limits_meetings
    for name in names:
        np.testing.assert_array_equal(getattr(board.planting, name), getattr(books, name))


@settings(max_examples=40, deadline=None, suppress_health_check=[HealthCheck.filter_too_much])
@given(small_trials())
def test_no_legal_move_is_left_out(trial: Trial) -> None:
    """The moves that a scan scores are those whose outcome obeys every rule, meetings apart."""
    try:
        problem, start = filled_problem(trial)
    except Impossible:
        assume(False)
    start = connected(problem, start, stream(1, 0), FOREVER) or ()
    assume(start and tables(trial).exact and not problem.tables.limits_meetings)
    walk = Walk(problem, start, stream(1, 0), FOREVER)
    legal = sum(broken_rules(trial, after) == () for _, _, after in moves_from(walk.board))
    assert kernel().best_move(walk.board.plain, 0, trial.b, -np.inf)[0] == legal


def test_meetings_are_limited_move_by_move() -> None:
    """With meetings limited, the moves made are exactly those that keep the limits."""
    problem, start = plain(6, 6, 3)
    table = replace(problem.tables, meet_most=np.full((6, 6), 2), least=np.full(6, 2), most=np.full(6, 4))
    problem = Problem(table, problem.weights)
    start = ((0, 1, 2), (1, 3, 4), (2, 4, 5), (0, 3, 5), (0, 1, 4), (2, 3, 5))

    def keeps(contents: tuple[tuple[int, ...], ...]) -> bool:
        held = np.zeros((6, 6), dtype=np.int64)
        for j, block in enumerate(contents):
            held[list(block), j] = 1
        return bool((np.triu(held @ held.T, 1) <= 2).all()) and within(table, contents)

    assert keeps(start)
    expected = {after for _, _, after in moves_from(board_of(problem, start)) if keeps(after)}
    reached = set()
    board, random = board_of(problem, start), stream(3, 0)
    for _ in range(10_000):
        if kernel().wander(board.plain, random, 1, False)[0]:
            reached.add(contents_on(board))
            board = board_of(problem, start)
    assert reached == expected


def test_an_exchange_that_only_renames_blocks_is_not_made() -> None:
    """Blocks that differ in one treatment each are not swapped for nothing."""
    problem, _ = plain(3, 3, 2)
    walk = Walk(problem, ((0, 1), (0, 2), (1, 2)), stream(1, 0), FOREVER)
    assert kernel().best_move(walk.board.plain, 0, 3, -np.inf)[0] == 3
    assert walk.cool(1.0, 1.0, 1000) == 0


def test_the_kernel_runs_as_plain_python() -> None:
    """Without the compiler the same calls lead to the same plans, moves and objectives."""
    there = subprocess.run(
        [sys.executable, "-m", plainly.__name__],
        env={**os.environ, "NUMBA_DISABLE_JIT": "1"},
        cwd=Path(__file__).parents[2],
        capture_output=True,
        text=True,
        check=True,
    )
    assert there.stdout.strip() == plainly.told()


def test_random_numbers_are_those_of_the_published_generator() -> None:
    """xoshiro256** from the state 1, 2, 3, 4 (values of a public test suite, from memory)."""
    state = np.array([1, 2, 3, 4], dtype=np.uint64)
    with np.errstate(over="ignore"):
        numbers = [int(kernel()._next.py_func(state)) for _ in range(6)]
    assert numbers == [11520, 0, 1509978240, 1215971899390074240, 1216172134540287360, 607988272756665600]


def test_the_compiled_functions_are_the_listed_ones() -> None:
    """What the cache is asked for is what the kernel keeps in it."""
    assert all(getattr(kernel(), name).signatures for name in ENTRIES)
    late = [name for names in MORE_ENTRIES.values() for name in names]
    assert late
    assert all(getattr(kernel(), name).warm_up().signatures for name in late)
