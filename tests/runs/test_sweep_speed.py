"""What a sweep costs beside its searches, and what more machines bring; ratios of one run."""

from __future__ import annotations

import resource
import time
from fractions import Fraction
from pathlib import Path
from typing import Any

import pytest

from search.efficiency.evaluator import score
from search.efficiency.records import Bound
from search.foundation.stopping import Ended, Stop
from search.runs import row_search, workers
from search.runs import sweep as sweeping
from search.runs.machines import NOBODY, machines
from search.runs.plan import Plan
from search.runs.row_search import Found, Search, search_row
from search.runs.store import Store
from search.runs.sweep import run_sweep
from search.runs.sweep_file import Sweep, read_sweep
from search.runs.sweep_files import SweepFiles
from search.runs.workers import search_elsewhere
from search.trial.limits import limits as implied_limits
from search.trial.records import Trial
from tests.runs.cluster import cluster
from tests.runs.report.swept import turned

pytestmark = pytest.mark.bench

MANY = """\
sweep: many
base: {trial: many, treatments: 12, blocks: {count: 12, plots: 4}, search: {moves: 1000}}
vary:
  treatments: [TREATMENTS]
  blocks.count: [COUNTS]
  blocks.plots: [2, 3, 4, 5, 6, 7, 8, 9, 10, 11]
"""
SECOND = """\
sweep: a second each
base:
  trial: a second each
  treatments: 12
  blocks: {count: 12, plots: 4}
  rules: {never_share_block: [[T01, T02]]}
  search: {moves: 900000}
vary:
  search.seed: [SEEDS]
"""


def at_once(trial: Trial, **_: Any) -> Plan:
    """A plan without a search, with a bound that costs nothing."""
    implied_limits(trial)
    contents = turned(trial)
    bound = Bound(trial.aim.kind, Fraction(1), "no efficiency is above 1", {"kind": "none"})
    return Plan(trial, contents, score(trial, contents), bound, Ended.MOVES, 1, 1000, 0.0, "by hand", "")


def listed(first: int, last: int) -> str:
    return ", ".join(map(str, range(first, last + 1)))


def many(folder: Path, treatments: int, counts: int) -> Sweep:
    path = folder / "sweep.yaml"
    text = MANY.replace("TREATMENTS", listed(4, 3 + treatments)).replace("COUNTS", listed(5, 4 + counts))
    path.write_text(text)
    return read_sweep(path)


def seconds_each(folder: Path, rows: int) -> Sweep:
    path = folder / "sweep.yaml"
    path.write_text(SECOND.replace("SEEDS", listed(1, rows)))
    return read_sweep(path)


def test_machinery_beside_searches_of_a_second(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    """With one worker the sweep takes less than 5 % longer than its searches, files included."""
    searched: list[float] = []

    def timed(asked: Search, stop: Stop) -> Found:
        started = time.perf_counter()
        found = search_row(asked, stop)
        searched.append(time.perf_counter() - started)
        return found

    monkeypatch.setattr(workers, "search_row", timed)
    with Store(tmp_path / "warm.sqlite") as store:
        # Libraries are loaded once, however many rows there are.
        SweepFiles(tmp_path / "warm").write(run_sweep(seconds_each(tmp_path, 1), store))
    searched.clear()
    started = time.perf_counter()
    with Store(tmp_path / "store.sqlite") as store:
        result = run_sweep(seconds_each(tmp_path, 30), store, verdicts=tmp_path / "verdicts.jsonl")
    SweepFiles(tmp_path / "out").write(result)
    more = (time.perf_counter() - started) / sum(searched) - 1
    print(f"\n30 rows of {sum(searched) / 30:.2f} s: machinery {100 * more:.1f} % of the search time")
    assert len(searched) == 30
    assert more < 0.05


def test_machinery_of_two_thousand_rows(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    """Reading, ordering, keeping, telling and writing take less than 50 ms of processor time a row: 5 % of a
    second; and the same again where all rows are kept."""

    monkeypatch.setattr(row_search, "find", at_once)
    monkeypatch.setattr(row_search, "explained", lambda trial, error, seconds: error)
    monkeypatch.setattr(sweeping, "wait_for_kernels", lambda note: None)
    spent: list[float] = []
    monkeypatch.setattr(workers, "search_row", lambda asked, stop: spent_in(spent, asked, stop))
    for told in ("searched", "kept"):
        started = time.process_time()
        sweep = many(tmp_path, 20, 10)
        read = time.process_time() - started
        with Store(tmp_path / "store.sqlite") as store:
            result = run_sweep(sweep, store)
        ran = time.process_time() - started - read
        SweepFiles(tmp_path / "out").write(result)
        written = time.process_time() - started - read - ran
        each = (read + ran + written - sum(spent)) / len(sweep.rows)
        print(
            f"\n{len(sweep.rows)} rows, {told}: read {read:.1f} s, kept and told {ran - sum(spent):.1f} s, "
            f"written {written:.1f} s of processor time; {1000 * each:.1f} ms a row"
        )
        assert each < 0.05
        spent.clear()


def spent_in(spent: list[float], asked: Search, stop: Stop) -> Found:
    started = time.thread_time()
    found = search_row(asked, stop)
    spent.append(time.thread_time() - started)
    return found


def test_ten_thousand_rows_are_read_and_ordered(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    """Reading 10,000 rows and putting them in order takes less than 1 % of a second's search for each, and
    little memory."""
    before = resource.getrusage(resource.RUSAGE_SELF).ru_maxrss
    started = time.process_time()
    sweep = many(tmp_path, 25, 40)
    read = time.process_time() - started
    assert len(sweep.rows) == 10_000

    class Nobody:
        threads = 1

        def search(self, searches: list[Search]) -> Any:
            return (found for found in ())

    with Store(tmp_path / "store.sqlite") as store:
        run_sweep(sweep, store, workers=Nobody())
    ordered = time.process_time() - started - read
    grown = (resource.getrusage(resource.RUSAGE_SELF).ru_maxrss - before) / 1024
    print(f"\n10,000 rows: read {read:.1f} s, ordered {ordered:.1f} s of processor time, {grown:.0f} MB more")
    assert (read + ordered) / 10_000 < 0.01
    assert grown < 400


def test_two_machines_against_one(tmp_path: Path) -> None:
    """Two warmed workers of a scheduler search 60 trials of a second 1.6 times as fast as one process; or as
    fast, but for a tenth, as joblib alone makes the same searches there."""
    from joblib import Parallel, delayed, parallel_config

    sweep = seconds_each(tmp_path, 60)
    asked = [
        Search(row.number, row.trial, "", sweeping.limits_of(row.trial, sweeping.USUAL), None)
        for row in sweep.rows
        if row.trial is not None
    ]
    with cluster(tmp_path / "dask") as far, machines(far.address) as crew:
        crew.client.wait_for_workers(2)
        with parallel_config(backend="dask", client=crew.client):
            Parallel(batch_size=1)(delayed(search_elsewhere)(one, NOBODY) for one in asked[:4])
        times = []
        for name, who in (("here", 1), ("there", crew)):
            with Store(tmp_path / f"{name}.sqlite") as store:
                started = time.perf_counter()
                run_sweep(sweep, store, workers=who)
                times.append(time.perf_counter() - started)
        started = time.perf_counter()
        with parallel_config(backend="dask", client=crew.client):
            Parallel(batch_size=1)(delayed(search_elsewhere)(one, NOBODY) for one in asked)
        limit = times[0] / (time.perf_counter() - started)
    faster = times[0] / times[1]
    print(
        f"\n60 rows of {times[0] / 60:.2f} s: 2 workers {faster:.2f} times as fast, joblib alone {limit:.2f}"
    )
    assert faster > 1.6 or faster > 0.9 * limit
