"""One run and its parts: connected, calibrated, annealed to where no move helps."""

from __future__ import annotations

from dataclasses import replace

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from search.efficiency.evaluator import components
from search.foundation.stopping import Limits, Stop
from search.solvers.anneal import Cooling, anneal, calibrated, connected, movable, scrambled
from search.solvers.board import board_of, objective
from search.solvers.records import Problem
from search.solvers.streams import stream
from search.trial.records import Contents
from search.trial.tables import incidence
from tests.solvers.problems import FOREVER, in_turn, moves_from, pairs, plain, plain_tables, within


@settings(max_examples=60, deadline=None)
@given(st.lists(st.integers(2, 5), min_size=2, max_size=7), st.randoms(use_true_random=False))
def test_plans_with_no_plot_to_spare_are_connected(sizes: list[int], random: np.random.Generator) -> None:
    """With n = t + b − 1 a connected plan is a tree, and is found from any plan of its replication."""
    t = sum(sizes) - len(sizes) + 1
    tree = _a_tree(sizes)
    start = _shuffled(tree, random)
    plots = incidence(tree, t).sum(axis=1)
    problem = Problem(replace(plain_tables(t, sizes), least=plots, most=plots), pairs(t))
    joined = connected(problem, start, stream(1, 0), FOREVER)
    assert joined is not None
    assert components(joined, t) == 1
    assert within(problem.tables, joined)


def _a_tree(sizes: list[int]) -> Contents:
    """Blocks in a chain, each sharing its last treatment with the next."""
    blocks, first = [], 0
    for size in sizes:
        blocks.append(tuple(range(first, first + size)))
        first += size - 1
    return tuple(blocks)


def _shuffled(contents: Contents, random: np.random.Generator) -> Contents:
    """Exchanges at random, connected or not, but never twice in a block."""
    blocks = [list(block) for block in contents]
    for _ in range(60):
        a, c = random.sample(range(len(blocks)), 2)
        i, j = random.randrange(len(blocks[a])), random.randrange(len(blocks[c]))
        u, v = blocks[a][i], blocks[c][j]
        if u not in blocks[c] and v not in blocks[a]:
            blocks[a][i], blocks[c][j] = v, u
    return tuple(tuple(sorted(block)) for block in blocks)


@pytest.mark.parametrize("t", [6, 20, 60])
def test_only_the_cycle_connects_pairs_of_two_plots(t: int) -> None:
    """With k = r = 2, pairs that only meet each other are joined into one cycle: Σv = (t³ − t)/6."""
    problem = Problem(plain_tables(t, [2] * t), pairs(t))
    start = tuple((i - i % 2, i - i % 2 + 1) for i in range(t))
    joined = connected(problem, start, stream(1, 0), FOREVER)
    assert joined is not None
    total = (t**3 - t) / 12 * 2  # closed form on unit resistances; here each is 1/(1/2) = 2
    assert objective(problem, joined) == pytest.approx(total / (t * (t - 1) / 2))


def test_too_few_plots_cannot_be_connected() -> None:
    """Below t + b − 1 plots there is no connected plan, and none is looked for."""
    problem = Problem(plain_tables(6, [2, 2, 2]), pairs(6))
    assert connected(problem, ((0, 1), (2, 3), (4, 5)), stream(1, 0), FOREVER) is None


@pytest.mark.parametrize("weighted", [True, False])
def test_a_run_ends_where_no_move_helps(weighted: bool) -> None:
    """A full recomputation of every legal move of the plan finds none that is better."""
    sizes = [5, 4, 4, 3, 3, 2]
    problem = Problem(plain_tables(7, sizes, plots=(2, 4)), pairs(7) if weighted else None)
    random = stream(4, 0)
    start = scrambled(problem, in_turn(7, sizes), random, FOREVER)
    found = anneal(problem, start, random, 20_000, calibrated(problem, start, random, FOREVER), FOREVER)
    assert found.objective == objective(problem, found.contents)
    assert 16_000 <= found.moves <= 21_000
    for _, _, after in moves_from(board_of(problem, found.contents)):
        if within(problem.tables, after):
            assert objective(problem, after) >= found.objective - 1e-9


def test_temperatures_follow_the_scale_of_the_aim() -> None:
    """Weights 16 times as large make all temperatures 16 times as high, but for a step of rounding."""
    problem, start = plain(8, 14, 4)
    heavy = Problem(problem.tables, 16 * pairs(8))
    one, many = (calibrated(p, start, stream(1, 0), FOREVER) for p in (problem, heavy))
    assert 0 < one.cold < one.hot
    assert many.hot == pytest.approx(16 * one.hot, rel=0.3)
    assert one.gentle == Cooling(one.hot / 2, one.cold)


def test_a_scrambled_plan_is_another_one() -> None:
    """Scrambling forgets the start, and stays connected and within the rules."""
    problem, start = plain(12, 15, 4)
    plans = {scrambled(problem, start, stream(1, run), FOREVER) for run in range(5)}
    assert len(plans | {start}) == 6
    assert all(components(x, 12) == 1 and within(problem.tables, x) for x in plans)


def test_complete_blocks_leave_nothing_to_move() -> None:
    """Where every block holds every treatment there is no legal move; one plot less, and there is."""
    problem, start = plain(4, 3, 4)
    assert not movable(problem, start, stream(1, 0), FOREVER)
    problem, start = plain(4, 4, 3)
    assert movable(problem, start, stream(1, 0), FOREVER)


def test_a_run_that_is_cut_short_keeps_a_plan() -> None:
    """After an interrupt a run ends within a call of the kernel, with a plan that obeys the rules."""
    problem, start = plain(12, 15, 4)
    stop = Stop(Limits())
    stop.interrupt()
    found = anneal(problem, start, stream(1, 0), 10**9, Cooling(1e-4, 1e-5), stop)
    assert found.moves < 3_000_000
    assert within(problem.tables, found.contents)
