"""`evenfield sweep`: many trials, their best found efficiency against the bound."""

from __future__ import annotations

from collections import Counter
from contextlib import AbstractContextManager, nullcontext
from pathlib import Path
from typing import TYPE_CHECKING

import click

from search.cli.output import aside, emit, failure, indented, page
from search.cli.sweep_watching import LiveTable, rows_table
from search.runs.sweep import SweepResult, run_sweep
from search.runs.sweep_file import read_sweep

if TYPE_CHECKING:
    from rich.console import Console

    from search.runs.sweep import Workers

INTERRUPTED, LOST = 130, 2
MOST_TOLD = 40
"""Rows that are listed in full at the end; the files have all."""


@click.command("sweep")
@click.argument("file", type=click.Path(path_type=Path))
@click.option("--workers", type=click.IntRange(1, 1024), help="Rows searched at a time on this machine.")
@click.option("--dask", metavar="ADDRESS", help="Search on the workers of this dask scheduler instead.")
@click.option("--fresh", is_flag=True, help="Search every row anew; the better of old and new stays kept.")
@click.option("--out", type=click.Path(path_type=Path), help="Folder for sweep.csv and sweep.html.")
@click.option("--store", type=click.Path(path_type=Path), help="File of kept results.")
@click.option("--json", "as_json", is_flag=True, help="One JSON document on standard output.")
def command(
    file: Path,
    workers: int | None,
    dask: str | None,
    fresh: bool,
    out: Path | None,
    store: Path | None,
    as_json: bool,
) -> int:
    """Plan every row of a sweep FILE and compare the best found with the bound.

    A row that the store answers already is taken from there, so the same command goes on where an
    interrupted one stopped, and a row that is given more time starts from its best.
    """
    from search.field.issue import make_ready
    from search.foundation.documents import safe_name
    from search.runs.store import DEFAULT_PATH, Store
    from search.runs.sweep_files import SweepFiles

    if dask is not None and workers is not None:
        raise click.UsageError("--workers counts rows on this machine; with --dask its workers count")
    sweep = read_sweep(file)
    folder = out or Path("results") / safe_name(sweep.name)
    make_ready(folder)
    files = SweepFiles(folder)
    with (
        _crew(workers, dask) as crew,
        Store(store or DEFAULT_PATH) as kept,
        LiveTable(aside(), files, quiet=as_json) as live,
    ):
        result = run_sweep(sweep, kept, workers=crew, fresh=fresh, verdicts=files.verdicts, observer=live)
    written = files.write(result)
    status = LOST if result.lost else INTERRUPTED if result.interrupted else 0
    if as_json:
        _emit(result, written, status)
    else:
        show(page(), result)
        for path in written:
            page().print(f"  {path}", soft_wrap=True)
        if result.lost:
            failure("sweep", "workers lost", _lost(result), status, False)
    return status


def _crew(workers: int | None, dask: str | None) -> AbstractContextManager[Workers]:
    """Who searches: machines of a scheduler, or processes here."""
    from joblib import cpu_count

    from search.runs.sweep import Processes

    if dask is None:
        return nullcontext(Processes(workers or int(cpu_count())))
    from search.runs.machines import machines

    return machines(dask)


def _lost(result: SweepResult) -> str:
    return f"{result.lost}; what had ended is kept, and the same command goes on from there"


def _emit(result: SweepResult, written: tuple[Path, ...], status: int) -> None:
    rows = result.frame.astype(object)
    content = {
        "sweep": result.sweep.name,
        "rows": rows.where(rows.notna(), None).to_dict("records"),
        "files": list(map(str, written)),
        "message": _lost(result) if result.lost else "",
    }
    word = "workers lost" if result.lost else "interrupted" if result.interrupted else "swept"
    emit("sweep", word, content, status)


def show(console: Console, result: SweepResult) -> None:
    """The first rows, with what varies; why rows have no plan; how many ended in which way."""
    console.print(result.sweep.name, style="bold")
    console.print(rows_table(console, result.rows[:MOST_TOLD], result.sweep.columns))
    if len(result.rows) > MOST_TOLD:
        console.print(f"and {len(result.rows) - MOST_TOLD:,} more rows, in the files")
    for row in [row for row in result.rows if row.reason][:MOST_TOLD]:
        indented(console, f"row {row.row.number} is {row.status}: {row.reason}", "-")
    counts = Counter(str(row.status) for row in result.rows)
    console.print(", ".join(f"{many} {status}" for status, many in counts.items()))
    if result.interrupted and not result.lost:
        console.print("Interrupted: what finished is kept, and the same command goes on from there.")
