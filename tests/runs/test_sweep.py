"""Sweeps: every row ends, nothing is searched twice, and what finished is kept."""

from __future__ import annotations

import io
import signal
import threading
import time
from collections.abc import Iterator, Sequence
from fractions import Fraction
from pathlib import Path
from typing import Any

import pandas as pd
import pytest
from joblib import parallel_config
from scipy.stats import nct
from scipy.stats import t as t_law

from search.efficiency.evaluator import score
from search.foundation.errors import Undecided
from search.foundation.stopping import Ended, Limits, Stop
from search.runs import row_search
from search.runs import sweep as sweeping
from search.runs.effort import seconds_of
from search.runs.kept import KeptBound, problem_of
from search.runs.plan import Plan
from search.runs.row_search import Found, Search
from search.runs.store import Store
from search.runs.sweep import SweepObserver, run_sweep
from search.runs.sweep_file import Sweep, read_sweep
from search.runs.sweep_records import Progress, RowResult, RowStatus, WhereFrom
from search.runs.sweep_table import csv_of
from search.runs.workers import patiently
from search.trial.canonical import canonical
from search.trial.checker import broken_rules
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
    monkeypatch.setattr(sweeping, "wait_for_kernels", lambda note, goals: None)
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


def test_rows_that_are_alike_do_not_mix(tmp_path: Path, store: Store, searches: Searches) -> None:
    """A row that shares another's search has that plan in its own names, whatever the store holds besides."""
    cases = "cases:\n  one: {rules.keep_out: {A: [block 1]}}\n  other: {rules.keep_out: {C: [block 2]}}\n"
    sweep = sweep_of(tmp_path, "  blocks.count: [4]\n" + cases)
    first, second = run_sweep(sweep, store).rows
    assert (first.where_from, second.where_from) == (WhereFrom.SEARCHED, WhereFrom.KEPT)
    for row in (first, second):
        assert row.plan is not None
        assert row.row.trial == row.plan.trial
        assert broken_rules(row.plan.trial, row.plan.contents) == ()
        assert score(row.plan.trial, row.plan.contents) == row.plan.score


def test_impossible_rows_that_are_alike_are_told_in_their_own_names(
    tmp_path: Path, store: Store, searches: Searches
) -> None:
    """A row whose problem proved impossible under other names says which of its own lines clash."""
    cases = (
        "cases:\n  one: {rules.never_share_block: [[A, B]]}\n  other: {rules.never_share_block: [[B, C]]}\n"
    )
    verdicts = tmp_path / "verdicts.jsonl"
    sweep = sweep_of(tmp_path, "  blocks: [{count: 3, plots: 3}]\n" + cases)
    for _ in range(2):
        first, second = run_sweep(sweep, store, verdicts=verdicts).rows
        assert (first.status, second.status) == (RowStatus.IMPOSSIBLE, RowStatus.IMPOSSIBLE)
        assert "[A, B]" in first.reason
        assert "[B, C]" in second.reason
        assert "A and B" not in second.reason
    assert len(searches) == 1


def test_quick_rows_come_first(tmp_path: Path, store: Store, searches: Searches) -> None:
    """Rows without a search end first, then short searches and small trials before long and large ones."""
    seen: list[int] = []

    class Watching(SweepObserver):
        def finished(self, result: RowResult, progress: Progress) -> None:
            seen.append(result.row.number)

    vary = (
        "- search.moves: [9000000, 100]\n- search: [{seconds: 60}, {seconds: 3}]\n"
        "- blocks.count: [12, many]\n  treatments: [[A, B, C, D, E, F, G, H, I]]\n"
    )
    sweep = sweep_of(tmp_path, vary)
    run_sweep(sweep, store, observer=Watching())
    assert seen == [6, 2, 5, 4, 1, 3]
    trial = sweep.rows[0].trial
    assert trial is not None
    assert seconds_of(trial, Limits(seconds=3, moves=100)) < seconds_of(trial, Limits(seconds=3))


def test_fresh_searches_anew_and_keeps_the_better(
    tmp_path: Path, store: Store, monkeypatch: pytest.MonkeyPatch, searches: Searches
) -> None:
    """`fresh` starts from no kept plan; where the new one is worse the old one is told and stays kept."""
    sweep = sweep_of(tmp_path, "  treatments: [[A, B, C, D]]\n  blocks.count: [4]\n")
    trial = sweep.rows[0].trial
    assert trial is not None
    plans = sorted(all_plans(trial), key=lambda contents: score(trial, contents).aim)
    worst, best = plans[0], plans[-1]
    assert score(trial, worst).aim < score(trial, best).aim
    asked: list[Contents | None] = []

    def finding(contents: Contents) -> Any:
        def found(trial: Trial, *, kept: Contents | None, **_: Any) -> Plan:
            asked.append(kept)
            return made_plan(trial, contents)

        return found

    for contents in (best, worst):
        monkeypatch.setattr(row_search, "find", finding(contents))
        (row,) = run_sweep(sweep, store, fresh=True).rows
        assert row.plan is not None
        assert row.plan.score.aim == pytest.approx(score(trial, best).aim)
    assert asked == [None, None]
    assert len(store.runs(row.plan.digest, "all pairs")) == 2


def test_verdicts_are_kept_as_each_row_ends(
    tmp_path: Path, store: Store, searches: Searches, monkeypatch: pytest.MonkeyPatch
) -> None:
    """Why a row has no plan is written down and not asked again, unless the file or the limits change; a line
    that a crash cut off costs that line alone."""
    verdicts = tmp_path / "verdicts.jsonl"
    sweep = sweep_of(
        tmp_path,
        "  blocks.plots: [2, 4]\n  rules.must_hold: [{block 1: [A]}, {block 1: [A], block 2: [A]}]\n",
    )
    first = run_sweep(sweep, store, verdicts=verdicts)
    assert len(searches) == 4
    assert len(verdicts.read_text().splitlines()) == 2
    verdicts.write_bytes(verdicts.read_bytes()[:-20])
    second = run_sweep(sweep, store, verdicts=verdicts)
    assert len(searches) == 5
    assert len(verdicts.read_text().splitlines()) == 3
    third = run_sweep(sweep, store, verdicts=verdicts)
    assert len(searches) == 5
    for before, *after in zip(first.rows, second.rows, third.rows, strict=True):
        for row in after:
            assert (row.status, row.reason, row.clashes) == (before.status, before.reason, before.clashes)
    assert third.rows[2].clashes[0].lines
    run_sweep(sweep_of(tmp_path, "  blocks.plots: [4]\n  search.moves: [101]\n"), store, verdicts=verdicts)
    assert len(searches) == 6
    run_sweep(sweep, store, verdicts=verdicts, fresh=True)
    assert len(searches) == 10


def test_a_forged_bound_denies_no_plan(tmp_path: Path, store: Store, searches: Searches) -> None:
    """A bound in the store that is below a plan is passed over; the plan and its own bound stand."""
    sweep = sweep_of(tmp_path, "  blocks.count: [3]\n")
    (row,) = run_sweep(sweep, store).rows
    assert row.plan is not None
    assert row.plan.bound is not None
    store.forget_plan(row.plan.digest, "all pairs")
    forged = KeptBound(Fraction(1, 2), "no plan is any good", {"kind": "none"})
    store.keep(problem_of(row.plan.trial, canonical(row.plan.trial)), "all pairs", bound=forged)
    (again,) = run_sweep(sweep, store, fresh=True).rows
    assert again.plan is not None
    assert again.plan.bound == row.plan.bound


def test_a_killed_process_costs_no_row() -> None:
    """What a dead worker had is searched again; rows that kill their worker time and again are given up."""

    class Death(Exception):
        pass

    begun: list[list[int]] = []

    def making(searches: Sequence[Search]) -> Iterator[Found]:
        begun.append([asked.number for asked in searches])
        for asked in searches:
            if asked.number in (2, 4) and (asked.number == 4 or len(begun) < 2):
                raise Death
            yield Found(asked.number, RowStatus.PLANNED)

    asked = [Search(number, None, "", Limits(), None) for number in range(1, 7)]  # type: ignore[arg-type]
    found = {one.number: one for one in patiently(asked, making, Death, 1)}  # type: ignore[arg-type]
    assert sorted(found) == [1, 2, 3, 4, 5, 6]
    assert [number for number, one in found.items() if one.status is RowStatus.FAILED] == [4]
    assert "killed" in found[4].reason
    assert begun == [[1, 2, 3, 4, 5, 6], [2, 3, 4, 5, 6], [4, 5, 6], [4, 5, 6], [5, 6]]


def test_a_bare_map_is_told(tmp_path: Path, store: Store, searches: Searches) -> None:
    """Bays that are still to be cut from the map are no blocks yet: the row says who cuts them."""
    path = tmp_path / "sweep.yaml"
    path.write_text(
        "sweep: bare\nbase:\n  trial: bare\n  treatments: 4\n  blocks: {wanted: {plots: 4}}\n"
        "  ground: {rows: 'aaaa aaaa'}\nvary: {search.moves: [10]}\n".replace("'aaaa aaaa'", '"aaaa\\naaaa"')
    )
    (row,) = run_sweep(read_sweep(path), store).rows
    assert row.status is RowStatus.FAULTY
    assert "evenfield plan" in row.reason


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
    # The triangle: t = b = 3, k = 2 is balanced, E = λt/(rk) = 3/4 (Yates 1936).
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


def test_figures_of_a_row_by_hand(tmp_path: Path, store: Store, searches: Searches) -> None:
    """Standard error s √v of the mean pair variance v, with s = 9 % of 6 t/ha; flags and break-even."""
    vary = "  blocks.count: [6]\n  precision: [{cv_percent: 9, mean: 6, unit: t/ha}, ~]\n"
    both, bare = run_sweep(sweep_of(tmp_path, vary), store).frame.to_dict("records")
    # Two copies of the triangle: v = 2 / (r E) = 2 / (4 · 3/4) and df = 12 - 6 - 3 + 1 (closed forms).
    assert both["residual_df"] == 4
    assert both["residual_df_without_blocks"] == 9
    assert both["standard_error"] == pytest.approx(0.54 * (2 / 3) ** 0.5)
    assert bare["standard_error"] == pytest.approx((2 / 3) ** 0.5)
    assert (both["unit"], bare["unit"]) == ("t/ha", "plot standard deviations")
    multiple = both["detectable_difference"] / both["standard_error"]
    power = 1 - nct.cdf(t_law.ppf(0.975, 4), 4, multiple)  # scipy's noncentral t, upper side alone
    assert power == pytest.approx(0.8, abs=1e-4)
    assert both["break_even_percent"] == pytest.approx(25)
    assert both["flags"] == "4 df"


def test_cells_are_no_formulas(tmp_path: Path, store: Store, searches: Searches) -> None:
    """Text that a spreadsheet might run gets an apostrophe in front, in headings too."""
    path = tmp_path / "sweep.yaml"
    path.write_text(SWEEP.replace("[A, B, C]", "[A, B, '=C']") + "  aim: [all pairs]\ncases: {'=1+1': }\n")
    result = run_sweep(read_sweep(path), store)
    text = csv_of((*result.sweep.columns, "@x"), result.rows)
    table = pd.read_csv(io.StringIO(text.removeprefix("\N{BYTE ORDER MARK}")))
    assert table["case"][0] == "'=1+1"
    assert "'@x" in table.columns


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
