"""`evenfield sweep` as a user runs it: what it prints and writes, and that it can be ended at any moment."""

from __future__ import annotations

import io
import os
import signal
import subprocess
import sys
import time
from collections.abc import Sequence
from contextlib import nullcontext
from pathlib import Path
from typing import Any

import pandas as pd
import pytest
from rich.console import Console

from search.cli import sweep as sweep_command
from search.cli.sweep_watching import LiveTable, totals
from search.foundation.errors import BadInput, WorkersLost
from search.runs import sweep_files
from search.runs.row_search import Search
from search.runs.store import Store
from search.runs.sweep import SweepResult, run_sweep
from search.runs.sweep_file import read_sweep
from search.runs.sweep_files import SweepFiles
from search.runs.sweep_records import Progress, RowStatus
from search.runs.workers import one_by_one
from tests.cli.asked import answer, environment, said

STARTED = "import sys, search.cli.entry as e; print('started', file=sys.stderr, flush=True); e.run()"
SWEEP = """\
sweep: tiny
base:
  trial: tiny
  treatments: [A, B, C]
  blocks: {count: 3, plots: 2}
  search: {moves: 200}
vary:
  blocks.count: [3, 4]
cases:
  free:
  none: {rules.never_share_block: [[A, B, C]]}
"""


def sweep_in(folder: Path, text: str = SWEEP) -> tuple[Path | str, ...]:
    """The words of the command for a sweep file in a folder."""
    (folder / "sweep.yaml").write_text(text)
    return "sweep", folder / "sweep.yaml", "--out", folder / "out", "--store", folder / "store.sqlite"


def test_the_document_and_the_files_tell_the_same(tmp_path: Path, capsys: pytest.CaptureFixture[str]) -> None:
    """One JSON document with a line for each row; the table has the same; a second run searches nothing."""
    words = (*sweep_in(tmp_path), "--workers", "1")
    status, document = answer(capsys, *words)
    assert (status, document["status"], document["message"]) == (0, "swept", "")
    assert [row["status"] for row in document["rows"]] == ["planned", "planned", "impossible", "impossible"]
    assert "never_share_block: [A, B, C]" in document["rows"][2]["reason"]
    assert document["rows"][0]["best_found"] == pytest.approx(0.75)  # λt/(rk), Yates 1936
    assert document["rows"][2]["best_found"] is None
    table, page = map(Path, document["files"])
    frame = pd.read_csv(table, encoding="utf-8-sig")
    assert list(frame["status"]) == [row["status"] for row in document["rows"]]
    assert page.read_text().startswith("<!doctype html>")
    again = answer(capsys, *words)[1]["rows"]
    assert {row["where_from"] for row in again} == {"kept"}
    drop = ("where_from",)
    for before, after in zip(document["rows"], again, strict=True):
        assert {k: v for k, v in before.items() if k not in drop} == {
            k: v for k, v in after.items() if k not in drop
        }
    status, out, err = said(capsys, *words)
    assert status == 0
    assert "2 planned, 2 impossible" in out
    assert "4 of 4 rows done" in err


def test_what_cannot_be_asked_for(tmp_path: Path, capsys: pytest.CaptureFixture[str]) -> None:
    """Workers here and elsewhere at once, a scheduler that is not there: 2, and a sentence."""
    words = sweep_in(tmp_path)
    status, document = answer(capsys, *words, "--workers", "2", "--dask", "tcp://127.0.0.1:1")
    assert (status, document["status"]) == (2, "bad input")
    status, document = answer(capsys, *words, "--dask", "tcp://127.0.0.1:1")
    assert status == 2
    assert "dask scheduler" in document["message"]


class Lost:
    """Workers that are lost after two rows."""

    threads = 2

    def search(self, searches: Sequence[Search]) -> Any:
        yield from one_by_one(searches[:2])
        if len(searches) > 2:
            raise WorkersLost("the dask scheduler at tcp://somewhere answers no more")


def test_lost_workers_end_with_2_and_files(
    tmp_path: Path, capsys: pytest.CaptureFixture[str], monkeypatch: pytest.MonkeyPatch
) -> None:
    """What had ended is told and written; the message says how to go on."""
    monkeypatch.setattr(sweep_command, "_crew", lambda workers, dask: nullcontext(Lost()))
    words = sweep_in(tmp_path)
    status, document = answer(capsys, *words)
    assert (status, document["status"]) == (2, "workers lost")
    assert "goes on from there" in document["message"]
    statuses = [row["status"] for row in document["rows"]]
    assert statuses.count("not finished") == 2
    assert "This sweep has not ended" in (tmp_path / "out" / "sweep.html").read_text()
    status, _, err = said(capsys, *words)
    assert status == 0  # two rows were left
    assert "4 of 4 rows done" in err


LONG = SWEEP.replace("moves: 200", "moves: 60000").replace(
    "blocks.count: [3, 4]", "blocks.count: [3, 4, 5, 6, 7, 8, 9, 10, 11, 12]"
)


@pytest.mark.parametrize(
    ("delay", "blow", "workers"),
    [
        (0.3, signal.SIGINT, "2"),
        (4.0, signal.SIGINT, "2"),
        (4.0, signal.SIGINT, "1"),
        (6.0, signal.SIGKILL, "2"),
    ],
)
def test_ended_at_any_moment_it_goes_on(
    tmp_path: Path, delay: float, blow: signal.Signals, workers: str
) -> None:
    """Ctrl-C reaches every process of the terminal: 130, no traceback, whole files; even a kill loses no row
    that had ended; the same command goes on and ends like an undisturbed one."""
    words = (*map(str, sweep_in(tmp_path, LONG)), "--workers", workers, "--json")
    child = subprocess.Popen(
        [sys.executable, "-c", STARTED, *words],
        cwd=tmp_path,
        env=environment(),
        stdout=subprocess.PIPE,
        stderr=subprocess.PIPE,
        text=True,
        start_new_session=True,
    )
    assert child.stderr is not None
    assert child.stderr.readline() == "started\n"
    time.sleep(delay)
    os.killpg(child.pid, blow)
    out, err = child.communicate(timeout=60)
    if blow is signal.SIGINT:
        assert child.returncode in (0, 130)
        assert "Traceback" not in err
        assert out == "" or out.rstrip().endswith("}")
        if (tmp_path / "out" / "sweep.csv").exists():
            assert len(pd.read_csv(tmp_path / "out" / "sweep.csv", encoding="utf-8-sig")) == 20
    with Store(tmp_path / "store.sqlite") as store:
        ended = store.count()
        result = run_sweep(read_sweep(tmp_path / "sweep.yaml"), store)
    statuses = [row.status for row in result.rows]
    assert statuses == [RowStatus.PLANNED] * 10 + [RowStatus.IMPOSSIBLE] * 10
    kept = sum(row.where_from == "kept" for row in result.rows)
    # One plan may be that of an interrupted search, which goes on.
    assert ended - 1 <= kept <= ended


def test_files_are_written_now_and_then(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    """A long sweep leaves files before its end; where they cannot be written it says so once, and goes on."""
    monkeypatch.setattr(sweep_files, "EVERY_SECONDS", 0.0)
    monkeypatch.setattr(sweep_files, "SHARE", 1e9)
    files = SweepFiles(tmp_path / "out")
    console = Console(file=io.StringIO(), width=100)
    seen: list[int] = []
    whole = files.write

    def write(result: SweepResult) -> tuple[Path, Path]:
        seen.append(sum(row.status is not RowStatus.OPEN for row in result.rows))
        if len(seen) > 2:
            raise BadInput("cannot write sweep.csv: no space left on device")
        return whole(result)

    monkeypatch.setattr(files, "write", write)
    sweep_in(tmp_path)
    with Store(tmp_path / "store.sqlite") as store, LiveTable(console, files) as live:
        result = run_sweep(read_sweep(tmp_path / "sweep.yaml"), store, observer=live)
    assert not result.interrupted
    assert len(seen) >= 3
    assert len(pd.read_csv(files.table, encoding="utf-8-sig")) == 4
    assert console.file.getvalue().count("no space left") == 1  # type: ignore[attr-defined]


def test_a_terminal_sees_a_table_a_file_lines(tmp_path: Path) -> None:
    """On a terminal the last rows, a bar and totals are drawn anew; elsewhere each row is a line."""
    sweep_in(tmp_path)
    texts = []
    for terminal in (True, False):
        console = Console(file=io.StringIO(), width=120, force_terminal=terminal, highlight=False)
        files = SweepFiles(tmp_path / "out")
        with Store(tmp_path / f"{terminal}.sqlite") as store, LiveTable(console, files) as live:
            run_sweep(read_sweep(tmp_path / "sweep.yaml"), store, observer=live)
            if live.live is not None:
                live.live.refresh()
        texts.append(console.file.getvalue())  # type: ignore[attr-defined]
    drawn, lines = texts
    assert "best found" in drawn
    assert "4 of 4 rows done" in drawn
    assert "\x1b[" in drawn
    assert lines.count("\n") == 4
    assert "\x1b[" not in lines


def test_totals_in_a_line() -> None:
    """Done, running, kept, without a plan, best gap and the time left, in the unit that suits."""
    progress = Progress(2000, 12, 3, 1, 2, 0.0123, 7200.0)
    assert totals(progress) == (
        "12 of 2,000 rows done, 2 running, 3 kept, 1 without a plan, best gap 0.012 %, about 2.0 h left"
    )
