"""A walk to even meetings: least sum of squared meetings first, then the best average among equals.

Hot, only whole numbers count: an exchange is scored in O(1) from the concurrences, and the distances wait.
The descent ends where no move lowers the sum, goes back to where the walk began if that was more even,
and then anneals the average pair variance within the moves that keep the sum.
"""

from __future__ import annotations

from dataclasses import dataclass, field
from typing import Any, ClassVar

import numpy as np
from numpy.typing import NDArray

from search.efficiency.balance import squared_meetings
from search.solvers.board import board_of, refresh
from search.solvers.compiled import kernel
from search.solvers.filler import emptied
from search.solvers.walk import (
    CALL_DRAWS,
    CALL_ENTRIES,
    CALL_PAIRS,
    DRAWS_PER_MOVE,
    NOTHING,
    REFRESH_AFTER,
    ROUNDING,
    Walk,
)

CALL_MOVES = 100_000
"""Accepted moves in one call of the kernel, without distances."""
PROBED = 2_000
"""Moves scored to learn how far moves that keep the sum raise the average."""
HEAT, SPAN = 0.5, 20.0
"""Among equally even plans: first temperature over the median rise, and over the last temperature."""
ANY = np.iinfo(np.int64).max // 2
"""More than any move raises the sum."""


@dataclass(slots=True)
class EvenWalk(Walk):
    """A walk for the goal `MEETINGS`; see `Walk`."""

    descent: ClassVar[int] = 3

    squares: int = 0
    """Sum of squared meetings of the plan as it stands."""
    _table: tuple[NDArray[np.int32], ...] = field(init=False, default=())
    _measured: bool = True

    def __post_init__(self) -> None:
        Walk.__post_init__(self)
        self._count()

    def rises(self, many: int) -> NDArray[np.float64]:
        rises = np.zeros(many)
        scored, *_ = kernel().anneal_meetings(
            self._plain, self._table, self.random, -np.inf, 1.0, many, DRAWS_PER_MOVE * many, 1, rises
        )
        self._scored(scored)
        return rises[:scored]

    def cool(self, hot: float, cold: float, moves: int) -> int:
        return self._anneal(kernel().anneal_meetings, hot, cold, moves, CALL_MOVES)

    def descend(self, most_moves: int) -> None:
        end = self.moves + most_moves
        self.cool(0.0, 0.0, min(self.neighbourhood, most_moves))
        while not self.stop.due and self.step(-np.inf):
            pass
        if squared_meetings(emptied(self.start, self._real), self._real) < self.squares:
            self._return()
        if not self.stop.due:
            self._settle(max(0, (end - self.moves) // 2))
        while self.moves < end and not self.stop.due and self.step(-ROUNDING):
            pass

    def step(self, below: float) -> bool:
        move = self.best_move(below)
        if move is None:
            return False
        self.squares += kernel().make_even_move(self._plain, self._table, *move)
        self._made(1)
        return True

    def best_move(self, below: float) -> tuple[int, int] | None:
        """The best legal move: one that lowers the sum, or keeps it and raises the average less than `below`.

        Where `below` is infinite any legal move will do.
        """
        self._measure()
        tables, best = self.problem.tables, None
        squares = ANY if below == np.inf else 0
        many = max(1, CALL_PAIRS // (tables.n * int(tables.sizes.max())))
        for begin in range(0, tables.b, many):
            end = min(begin + many, tables.b)
            scored, plot, partner, more, rise = kernel().best_even_move(
                self._plain, self._table, begin, end, squares, below
            )
            self._scored(scored)
            if plot >= 0:
                best, squares, below = (plot, partner), more, rise
        return best

    def _settle(self, moves: int) -> None:
        """Anneal the average within the moves that keep the sum."""
        self._measure()
        rises = np.full(PROBED, np.nan)
        probed = min(moves, 10 * PROBED)
        self._anneal(kernel().anneal_ties, -np.inf, -np.inf, probed, REFRESH_AFTER, rises)
        worse = rises[np.isfinite(rises) & (rises > ROUNDING)]
        if not len(worse):
            return
        hot = HEAT * float(np.median(worse))
        most = max(1, CALL_ENTRIES // len(self.board.metrics.inverse) ** 2)
        self._anneal(kernel().anneal_ties, hot, hot / SPAN, moves - probed, min(most, REFRESH_AFTER))

    def _anneal(
        self, entry: Any, hot: float, cold: float, moves: int, most: int, rises: NDArray[np.float64] = NOTHING
    ) -> int:
        ties = entry is kernel().anneal_ties
        factor = (cold / hot) ** (1 / moves) if cold > 0 and moves > 0 else 1.0
        temperature, left, draws, climbed = hot, moves, DRAWS_PER_MOVE * moves, 0
        while left > 0 and draws > 0:
            accepting = min(most, REFRESH_AFTER - self._stale) if ties else most
            scored, drawn, accepted, up, change = entry(
                self._plain,
                self._table,
                self.random,
                temperature,
                factor,
                left,
                min(draws, CALL_DRAWS),
                accepting,
                rises,
            )
            temperature *= factor**scored
            left -= scored
            draws -= drawn
            climbed += up
            self.squares += change
            self._scored(scored)
            if ties:
                self._made(accepted)
            else:
                self._measured = self._measured and accepted == 0
            if self.stop.due:
                break
        return climbed

    @property
    def _real(self) -> int:
        """Treatments that are no filler."""
        return self.problem.tables.t - self.problem.filler

    def _measure(self) -> None:
        """Measure the distances, where moves were made without them."""
        if not self._measured:
            refresh(self.problem, self.board)
            self._measured, self._stale = True, 0

    def _return(self) -> None:
        """Go back to the plan that the walk began with."""
        self.board = board_of(self.problem, self.start)
        self._plain = self.board.plain
        self._measured = False
        self._count()

    def _count(self) -> None:
        """Count all meetings afresh."""
        counts = self.board.planting.copies.T.astype(np.float64)  # whole numbers, but multiplied faster
        counts[self._real :] = 0
        pairs = counts @ counts.T
        parts = (pairs, counts.T @ pairs, counts.T @ counts)
        self._table = tuple(np.ascontiguousarray(part, dtype=np.int32) for part in parts)
        self.squares = squared_meetings(emptied(self.contents, self._real), self._real)
