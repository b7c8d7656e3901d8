"""Sweeps on a real dask scheduler and its workers: the same rows, and none lost when processes die."""

from __future__ import annotations

import os
import signal
import socket
import sys
import time
from pathlib import Path
from typing import Any

import pandas as pd
import pytest

from search.foundation.errors import BadInput
from search.runs.machines import machines
from search.runs.store import Store
from search.runs.sweep import SweepObserver, SweepResult, run_sweep
from search.runs.sweep_file import Sweep, read_sweep
from search.runs.sweep_records import Progress, RowResult, RowStatus
from tests.runs.cluster import cluster

pytestmark = pytest.mark.filterwarnings("ignore")  # what dask says of processes that died is its own affair

SWEEP = """\
sweep: far away
base:
  trial: far away
  treatments: 8
  blocks: {count: 9, plots: 3}
  search: {moves: MOVES}
vary:
  search.seed: [SEEDS]
cases:
  free:
  apart: {rules.never_share_block: [[T01, T02]]}
  none: {rules.never_share_block: [[T01, T02, T03, T04]]}
"""


def sweep_of(folder: Path, moves: int, seeds: str = "1, 2, 3, 4, 5, 6") -> Sweep:
    path = folder / "sweep.yaml"
    path.write_text(SWEEP.replace("MOVES", str(moves)).replace("SEEDS", seeds))
    return read_sweep(path)


class AfterRows(SweepObserver):
    """Does something once, after so many rows with a plan."""

    def __init__(self, rows: int, deed: Any) -> None:
        self.rows = rows
        self.deed = deed
        self.seen: list[int] = []

    def finished(self, result: RowResult, progress: Progress) -> None:
        self.seen.append(result.row.number)
        if len(self.seen) == self.rows:
            self.deed()


def serial(sweep: Sweep, folder: Path) -> pd.DataFrame:
    with Store(folder / "serial.sqlite") as store:
        return told(run_sweep(sweep, store))


def told(result: SweepResult) -> pd.DataFrame:
    """The rows but for their times."""
    return result.frame.drop(columns=["seconds"])


def test_the_same_rows_as_one_process(tmp_path: Path) -> None:
    """With a limit in moves two workers elsewhere give what one gives here, times aside."""
    sweep = sweep_of(tmp_path, 3000, "1, 2")
    expected = serial(sweep, tmp_path)
    assert set(expected["status"]) == {"planned", "impossible"}
    with (
        cluster(tmp_path / "dask") as far,
        machines(far.address) as crew,
        Store(tmp_path / "store.sqlite") as store,
    ):
        result = run_sweep(sweep, store, workers=crew)
    assert not result.interrupted
    pd.testing.assert_frame_equal(told(result), expected)


@pytest.mark.slow
def test_a_killed_worker_costs_no_row(tmp_path: Path) -> None:
    """A worker killed by the system in the middle of a row: the row is searched elsewhere, and ends once."""
    sweep = sweep_of(tmp_path, 400_000)
    with (
        cluster(tmp_path / "dask") as far,
        machines(far.address) as crew,
        Store(tmp_path / "store.sqlite") as store,
    ):
        running = crew.client.run(os.getpid)
        victim = AfterRows(4, lambda: os.kill(next(iter(running.values())), signal.SIGKILL))
        result = run_sweep(sweep, store, workers=crew, observer=victim)
    assert not result.interrupted
    assert sorted(victim.seen) == list(range(1, 19))
    pd.testing.assert_frame_equal(told(result), serial(sweep, tmp_path))


@pytest.mark.slow
def test_a_lost_scheduler_is_told(tmp_path: Path) -> None:
    """Without its scheduler the sweep ends soon and says so; what had ended is kept, not searched again."""
    sweep = sweep_of(tmp_path, 400_000)
    with (
        cluster(tmp_path / "dask") as far,
        machines(far.address) as crew,
        Store(tmp_path / "store.sqlite") as store,
    ):
        killed: list[float] = []

        def kill() -> None:
            far.scheduler.kill()
            killed.append(time.monotonic())

        result = run_sweep(sweep, store, workers=crew, observer=AfterRows(8, kill))
        assert time.monotonic() - killed[0] < 20
        assert far.address in result.lost
        assert result.interrupted
        ended = [row for row in result.rows if row.status is not RowStatus.OPEN]
        assert 8 <= len(ended) < 18
    with Store(tmp_path / "store.sqlite") as store:
        again = run_sweep(sweep, store)
    assert [row.status for row in again.rows].count(RowStatus.PLANNED) == 12
    kept = {row.row.number for row in again.rows if row.where_from == "kept"}
    assert {row.row.number for row in ended if row.plan is not None} <= kept


def test_an_address_that_nobody_answers_is_told_in_seconds() -> None:
    """A port that nobody listens at, and words that are no address."""
    with socket.socket() as free:
        free.bind(("127.0.0.1", 0))
        address = f"tcp://127.0.0.1:{free.getsockname()[1]}"
    started = time.monotonic()
    with pytest.raises(BadInput, match="no dask scheduler answers"), machines(address):
        pass
    assert time.monotonic() - started < 30
    with pytest.raises(BadInput, match="no dask scheduler answers"), machines("no such place:nowhere"):
        pass


def test_a_scheduler_without_workers_is_told(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    """It would wait for ever: the message says how to start a worker."""
    monkeypatch.setattr("search.runs.machines.WAIT_SECONDS", 0.5)
    with (
        cluster(tmp_path / "dask", workers=0) as far,
        pytest.raises(BadInput, match="dask worker"),
        machines(far.address),
    ):
        pass


def test_dask_that_is_not_installed_is_told(monkeypatch: pytest.MonkeyPatch) -> None:
    """The message says what to install."""
    monkeypatch.setitem(sys.modules, "distributed", None)
    with pytest.raises(BadInput, match=r"evenfield\[dask\]"), machines("tcp://127.0.0.1:1"):
        pass


def test_nothing_nests(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    """No search calls joblib by itself: on dask such calls would lose tasks."""
    from joblib import Parallel

    def nested(*_: Any, **__: Any) -> None:
        raise AssertionError("a parallel call within a search")

    monkeypatch.setattr(Parallel, "__init__", nested)
    with Store(tmp_path / "store.sqlite") as store:
        result = run_sweep(sweep_of(tmp_path, 500), store)
    assert {row.status for row in result.rows} == {RowStatus.PLANNED, RowStatus.IMPOSSIBLE}
