"""One run: scramble, connect, cool, descend to where no move helps."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from search.foundation.stopping import Stop
from search.solvers.board import board_of, contents_on, objective, unit_of
from search.solvers.compiled import kernel
from search.solvers.records import Problem
from search.solvers.walk import ROUNDING, Report, quiet
from search.solvers.walks import walk_from
from search.trial.records import Contents

Stream = NDArray[np.uint64]
"""(4,) state of a random stream, advanced in place by whatever draws from it."""

SCRAMBLE = 50
"""Random moves drawn for every plot, to forget where a run came from."""
CONNECTING_CALLS, CONNECTING_WORK = 20, 10_000_000
"""Calls that try to connect a plan, and plots looked at in each: 0.1 s on a slow processor."""
PROBED, PROBED_PER_POINT = 2_000, 10
"""Moves scored to learn how far random moves raise the objective, and at each temperature tried."""
SETTLED = 2_000_000
"""Most moves scored to improve a plan until it is heated."""
HEATING = 1.25
"""Step from one temperature tried to the next."""
SPAN = 10.0
"""A run cools from its first temperature to this part of it."""


@dataclass(frozen=True, slots=True)
class Cooling:
    """The temperatures of a run, in units of the objective."""

    hot: float
    cold: float

    @property
    def gentle(self) -> Cooling:
        """The same from half as hot: a good plan is left, but not what is good in it."""
        return Cooling(self.hot / 2, self.cold)


@dataclass(frozen=True, slots=True)
class Found:
    """What a run came to; the objective is computed from scratch."""

    contents: Contents
    objective: float
    moves: int


def anneal(
    problem: Problem,
    start: Contents,
    random: Stream,
    moves: int,
    cooling: Cooling,
    stop: Stop,
    report: Report = quiet,
) -> Found:
    """Improve a connected plan by simulated annealing and a descent.

    Parameters
    ----------
    problem : rules and aim
    start : a connected plan within the rules
    random : random stream of the run
    moves : moves to score, but for the last scan of the descent
    cooling : temperatures
    stop : cuts the run short: then it makes moves that do not worsen its plan for a tenth of a second
    report : told of moves scored, call by call
    """
    walk = walk_from(problem, start, random, stop, report)
    descent = moves // walk.descent
    walk.cool(cooling.hot, cooling.cold, moves - descent)
    walk.descend(descent)
    return Found(walk.contents, objective(problem, walk.contents), walk.moves)


def scrambled(problem: Problem, start: Contents, random: Stream, stop: Stop) -> Contents:
    """A random connected plan that legal moves reach from a connected one.

    Where it cannot be connected again, which few trials make hard, it is the start itself.
    """
    board = board_of(problem, start)
    kernel().wander(board.plain, random, SCRAMBLE * problem.tables.n, False)
    return connected(problem, contents_on(board), random, stop) or start


def connected(problem: Problem, contents: Contents, random: Stream, stop: Stop) -> Contents | None:
    """A connected plan that legal moves reach without ever adding a part, or None if none was found.

    Parameters
    ----------
    problem : rules and aim
    contents : a plan within the rules
    random : a random stream
    stop : ends the attempt
    """
    tables = problem.tables
    if problem.blocks_random is not None:
        return contents  # block totals tell what no chain of blocks does
    if tables.n < tables.t + tables.b - 1:
        return None  # too few plots to connect so many treatments and blocks, however planted
    board = board_of(problem, contents)
    for _ in range(CONNECTING_CALLS):
        tries = CONNECTING_WORK // (tables.n + tables.t + tables.b)
        _, parts = kernel().wander(board.plain, random, tries, True)
        if parts == 1:
            return contents_on(board)
        if stop.due:
            break
    return None


def movable(problem: Problem, contents: Contents, random: Stream, stop: Stop) -> bool:
    """Whether any legal move starts from a connected plan, one that disconnects it included."""
    if walk_from(problem, contents, random, stop).best_move(np.inf) is not None:
        return True
    made, _ = kernel().wander(board_of(problem, contents).plain, random, CONNECTING_WORK, False)
    return bool(made)


def calibrated(problem: Problem, start: Contents, random: Stream, stop: Stop) -> Cooling:
    """Temperatures that suit a problem, learnt from the rises of its moves.

    A random plan is improved until little helps, then heated, from a hundredth of the median rise of a
    move that makes a random plan worse, until one scored move in t + b climbs. Hotter, a run only moves
    about, and most of its time goes into accepted moves.

    Parameters
    ----------
    problem : rules and aim
    start : a connected plan within the rules
    random : a random stream
    stop : ends the attempt
    """
    walk = walk_from(problem, scrambled(problem, start, random, stop), random, stop)
    points = problem.tables.t + problem.tables.b
    probed = max(PROBED, PROBED_PER_POINT * points)
    rises = walk.rises(probed)
    noise = ROUNDING * unit_of(problem, objective(problem, walk.contents))
    worse = rises[np.isfinite(rises) & (rises > noise)]
    median = float(np.median(worse)) if len(worse) else 0.0
    walk.cool(0.0, 0.0, min(walk.neighbourhood, SETTLED))
    hot = median / 100
    while hot < median / 2 and walk.cool(hot, hot, probed) < probed / points and not stop.due:
        hot *= HEATING
    return Cooling(hot, hot / SPAN)
