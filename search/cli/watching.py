"""What a planner sees while a search runs, and how it is interrupted."""

from __future__ import annotations

import signal
import threading
import time
from collections.abc import Iterator
from contextlib import contextmanager
from types import FrameType
from typing import TYPE_CHECKING

from search.cli.output import shortened
from search.efficiency.comparing import beats, gap_percent, in_figures, measure, merit
from search.foundation.stopping import Observer, Stop
from search.trial.records import AimKind

if TYPE_CHECKING:
    from rich.console import Console
    from rich.status import Status

    from search.trial.records import Trial

EVERY_SECONDS = 5.0
"""Where nobody sees a live line (a log file), a line is written so often."""


@contextmanager
def interruptible(stop: Stop) -> Iterator[None]:
    """The first Ctrl-C asks the search to end and keep its best, a second one ends everything."""

    def ask(_signal: int, _frame: FrameType | None) -> None:
        if stop.interrupted:
            raise KeyboardInterrupt
        stop.interrupt()

    if threading.current_thread() is not threading.main_thread():
        yield
        return
    before = signal.signal(signal.SIGINT, ask)
    try:
        yield
    finally:
        signal.signal(signal.SIGINT, before)


class Watching(Observer):
    """Draws the state of one search as a live line, or as lines of a log.

    Parameters
    ----------
    console : where to draw
    quiet : say nothing
    """

    def __init__(self, console: Console, quiet: bool = False) -> None:
        self.console = console
        self.quiet = quiet
        self.status: Status | None = None
        self.aim = AimKind.ALL_PAIRS
        self.best: float | None = None
        self.limit: float | None = None
        self.last = time.monotonic()

    def __enter__(self) -> Watching:
        if self.console.is_terminal and not self.quiet:
            self.status = self.console.status("")
            self.status.start()
        return self

    def __exit__(self, *_: object) -> None:
        if self.status is not None:
            self.status.stop()

    def begin(self, trial: Trial) -> None:
        """Say what is planned."""
        self.aim = trial.aim.kind
        most = "at most " if trial.may_be_emptier else ""
        self._say(f"{trial.name}: {trial.t} treatments on {most}{trial.n} plots in {trial.b} blocks")

    def note(self, text: str) -> None:
        self._say(text)

    def first_plan(self, efficiency: float, where_from: str) -> None:
        name = "a better one" if self.best else "first plan"
        if self.best is None or beats(merit(self.aim, efficiency, 0.0), merit(self.aim, self.best, 0.0)):
            self.best = efficiency
            told = f"{measure(self.aim)} {in_figures(self.aim, efficiency, 4)}"
            self._say(f"{name}: {told} ({shortened(where_from)})")

    def bound(self, efficiency: float, argument: str) -> None:
        self.limit = efficiency
        may = "go below" if self.aim.counts_meetings else "exceed"
        self._say(f"no plan can {may} {in_figures(self.aim, efficiency, 4)} ({argument})")

    def progress(self, efficiency: float, moves: int, seconds: float) -> None:
        self.best = efficiency
        line = f"{seconds:5.1f} s   best {in_figures(self.aim, efficiency)}"
        if self.limit is not None and self.limit > 0:
            gap = max(0.0, gap_percent(self.aim, efficiency, self.limit))
            line += f"   bound {in_figures(self.aim, self.limit)}   gap {gap:.3f} %"
        if seconds > 0:
            line += f"   {moves / seconds / 1e6:.1f} M moves/s"
        if self.status is not None:
            self.status.update(line)
        elif time.monotonic() - self.last >= EVERY_SECONDS:
            self.last = time.monotonic()
            self._say(line)

    def _say(self, text: str) -> None:
        if not self.quiet:
            self.console.print(text)
