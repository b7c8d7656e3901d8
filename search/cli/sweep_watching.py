"""What a planner sees while a sweep goes on."""

from __future__ import annotations

from collections.abc import Callable, Iterable
from types import TracebackType
from typing import TYPE_CHECKING, Any

from search.efficiency.comparing import in_figures
from search.runs.sweep import SweepObserver, SweepResult
from search.runs.sweep_files import SweepFiles
from search.runs.sweep_records import Progress, RowResult, WhereFrom

if TYPE_CHECKING:
    from rich.console import Console
    from rich.live import Live
    from rich.table import Table

FIGURES_WIDTH = 62
SHOWN_ROWS = 12
"""Rows of the live table; earlier ones scroll away."""
BAR_WIDTH = 36


def rows_table(console: Console, rows: Iterable[RowResult], columns: tuple[str, ...]) -> Table:
    """Rows with what varies, best found, bound, gap and standing."""
    from rich.table import Table
    from rich.text import Text

    table = Table(box=None, padding=(0, 2, 0, 0))
    # What varies gets the room that the figures leave.
    room = max(6, min(28, (console.width - FIGURES_WIDTH) // max(1, len(columns)) - 2))
    table.add_column("row", justify="right", no_wrap=True, min_width=3)
    for column in columns:
        table.add_column(_short(column.rsplit(".", 1)[-1], room), no_wrap=True)
    for title in ("plots", "best found", "bound", "gap %"):
        table.add_column(title, justify="right", no_wrap=True)
    table.add_column("standing", no_wrap=True)
    table.add_column("", no_wrap=True)
    for row in rows:
        values = (_short(str(row.row.values.get(column, "")), room) for column in columns)
        cells = [str(row.row.number), *values, *_cells(row)]
        table.add_row(*map(Text, cells))
    return table


def _short(text: str, most: int) -> str:
    return text if len(text) <= most else f"{text[: most - 1]}…"


def _cells(row: RowResult) -> list[str]:
    plots = "" if row.row.trial is None else str(row.row.trial.n)
    kept = "kept" if row.where_from is WhereFrom.KEPT else ""
    plan = row.plan
    if plan is None:
        return [plots, "", "", "", str(row.status), kept]
    aim = plan.trial.aim.kind
    bound = "" if plan.bound is None else in_figures(aim, plan.bound.value, 5)
    gap = "" if plan.gap_percent is None else f"{plan.gap_percent:.3f}"
    return [plots, in_figures(aim, plan.score.aim, 5), bound, gap, plan.standing.value, kept]


class LiveTable(SweepObserver):
    """The last rows, a bar and a line of totals, drawn anew as rows end; plain lines where nobody looks.

    Parameters
    ----------
    console : where to draw
    files : are written now and then
    quiet : draw nothing
    """

    def __init__(self, console: Console, files: SweepFiles, quiet: bool = False) -> None:
        self.console = console
        self.files = files
        self.quiet = quiet
        self.rows: list[RowResult] = []
        self.last: Progress | None = None
        self.live: Live | None = None

    def __enter__(self) -> LiveTable:
        if self.console.is_terminal and not self.quiet:
            from rich.live import Live

            # Drawn by the clock, not by rows: thousands may end in a second.
            self.live = Live(
                get_renderable=self._drawing, console=self.console, transient=True, refresh_per_second=4
            )
            self.live.start()
        return self

    def __exit__(
        self, kind: type[BaseException] | None, error: BaseException | None, trace: TracebackType | None
    ) -> None:
        if self.live is not None:
            self.live.stop()

    def note(self, text: str) -> None:
        if not self.quiet:
            self.console.print(text)

    def finished(self, result: RowResult, progress: Progress) -> None:
        self.rows = [*self.rows[1 - SHOWN_ROWS :], result]
        self.last = progress
        if self.live is None and not self.quiet:
            # nobody sees a live table: a line for each row
            told = " ".join(part for part in _cells(result)[1:] if part)
            self.console.print(f"row {result.row.number}: {told} ({totals(progress)})", soft_wrap=True)

    def progress(self, progress: Progress) -> None:
        self.last = progress

    def so_far(self, result: Callable[[], SweepResult]) -> None:
        before = self.files.failure
        self.files.write_now_and_then(result)
        if self.files.failure and self.files.failure != before:
            self.note(f"{self.files.failure}; the sweep goes on, and writes again later")

    def _drawing(self) -> Any:
        from rich.console import Group
        from rich.progress_bar import ProgressBar

        if self.last is None:
            return Group()
        columns = tuple(dict.fromkeys(key for row in self.rows for key in row.row.values))
        table = rows_table(self.console, self.rows, columns)
        return Group(table, ProgressBar(self.last.rows, self.last.done, BAR_WIDTH), totals(self.last))


def totals(progress: Progress) -> str:
    """Done, running, without a plan, best gap, time left, in a line."""
    parts = [f"{progress.done:,} of {progress.rows:,} rows done", f"{progress.running} running"]
    if progress.kept:
        parts.append(f"{progress.kept:,} kept")
    if progress.failed:
        parts.append(f"{progress.failed:,} without a plan")
    if progress.best_gap_percent is not None:
        parts.append(f"best gap {progress.best_gap_percent:.3f} %")
    if progress.seconds_left is not None and progress.done < progress.rows:
        parts.append(f"about {_clock(progress.seconds_left)} left")
    return ", ".join(parts)


def _clock(seconds: float) -> str:
    if seconds < 100:
        return f"{seconds:.0f} s"
    if seconds < 100 * 60:
        return f"{seconds / 60:.0f} min"
    return f"{seconds / 3600:.1f} h"
