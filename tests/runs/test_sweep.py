"""Sweeps: every row ends, nothing is searched twice, and what finished is kept."""

from __future__ import annotations

import io
import signal
import threading
import time
from pathlib import Path
from typing import Any

import pandas as pd
import pytest
from joblib import parallel_config

from search.foundation.errors import Undecided
from search.foundation.stopping import Ended, Limits, Stop
from search.runs import row_search
from search.runs import sweep as sweeping
from search.runs.plan import Plan
from search.runs.store import Store
from search.runs.sweep import SweepObserver, run_sweep
from search.runs.sweep_file import Sweep, read_sweep
from search.runs.sweep_records import Progress, RowResult, RowStatus, WhereFrom
from search.runs.sweep_table import csv_of
from search.trial.limits import limits as implied_limits
from search.trial.records import Contents, Trial
from tests.drawn import all_plans
from tests.runs.made import made_plan

SWEEP = """\
sweep: tiny
base:
  trial: tiny
  treatments: [A, B, C]
  blocks: {count: 3, plots: 2}
  search: {moves: 100}
vary:
"""


def sweep_of(folder: Path, vary: str) -> Sweep:
    path = folder / "sweep.yaml"
    path.write_text(SWEEP + vary)
    return read_sweep(path)


class Searches(list[Trial]):
    """Stands for the search: takes the first plan there is, and notes what it was asked."""

    ends = Ended.MOVES

    def __call__(self, trial: Trial, *, kept: Contents | None, **asked: Any) -> Plan:
        self.append(trial)
        implied_limits(trial)
        return made_plan(trial, kept or next(all_plans(trial)), self.ends)


@pytest.fixture
def searches(monkeypatch: pytest.MonkeyPatch) -> Searches:
    found = Searches()
    monkeypatch.setattr(row_search, "find", found)
    monkeypatch.setattr(sweeping, "wait_for_kernels", lambda note: None)
    return found


@pytest.fixture
def store(tmp_path: Path) -> Any:
    with Store(tmp_path / "store.sqlite") as opened:
        yield opened


MIXED = "- blocks.plots: [2, 4, many]\n- treatments: [[A, B, C, D]]\n  plots_each: [9]\n"


def test_every_row_ends_with_plan_or_reason(tmp_path: Path, store: Store, searches: Searches) -> None:
    """Planned, impossible and faulty rows stand side by side, each with what is known of it."""
    result = run_sweep(sweep_of(tmp_path, MIXED), store)
    assert [row.status for row in result.rows] == [
        RowStatus.PLANNED,
        RowStatus.IMPOSSIBLE,
        RowStatus.FAULTY,
        RowStatus.IMPOSSIBLE,
    ]
    assert not result.interrupted
    planned, impossible, faulty, _ = result.rows
    assert planned.plan is not None
    assert planned.where_from is WhereFrom.SEARCHED
    assert "4 plots" in impossible.reason
    assert "sweep.yaml, line 8" in faulty.reason
    assert "\n" not in faulty.reason


def test_a_second_sweep_takes_all_from_the_store(tmp_path: Path, store: Store, searches: Searches) -> None:
    """Rows that were searched far enough are not searched again, and say where they come from."""
    sweep = sweep_of(tmp_path, "  blocks.count: [3, 6]\n")
    first = run_sweep(sweep, store)
    assert len(searches) == 2
    second = run_sweep(sweep, store)
    assert len(searches) == 2
    assert [row.where_from for row in second.rows] == [WhereFrom.KEPT] * 2
    for before, after in zip(first.rows, second.rows, strict=True):
        assert before.plan is not None
        assert after.plan is not None
        assert after.plan.score == before.plan.score
        assert after.plan.bound == before.plan.bound
    longer = sweep_of(tmp_path, "  blocks.count: [3, 6]\n  search.moves: [1000]\n")
    run_sweep(longer, store)
    assert len(searches) == 4


def test_the_same_problem_is_searched_once(tmp_path: Path, store: Store, searches: Searches) -> None:
    """Rows that differ by names and order alone share one search."""
    rows = "  rules.keep_out: [{A: [block 1]}, {C: [block 2]}, {A: [block 1, block 2]}]\n"
    result = run_sweep(sweep_of(tmp_path, rows + "  blocks.count: [4]\n"), store)
    assert len(searches) == 2
    assert [row.where_from for row in result.rows] == [WhereFrom.SEARCHED, WhereFrom.KEPT, WhereFrom.SEARCHED]
    first, second, _ = (row.plan for row in result.rows)
    assert first is not None
    assert second is not None
    assert second.score.aim == pytest.approx(first.score.aim)


def test_a_search_that_fails_is_a_row(
    tmp_path: Path, store: Store, monkeypatch: pytest.MonkeyPatch, searches: Searches
) -> None:
    """An undecided trial and an error of our own end their row, not the sweep."""
    errors: list[Exception] = [Undecided("no plan found in 20 s"), RuntimeError("bound below a plan")]

    def failing(trial: Trial, **asked: Any) -> Plan:
        raise errors.pop(0)

    monkeypatch.setattr(row_search, "find", failing)
    result = run_sweep(sweep_of(tmp_path, "  blocks.count: [3, 6]\n"), store)
    assert [(row.status, row.reason) for row in result.rows] == [
        (RowStatus.UNDECIDED, "no plan found in 20 s"),
        (RowStatus.FAILED, "internal error: RuntimeError: bound below a plan"),
    ]


def test_limits_are_the_trials_own_or_the_usual(tmp_path: Path) -> None:
    """A row is searched as far as its trial says, and where it does not say as far as is usual."""
    own, silent = sweep_of(tmp_path, "  search: [{seconds: 3}, ~]\n").rows
    usual = Limits(moves=7)
    assert own.trial is not None
    assert silent.trial is not None
    assert sweeping.limits_of(own.trial, usual) == Limits(seconds=3)
    assert sweeping.limits_of(silent.trial, usual) == usual


def test_an_observer_is_told_of_every_row(tmp_path: Path, store: Store, searches: Searches) -> None:
    """Done, failed, kept, best gap and the time left are told as rows end."""
    seen: list[tuple[RowResult, Progress]] = []

    class Watching(SweepObserver):
        def finished(self, result: RowResult, progress: Progress) -> None:
            seen.append((result, progress))

    sweep = sweep_of(tmp_path, MIXED)
    run_sweep(sweep, store, observer=Watching())
    run_sweep(sweep, store, observer=Watching())
    first, last = [progress for _, progress in seen[:4]], [progress for _, progress in seen[4:]]
    assert [progress.done for progress in first] == [1, 2, 3, 4]
    assert [progress.failed for progress in first] == [1, 1, 2, 3]
    assert first[-1].best_gap_percent == 0
    assert first[0].seconds_left is None
    assert first[-1].seconds_left == 0
    assert last[-1].kept == 1
    assert all(progress.rows == 4 for _, progress in seen)


def test_the_table_has_a_line_for_every_row(tmp_path: Path, store: Store, searches: Searches) -> None:
    """sweep.csv tells the varied values, best found against bound, and the reason where there is no plan."""
    result = run_sweep(sweep_of(tmp_path, MIXED), store)
    text = csv_of(result.sweep.columns, result.rows)
    assert text.startswith("\N{BYTE ORDER MARK}row,blocks.plots,")
    table = pd.read_csv(io.StringIO(text.removeprefix("\N{BYTE ORDER MARK}")))
    assert list(table.columns[:6]) == ["row", "blocks.plots", "treatments", "plots_each", "t", "b"]
    assert list(table["status"]) == ["planned", "impossible", "faulty", "impossible"]
    planned = table.iloc[0]
    # The triangle of CHECKS.md: t = b = 3, k = 2 is balanced, E = λt/(rk) = 3/4 (Yates 1936).
    assert planned["best_found"] == pytest.approx(0.75)
    assert planned["bound"] == pytest.approx(0.75)
    assert planned["gap_percent"] == 0
    assert planned["standing"] == "balanced"
    assert planned["residual_df"] == 1
    assert table["best_found"].isna().tolist() == [False, True, True, True]
    assert "many" in table["reason"][2]
    assert table["treatments"][3] == "[A, B, C, D]"
    frame = result.frame
    assert str(frame["n"].dtype) == "Int64"
    assert frame["seed"][0] == 1


def test_a_varied_aim_has_one_column(tmp_path: Path, store: Store, searches: Searches) -> None:
    """What varies and what is told of every row share a column where they are the same."""
    result = run_sweep(sweep_of(tmp_path, "  aim: [all pairs, overall]\n"), store)
    frame = result.frame
    assert list(frame.columns).count("aim") == 1
    assert list(frame["aim"]) == ["all pairs", "overall"]


def test_an_interrupted_search_ends_the_sweep_and_is_kept(
    tmp_path: Path, store: Store, monkeypatch: pytest.MonkeyPatch, searches: Searches
) -> None:
    """The first interrupt asks the running search for its best; that is kept, and the row stays open."""

    def slow(trial: Trial, *, stop: Stop, kept: Contents | None, **asked: Any) -> Plan:
        if trial.b == 3:
            return searches(trial, kept=kept)
        threading.Timer(0.2, signal.raise_signal, [signal.SIGINT]).start()
        while not stop.interrupted:
            time.sleep(0.01)
        return made_plan(trial, next(all_plans(trial)), Ended.INTERRUPTED)

    monkeypatch.setattr(row_search, "find", slow)
    sweep = sweep_of(tmp_path, "  blocks.count: [3, 6, 9]\n")
    result = run_sweep(sweep, store)
    assert result.interrupted
    assert [row.status for row in result.rows] == [RowStatus.PLANNED, RowStatus.OPEN, RowStatus.OPEN]
    assert result.rows[1].plan is not None
    assert store.count() == 2
    # The same command goes on: the first row is kept, the second starts from what was found.
    starts: list[Contents | None] = []

    def going_on(trial: Trial, *, kept: Contents | None, **asked: Any) -> Plan:
        starts.append(kept)
        return made_plan(trial, kept or ((0, 1),) * 9)

    monkeypatch.setattr(row_search, "find", going_on)
    again = run_sweep(sweep, store)
    assert not again.interrupted
    assert [row.where_from for row in again.rows] == [WhereFrom.KEPT, WhereFrom.SEARCHED, WhereFrom.SEARCHED]
    assert [start is None for start in starts] == [False, True]


def test_the_callers_context_chooses_the_workers(tmp_path: Path, store: Store, searches: Searches) -> None:
    """Side by side, under any backend of joblib, every row ends once."""
    sweep = sweep_of(tmp_path, "  blocks.count: [3, 4, 5, 6, 7]\n")
    with parallel_config(backend="threading"):
        result = run_sweep(sweep, store, workers=2)
    assert [row.status for row in result.rows] == [RowStatus.PLANNED] * 5
    assert sorted(trial.b for trial in searches) == [3, 4, 5, 6, 7]
    assert store.count() == 5


@pytest.mark.slow
def test_processes_give_the_same_rows(tmp_path: Path) -> None:
    """Two workers in processes give the rows that one gives, and one process writes the store."""
    text = "  blocks.count: [3, 4, 5, 6, 7, 8]\n"
    sweep = sweep_of(tmp_path, text)
    tables = []
    for workers in (1, 2):
        with Store(tmp_path / f"{workers}.sqlite") as store:
            result = run_sweep(sweep, store, workers=workers)
            assert store.count() == 6
            tables.append(result.frame.drop(columns=["seconds"]))
    pd.testing.assert_frame_equal(*tables)
