"""A walk to the smallest largest pair variance: first the best average, then the worst pairs themselves.

The best average leads most of the way. The descent anneals the largest variance, pulled by the average, and
ends where no move lowers the largest variance, nor the average at the same largest one.
"""

from __future__ import annotations

from dataclasses import dataclass, field
from typing import ClassVar

import numpy as np
from numpy.typing import NDArray

from search.solvers.compiled import kernel
from search.solvers.walk import (
    CALL_DRAWS,
    CALL_ENTRIES,
    CALL_PAIRS,
    DRAWS_PER_MOVE,
    REFRESH_AFTER,
    ROUNDING,
    Walk,
)

LISTED = 48
"""Pairs that are tested before all others."""
PULL = 1.0
"""What the average counts beside the largest variance, while annealing."""
HEAT, SPAN = 0.02, 20.0
"""First temperature over the largest variance's distance from the average, and over the last one."""


@dataclass(slots=True)
class WorstWalk(Walk):
    """A walk for the goal `WORST`; see `Walk`."""

    descent: ClassVar[int] = 2

    _worst: tuple[NDArray[np.uint32], NDArray[np.uint32], NDArray[np.float64], NDArray[np.float64]] = field(
        init=False
    )

    def __post_init__(self) -> None:
        Walk.__post_init__(self)
        first, second = np.zeros((2, LISTED), dtype=np.uint32)
        self._worst = (first, second, np.zeros(LISTED), np.zeros(3))

    def descend(self, most_moves: int) -> None:
        end = self.moves + most_moves
        self.cool(0.0, 0.0, min(self.neighbourhood, most_moves // 4))
        largest = self._listed()
        if not self.stop.due:
            hot = HEAT * (largest - self._average())
            self._anneal_worst(hot, hot / SPAN, max(0, (end - self.moves) * 3 // 4))
        noise = ROUNDING * largest
        while self.moves < end and not self.stop.due and self.step(-noise):
            self._listed()

    def best_move(self, below: float) -> tuple[int, int] | None:
        """The best legal move: one that lowers the largest variance, or keeps it and lowers the average.

        Where `below` is infinite any legal move will do.
        """
        if below == np.inf:
            return Walk.best_move(self, below)
        tables, best, largest = self.problem.tables, None, self._listed()
        many = max(1, CALL_PAIRS // (tables.n * int(tables.sizes.max())))
        for begin in range(0, tables.b, many):
            end = min(begin + many, tables.b)
            scored, plot, partner, after, rise = kernel().best_worst_move(
                self._plain, self._worst, begin, end, largest, below
            )
            self._scored(scored)
            if plot >= 0:
                best, largest, below = (plot, partner), after, rise
        return best

    def _anneal_worst(self, hot: float, cold: float, moves: int) -> None:
        factor = (cold / hot) ** (1 / moves) if cold > 0 and moves > 0 else 1.0
        most = max(1, CALL_ENTRIES // len(self.board.metrics.inverse) ** 2)
        temperature, left, draws = hot, moves, DRAWS_PER_MOVE * moves
        while left > 0 and draws > 0:
            scored, drawn, accepted, _ = kernel().anneal_worst(
                self._plain,
                self._worst,
                self.random,
                temperature,
                factor,
                PULL,
                left,
                min(draws, CALL_DRAWS),
                min(most, REFRESH_AFTER - self._stale),
            )
            temperature *= factor**scored
            left -= scored
            draws -= drawn
            self._scored(scored)
            self._made(accepted)
            self._listed()
            if self.stop.due:
                break

    def _listed(self) -> float:
        """List the worst pairs afresh; the largest variance."""
        return float(kernel().list_worst(self._plain, self._worst))

    def _average(self) -> float:
        t = self.problem.tables.t - self.problem.filler
        inverse = self.board.metrics.inverse[:t, :t]
        return float(2 * (t * np.trace(inverse) - inverse.sum())) / (t * (t - 1))
