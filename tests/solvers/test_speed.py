"""How fast the kernel is, as ratios within one run: `pytest -m bench -s tests/solvers/test_speed.py`.

Times are those of the processor for this thread, so that what else runs on the machine disturbs less.
"""

from __future__ import annotations

import time
from collections.abc import Callable
from dataclasses import replace
from statistics import median
from typing import Any

import numpy as np
import pytest
from numba import njit

from search.efficiency.one_thread import one_thread
from search.solvers.anneal import calibrated, scrambled
from search.solvers.compiled import kernel
from search.solvers.records import Problem
from search.solvers.streams import stream
from search.solvers.walk import NOTHING, Walk
from tests.solvers.problems import FOREVER, plain

REPEATS = 7
LEAST_OF_BARE = 0.4
"""What is wanted is 0.6."""


def seconds_of(work: Callable[[], object], times: int) -> float:
    """Processor seconds that one of so many calls takes."""
    began = time.thread_time()
    for _ in range(times):
        work()
    return (time.thread_time() - began) / times


def plain_score(counts: np.ndarray) -> float:
    """A plan scored the plain way: C rebuilt, its eigenvalues, the sum of their inverses."""
    information = np.diag(counts.sum(axis=1)) - (counts / counts.sum(axis=0)) @ counts.T
    return float((1 / np.linalg.eigvalsh(information)[1:]).sum())


def walk_of(problem: Problem, start: tuple[tuple[int, ...], ...]) -> Walk:
    """A walk from a random plan."""
    random = stream(1, 0)
    return Walk(problem, scrambled(problem, start, random, FOREVER), random, FOREVER)


@pytest.mark.bench
@pytest.mark.parametrize(
    ("t", "b", "k", "ratio", "times"),
    [(12, 15, 4, 1_500, 300), (30, 30, 5, 4_000, 100), (200, 100, 6, 100_000, 4)],
)
def test_a_scan_against_recomputing_eigenvalues(t: int, b: int, k: int, ratio: int, times: int) -> None:
    """One full scan of exchanges beats scoring each of them the plain way, one thread, median of seven."""
    walk = walk_of(*plain(t, b, k))
    counts, board = walk.board.planting.copies.T.astype(float), walk.board.plain
    scan = kernel().best_move
    scored = scan(board, 0, b, -np.inf)[0]
    ratios, scans, plainly = [], [], []
    with one_thread():
        for _ in range(REPEATS):
            scans.append(seconds_of(lambda: scan(board, 0, b, -np.inf), times))
            plainly.append(seconds_of(lambda: plain_score(counts), times))
            ratios.append(scored * plainly[-1] / scans[-1])
    print(
        f"\n{(t, b, k)}: {scored:,} exchanges in {1e6 * median(scans):,.1f} µs"
        f" ({scored / median(scans) / 1e6:.0f} million a second);"
        f" the plain way {1e6 * median(plainly):,.1f} µs each; ratio {median(ratios):,.0f}"
    )
    assert median(ratios) >= ratio


@njit(nogil=True, fastmath=True)
def loads(planted: Any, blocks: Any, home: Any, gate: Any, inverse: Any, worth: Any, means: Any) -> float:
    """Add up what a scan takes from the tables for every exchange, and do nothing else."""
    total, shut = 0.0, 0
    for a in range(len(blocks)):
        begin = np.int64(blocks[a, 0])
        end = begin + np.int64(blocks[a, 1])
        for plot in range(begin, end):
            u = np.int64(planted[plot])
            for other in range(end, len(planted)):
                v, c = np.int64(planted[other]), np.int64(home[other])
                total += inverse[u, v] + worth[u, v] + means[0, c, u] + means[1, c, u]
                shut += gate[c, u]
    return total + shut


@pytest.mark.bench
@pytest.mark.parametrize(("t", "b", "k", "times"), [(12, 15, 4, 300), (30, 30, 5, 100), (200, 100, 6, 8)])
def test_a_scan_against_a_bare_loop(t: int, b: int, k: int, times: int) -> None:
    """A full scan keeps most of the speed of a loop that loads the same entries, legal or not."""
    walk = walk_of(*plain(t, b, k))
    board, planting, metrics = walk.board.plain, walk.board.planting, walk.board.metrics
    taken = (planting.planted, walk.board.beds.blocks, walk.board.beds.home, planting.gate, *metrics[:3])
    loads(*taken)
    ratios = []
    for _ in range(REPEATS):
        scan = seconds_of(lambda: kernel().best_move(board, 0, b, -np.inf), times)
        ratios.append(seconds_of(lambda: loads(*taken), times) / scan)
    print(f"\n{(t, b, k)}: a scan has {median(ratios):.0%} of the speed of a bare loop")
    assert median(ratios) >= LEAST_OF_BARE


@pytest.mark.bench
@pytest.mark.parametrize(("t", "b", "k"), [(12, 15, 4), (30, 30, 5), (200, 100, 6)])
def test_where_annealing_spends_its_time(t: int, b: int, k: int) -> None:
    """Scored moves a second of a whole cooling, and the share of its time that accepted moves take."""
    problem, start = plain(t, b, k)
    cooling = calibrated(problem, start, stream(1, 0), FOREVER)
    moves = 20 * problem.tables.n**2
    speeds, shares = [], []
    for run in range(REPEATS):
        walk = walk_of(problem, start)
        began = time.thread_time()
        factor = (cooling.cold / cooling.hot) ** (1 / moves)
        _, _, accepted, _ = kernel().anneal(
            walk.board.plain, walk.random, cooling.hot, factor, moves, 50 * moves, moves, NOTHING
        )
        whole = time.thread_time() - began
        # the same number of moves from where it ended, every one of them refused
        board, random = walk.board.plain, stream(2, run)
        began = time.thread_time()
        kernel().anneal(board, random, -np.inf, 1.0, moves, 50 * moves, 1, NOTHING)
        refused = time.thread_time() - began
        speeds.append(moves / whole)
        shares.append(1 - refused / whole)
        each = (whole - refused) / max(1, accepted)
    print(
        f"\n{(t, b, k)}: {median(speeds) / 1e6:.1f} million scored moves a second"
        f" ({moves / refused / 1e6:.1f} where none is accepted); {accepted / moves:.2%} accepted"
        f" at {1e6 * each:.1f} µs each take {median(shares):.0%} of the time"
    )
    assert median(speeds) > 1e6


@pytest.mark.bench
def test_what_rules_cost() -> None:
    """Pairs apart, barred and required blocks and limits on meetings leave four fifths of the speed.

    Speed is in moves drawn, since what rules forbid is drawn and not scored.
    """
    free, start = plain(30, 30, 5)
    held = np.zeros((30, 30), dtype=bool)
    for block in start:
        held[np.ix_(block, block)] = True
    apart = np.zeros((30, 30), dtype=bool)
    for i, j in list(zip(*np.nonzero(~held), strict=True))[::40]:
        apart[i, j] = apart[j, i] = True
    high, low = free.tables.high.copy(), free.tables.low.copy()
    high[0, [j for j in range(30) if 0 not in start[j]][:3]] = 0
    low[start[4][0], 4] = 1
    table = replace(free.tables, apart=apart, high=high, low=low, meet_most=np.where(apart, 0, 4))
    ruled = Problem(table, free.weights)
    cooling = calibrated(free, start, stream(1, 0), FOREVER)
    kept = []
    for run in range(REPEATS):
        speeds = []
        for problem in (free, ruled):
            walk = walk_of(problem, start)
            factor = (cooling.cold / cooling.hot) ** 1e-6
            began = time.thread_time()
            _, drawn, *_ = kernel().anneal(
                walk.board.plain, stream(3, run), cooling.hot, factor, 10**6, 10**8, 10**6, NOTHING
            )
            speeds.append(drawn / (time.thread_time() - began))
        kept.append(speeds[1] / speeds[0])
    print(f"\n(30, 30, 5): with rules {median(kept):.0%} of the speed without")
    assert median(kept) > 0.8
