"""When a search ends, who may end it, and who watches it."""

from __future__ import annotations

import threading
import time
from dataclasses import dataclass, field
from enum import StrEnum


class Ended(StrEnum):
    """What brought a search to its end."""

    BOUND_MET = "bound met"
    MOVES = "moves"
    SECONDS = "seconds"
    INTERRUPTED = "interrupted"


@dataclass(frozen=True, slots=True)
class Limits:
    """How far a search may go.

    Parameters
    ----------
    seconds : wall time of the search after its start, or None for no such limit
    moves : moves scored in all, over every run, or None for no such limit
    """

    seconds: float | None = None
    moves: int | None = None


@dataclass(slots=True)
class Stop:
    """A clock and a flag shared by everything that works on one search.

    Parameters
    ----------
    limits : how far the search may go
    """

    limits: Limits
    started: float = field(default_factory=time.monotonic)
    flag: threading.Event = field(default_factory=threading.Event)

    def restart(self) -> None:
        """Start the clock again: what went before was preparation."""
        self.started = time.monotonic()

    def interrupt(self) -> None:
        """Ask everything that holds this to end soon, keeping the best so far."""
        self.flag.set()

    @property
    def interrupted(self) -> bool:
        """Whether somebody asked for an end."""
        return self.flag.is_set()

    @property
    def elapsed(self) -> float:
        """Seconds since the start."""
        return time.monotonic() - self.started

    @property
    def out_of_time(self) -> bool:
        """Whether the time limit has passed."""
        return self.limits.seconds is not None and self.elapsed >= self.limits.seconds

    @property
    def due(self) -> bool:
        """Whether to end now, for the one reason or the other."""
        return self.interrupted or self.out_of_time


class Observer:
    """Watches a search; every method does nothing by default.

    For the aim even meetings, sums of squared meetings stand in place of efficiencies.
    """

    def note(self, text: str) -> None:
        """A stage begins, said in a short sentence."""

    def first_plan(self, efficiency: float, where_from: str) -> None:
        """A first plan is there."""

    def bound(self, efficiency: float, argument: str) -> None:
        """No plan can be better than this."""

    def progress(self, efficiency: float, moves: int, seconds: float) -> None:
        """The search goes on; its best efficiency so far."""
