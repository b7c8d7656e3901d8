"""`evenfield sweep`: many trials, their best found efficiency against the bound."""

from __future__ import annotations

from pathlib import Path
from types import TracebackType
from typing import TYPE_CHECKING, Any

import click

from search.cli.output import aside, emit, indented, page
from search.efficiency.comparing import in_figures
from search.runs.sweep import Progress, RowResult, SweepObserver, SweepResult, WhereFrom

if TYPE_CHECKING:
    from rich.console import Console
    from rich.live import Live
    from rich.table import Table

INTERRUPTED = 130
FIGURES_WIDTH = 62
SHOWN_ROWS = 12
"""Rows of the live table; earlier ones scroll away."""


@click.command("sweep")
@click.argument("file", type=click.Path(path_type=Path))
@click.option("--workers", type=click.IntRange(1, 1024), help="Rows searched at a time.")
@click.option("--out", type=click.Path(path_type=Path), help="Folder for sweep.csv.")
@click.option("--store", type=click.Path(path_type=Path), help="File of kept results.")
@click.option("--json", "as_json", is_flag=True, help="One JSON document on standard output.")
def command(file: Path, workers: int | None, out: Path | None, store: Path | None, as_json: bool) -> int:
    """Plan every row of a sweep FILE and compare the best found with the bound.

    A row that the store answers already is taken from there, so the same command goes on where an
    interrupted one stopped.
    """
    from joblib import cpu_count

    from search.field.issue import make_ready
    from search.foundation.documents import safe_name
    from search.runs.store import DEFAULT_PATH, Store
    from search.runs.sweep import run_sweep
    from search.runs.sweep_file import read_sweep
    from search.runs.sweep_table import sweep_frame, write_table

    sweep = read_sweep(file)
    folder = out or Path("results") / safe_name(sweep.name)
    make_ready(folder)
    with Store(store or DEFAULT_PATH) as kept, LiveTable(aside(), quiet=as_json) as live:
        result = run_sweep(sweep, kept, workers=workers or int(cpu_count()), observer=live)
    table = folder / "sweep.csv"
    write_table(result, table)
    if as_json:
        rows = sweep_frame(result).astype(object)
        content = rows.where(rows.notna(), None).to_dict("records")
        document = {"sweep": sweep.name, "rows": content, "files": [str(table)]}
        status = ("interrupted", INTERRUPTED) if result.interrupted else ("swept", 0)
        emit("sweep", status[0], document, status[1])
    else:
        show(page(), result)
        page().print(f"\n  {table}", soft_wrap=True)
    return INTERRUPTED if result.interrupted else 0


def show(console: Console, result: SweepResult) -> None:
    """All rows, with what varies."""
    console.print(result.sweep.name, style="bold")
    console.print(_table(console, result.rows, result.sweep.columns))
    for row in result.rows:
        if row.reason:
            indented(console, f"row {row.row.number} is {row.status}: {row.reason}", "-")
    counts: dict[str, int] = {}
    for row in result.rows:
        counts[str(row.status)] = counts.get(str(row.status), 0) + 1
    console.print(", ".join(f"{many} {status}" for status, many in counts.items()))
    if result.interrupted:
        console.print("Interrupted: what finished is kept, and the same command goes on from there.")


def _table(
    console: Console, rows: tuple[RowResult, ...] | list[RowResult], columns: tuple[str, ...]
) -> Table:
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
    plan = row.plan
    if plan is None:
        return [plots, "", "", "", str(row.status), ""]
    aim = plan.trial.aim.kind
    bound = "" if plan.bound is None else in_figures(aim, plan.bound.value, 5)
    gap = "" if plan.gap_percent is None else f"{plan.gap_percent:.3f}"
    kept = "kept" if row.where_from is WhereFrom.KEPT else ""
    return [plots, in_figures(aim, plan.score.aim, 5), bound, gap, plan.standing.value, kept]


class LiveTable(SweepObserver):
    """The last rows and a line of totals, drawn anew as rows end; plain lines where nobody looks.

    Parameters
    ----------
    console : where to draw
    quiet : draw nothing
    """

    def __init__(self, console: Console, quiet: bool = False) -> None:
        self.console = console
        self.quiet = quiet
        self.rows: list[RowResult] = []
        self.last: Progress | None = None
        self.live: Live | None = None

    def __enter__(self) -> LiveTable:
        if self.console.is_terminal and not self.quiet:
            from rich.live import Live

            self.live = Live(console=self.console, transient=True, refresh_per_second=4)
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
        if self.live is None and not self.quiet:
            # nobody sees a live table: a line for each row
            told = " ".join(part for part in _cells(result)[1:] if part)
            self.console.print(f"row {result.row.number}: {told} ({_totals(progress)})", soft_wrap=True)
        self.progress(progress)

    def progress(self, progress: Progress) -> None:
        self.last = progress
        if self.live is not None:
            self.live.update(self._drawing(progress))

    def _drawing(self, progress: Progress) -> Any:
        from rich.console import Group

        columns = tuple(dict.fromkeys(key for row in self.rows for key in row.row.values))
        return Group(_table(self.console, self.rows, columns), _totals(progress))


def _totals(progress: Progress) -> str:
    parts = [f"{progress.done} of {progress.rows} rows", f"{progress.running} running"]
    if progress.kept:
        parts.append(f"{progress.kept} kept")
    if progress.failed:
        parts.append(f"{progress.failed} without a plan")
    if progress.best_gap_percent is not None:
        parts.append(f"best gap {progress.best_gap_percent:.3f} %")
    if progress.seconds_left is not None and progress.done < progress.rows:
        parts.append(f"about {progress.seconds_left:.0f} s left")
    return ", ".join(parts)
