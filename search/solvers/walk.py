"""A plan on its way: moves, measured in calls of the kernel short enough for a clock to be seen."""

from __future__ import annotations

import math
from collections.abc import Callable
from dataclasses import dataclass, field
from typing import Any, ClassVar

import numpy as np
from numpy.typing import NDArray

from search.foundation.stopping import Stop
from search.solvers.board import Board, board_of, contents_on, objective, refresh, unit_of
from search.solvers.compiled import kernel
from search.solvers.records import Problem
from search.trial.records import Contents

CALL_DRAWS = 1_000_000
CALL_PAIRS = 4_000_000
CALL_ENTRIES = 50_000_000
"""Most moves drawn, pairs of plots scanned, and entries of tables changed in one call: at most 0.1 s each
on a slow processor."""
REFRESH_AFTER = 20_000
"""Accepted moves after which the tables are computed from scratch."""
DRAWS_PER_MOVE = 50
"""Where rules leave less than one legal move in so many draws, fewer moves are scored than asked for."""
ROUNDING = 1e-12
"""Objectives that differ by less are equal but for rounding, see `unit_of`."""
IN_TIME = 0.8
"""Part of the time left in which a run cools down; the rest is for its descent."""
NOTHING = np.zeros(0)

Report = Callable[[int], None]
"""Told how many moves were scored since it was last told."""


def quiet(moves: int) -> None:
    """Tell nobody."""


@dataclass(slots=True)
class Walk:
    """A connected plan, the moves made from it, and the random stream that they come from.

    Parameters
    ----------
    problem : rules and aim
    start : a connected plan within the rules
    random : (4,) state of the random stream, advanced in place
    stop : when an end is due, every walk ends after its call of the kernel
    report : told of moves scored, call by call
    """

    descent: ClassVar[int] = 5
    """One move in so many of a run is left for its descent."""

    problem: Problem
    start: Contents
    random: NDArray[np.uint64]
    stop: Stop
    report: Report = quiet
    moves: int = 0
    """Moves scored so far."""
    board: Board = field(init=False)
    _plain: tuple[tuple[Any, ...], ...] = field(init=False)
    _stale: int = 0

    def __post_init__(self) -> None:
        self.board = board_of(self.problem, self.start)
        self._plain = self.board.plain
        refresh(self.problem, self.board)

    @property
    def contents(self) -> Contents:
        """The plan as it stands."""
        return contents_on(self.board)

    @property
    def neighbourhood(self) -> int:
        """An upper bound of the number of moves that a plan has."""
        beds = self.board.beds
        reach = beds.blocks[:, kernel().REACH].astype(np.int64)
        return int((reach * beds.blocks[:, kernel().PLOTS]).sum())

    def rises(self, many: int) -> NDArray[np.float64]:
        """How much random legal moves would raise the objective; none of them is made."""
        rises = np.zeros(many)
        scored, *_ = kernel().anneal(
            self._plain, self.random, -np.inf, 1.0, many, DRAWS_PER_MOVE * many, 1, rises
        )
        self._scored(scored)
        return rises[:scored]

    def cool(self, hot: float, cold: float, moves: int) -> int:
        """Anneal from one temperature to another, evenly in their logarithm.

        Parameters
        ----------
        hot, cold : temperatures, in units of the objective; both 0 to take no move that raises it
        moves : moves to score

        Returns
        -------
        climbed : moves made although they raise the objective
        """
        factor = (cold / hot) ** (1 / moves) if cold > 0 and moves > 0 else 1.0
        most = max(1, CALL_ENTRIES // self.problem.tables.t**2)
        temperature, left, draws, climbed = hot, moves, DRAWS_PER_MOVE * moves, 0
        began = self.stop.elapsed
        while left > 0 and draws > 0:
            scored, drawn, accepted, up = kernel().anneal(
                self._plain,
                self.random,
                temperature,
                factor,
                left,
                min(draws, CALL_DRAWS),
                min(most, REFRESH_AFTER - self._stale),
                NOTHING,
            )
            temperature *= factor**scored
            left -= scored
            draws -= drawn
            climbed += up
            self._scored(scored)
            self._made(accepted)
            if self.stop.due:
                break
            in_time = self._in_time(began, moves - left)
            if cold > 0 and left > in_time:  # cool faster, rather than be cut short while hot
                left = int(in_time)
                factor = (cold / temperature) ** (1 / left)
        return climbed

    def cross(self, hot: float, cold: float, price: float, breaches: int, moves: int) -> None:
        """Anneal through broken rules, as `cool` does within them.

        Parameters
        ----------
        hot, cold : temperatures, in units of the objective
        price : of each breach, likewise
        breaches : how many there are to begin with
        moves : moves to score
        """
        factor = (cold / hot) ** (1 / moves) if cold > 0 and moves > 0 else 1.0
        most = max(1, CALL_ENTRIES // len(self.board.metrics.inverse) ** 2)
        temperature, left, draws = hot, moves, DRAWS_PER_MOVE * moves
        while left > 0 and draws > 0:
            scored, drawn, accepted, _, breaches = kernel().cross(
                self._plain,
                self.random,
                temperature,
                factor,
                price,
                breaches,
                left,
                min(draws, CALL_DRAWS),
                min(most, REFRESH_AFTER - self._stale),
            )
            temperature *= factor**scored
            left -= scored
            draws -= drawn
            self._scored(scored)
            self._made(accepted)
            if self.stop.due:
                break

    def _in_time(self, began: float, scored: int) -> float:
        """Moves that can still be scored before the clock runs out, at the pace so far."""
        seconds = self.stop.limits.seconds
        if seconds is None:
            return math.inf
        now = self.stop.elapsed
        return max(1.0, IN_TIME * (seconds - now) * scored / max(now - began, 1e-9))

    def descend(self, most_moves: int) -> None:
        """Make the best of all moves until none improves, or so many moves are scored.

        Random moves that do not worsen the plan come first: while many of them still help, they get
        there sooner than full scans. A walk that was stopped makes one call of these.
        """
        end = self.moves + most_moves
        self.cool(0.0, 0.0, min(self.neighbourhood, most_moves))
        noise = ROUNDING * unit_of(self.problem, objective(self.problem, self.contents))
        while self.moves < end and not self.stop.due and self.step(-noise):
            pass

    def step(self, below: float) -> bool:
        """Make the move that raises the objective least, if by less than `below`; whether there was one."""
        move = self.best_move(below)
        if move is None:
            return False
        kernel().make_move(self._plain, *move)
        self._made(1)
        return True

    def best_move(self, below: float) -> tuple[int, int] | None:
        """The legal move that raises the objective least and less than `below`: a plot and its partner."""
        tables, best = self.problem.tables, None
        many = max(1, CALL_PAIRS // (tables.n * int(tables.sizes.max())))
        for begin in range(0, tables.b, many):
            end = min(begin + many, tables.b)
            scored, plot, partner, rise = kernel().best_move(self._plain, begin, end, below)
            self._scored(scored)
            if plot >= 0:
                best, below = (plot, partner), rise
        return best

    def _scored(self, moves: int) -> None:
        self.moves += moves
        self.report(moves)

    def _made(self, moves: int) -> None:
        self._stale += moves
        if self._stale >= REFRESH_AFTER:
            refresh(self.problem, self.board)
            self._stale = 0
