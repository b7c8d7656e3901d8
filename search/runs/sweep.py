"""Many trials, one after another and side by side, each searched once and kept.

Workers hand their plans back to this process, which alone writes the store. A row that the store answers
already is taken from there, so a sweep that was cut short goes on where it stopped, and rows that are the
same problem are searched once. Rows that take little time come first.
"""

from __future__ import annotations

import time
from collections.abc import Callable, Sequence
from contextlib import closing
from dataclasses import dataclass, field, replace
from pathlib import Path
from typing import TYPE_CHECKING, Protocol

from search.efficiency.comparing import beats, merit
from search.efficiency.evaluator import score
from search.efficiency.records import Bound
from search.foundation.errors import WorkersLost
from search.foundation.stopping import Ended, Limits
from search.runs.conductor import checked
from search.runs.effort import seconds_of
from search.runs.keeping import Recalled, covers, recall, remember, run_of
from search.runs.kernels import wait_for_kernels
from search.runs.plan import Plan
from search.runs.row_search import Found, Search, impossible_alike
from search.runs.store import Store
from search.runs.sweep_file import Sweep, SweepRow
from search.runs.sweep_records import Progress, RowResult, RowStatus, WhereFrom
from search.runs.sweep_table import frame_of
from search.runs.verdicts import Verdicts, key_of
from search.runs.workers import Results, one_by_one, side_by_side
from search.solvers.records import goal_of
from search.trial.canonical import Canonical, canonical
from search.trial.carrying import from_canonical, to_canonical
from search.trial.records import Trial

if TYPE_CHECKING:
    import pandas as pd

USUAL = Limits(seconds=5.0)
"""How far a row is searched whose trial does not say."""
BARE_MAP = (
    "a sweep takes blocks as they are given, and here they are still to be cut from the map: "
    "`evenfield plan` cuts them; give the blocks of its answer"
)


@dataclass(frozen=True, slots=True)
class SweepResult:
    """A sweep and its rows in the order of the file.

    Parameters
    ----------
    sweep : the sweep
    rows : what came of each row
    interrupted : somebody ended it early, or its workers were lost
    lost : how the workers were lost, else empty
    """

    sweep: Sweep
    rows: tuple[RowResult, ...]
    interrupted: bool
    lost: str = ""

    @property
    def frame(self) -> pd.DataFrame:
        """The rows as a table; its columns are described at `sweep_table.frame_of`."""
        return frame_of(self.sweep.columns, self.rows)


class SweepObserver:
    """Watches a sweep; every method does nothing by default."""

    def note(self, text: str) -> None:
        """A stage begins, said in a short sentence."""

    def finished(self, result: RowResult, progress: Progress) -> None:
        """A row has ended."""

    def progress(self, progress: Progress) -> None:
        """The sweep goes on."""

    def so_far(self, result: Callable[[], SweepResult]) -> None:
        """A search has ended; `result()` is what the sweep has come to."""


class Workers(Protocol):
    """Something that searches rows: `machines.Machines`, or processes on this machine."""

    @property
    def threads(self) -> int:
        """Rows that are searched at a time."""

    def search(self, searches: Sequence[Search]) -> Results:
        """Results of the searches as they end, in any order."""


@dataclass(frozen=True, slots=True)
class Processes:
    """Workers on this machine: this process where there is one, else as many of their own."""

    threads: int

    def search(self, searches: Sequence[Search]) -> Results:
        """Results of the searches as they end."""
        return one_by_one(searches) if self.threads == 1 else side_by_side(searches, self.threads)


def run_sweep(
    sweep: Sweep,
    store: Store,
    *,
    workers: int | Workers = 1,
    usual: Limits = USUAL,
    fresh: bool = False,
    verdicts: Path | None = None,
    observer: SweepObserver | None = None,
) -> SweepResult:
    """Plan every row of a sweep.

    An interrupt ends the sweep early; what had finished is kept and told.

    Parameters
    ----------
    sweep : the rows
    store : kept results; new ones are written to it
    workers : rows searched at a time on this machine, or workers elsewhere
    usual : how far to search where a trial does not say
    fresh : search every row anew, from no kept plan; the better of old and new is told and stays kept
    verdicts : file in which rows without a plan are written down, so that they are not asked again
    observer : is told of every row

    Raises
    ------
    BadInput : the store or the file of verdicts cannot be read or written
    """
    crew = Processes(workers) if isinstance(workers, int) else workers
    known = Verdicts(verdicts)
    return _Sweeping(sweep, store, crew, usual, fresh, known, observer or SweepObserver()).run()


def limits_of(trial: Trial, usual: Limits) -> Limits:
    """The limits that a trial states, or the usual ones."""
    own = Limits(trial.search.seconds, trial.search.moves)
    return usual if own == Limits() else own


def kept_plan(store: Store, trial: Trial, numbering: Canonical, limits: Limits) -> Plan | None:
    """The kept plan of a trial that was searched at least as far as the limits say, else None."""
    runs = store.runs(numbering.digest, trial.aim.kind.value)
    run = next((run for run in runs if covers(run, limits)), None)
    if run is None:
        return None
    return _as_plan(trial, numbering, recall(store, trial, numbering), Ended(run.ended_by))


def _as_plan(trial: Trial, numbering: Canonical, kept: Recalled, ended: Ended) -> Plan | None:
    if kept.plan is None or kept.contents is None:
        return None
    return Plan(
        trial=trial,
        contents=kept.contents,
        score=score(trial, kept.contents),
        bound=kept.bound,
        ended_by=ended,
        seed=kept.plan.seed,
        moves=kept.plan.moves,
        seconds=kept.plan.seconds,
        start=kept.plan.start,
        digest=numbering.digest,
    )


def _with_known(plan: Plan, task: _Task) -> Plan:
    """The plan, or a better one that was kept when the sweep began; with the tighter of the two bounds.

    What other rows found meanwhile has no say: a row must not depend on the order in which they end.
    """
    kept, aim = task.known, plan.trial.aim.kind
    own = merit(aim, plan.score.aim, plan.score.aim_variance)
    if kept.plan is not None and beats(kept.plan.merit(aim), own):
        better = _as_plan(plan.trial, task.numbering, replace(kept, bound=plan.bound), plan.ended_by)
        plan = better or plan
    bound = kept.bound
    # The store is not trusted so far as to deny a plan that is there.
    if bound is None or plan.is_better_than(bound):
        return checked(plan)
    if bound.beats(plan.bound):
        plan = replace(plan, bound=bound)
    return checked(plan)


def _carried(plan: Plan, numbering: Canonical, trial: Trial) -> Plan:
    """The plan of a trial as a plan of another one that is the same problem."""
    there, here = to_canonical(numbering), from_canonical(canonical(trial))
    contents = here.contents(there.contents(plan.contents))

    def carried(bound: Bound | None) -> Bound | None:
        if bound is None:
            return None
        certificate = here.certificate(there.certificate(bound.certificate))
        return replace(bound, certificate=certificate, otherwise=carried(bound.otherwise))

    bound = carried(plan.bound)
    return replace(plan, trial=trial, contents=contents, score=score(trial, contents), bound=bound)


@dataclass(frozen=True, slots=True)
class _Task:
    """One search, the rows that it answers, what is kept of them, and how long it may take."""

    rows: list[SweepRow]
    search: Search
    numbering: Canonical
    known: Recalled
    verdict_key: str
    seconds: float


@dataclass(slots=True)
class _Sweeping:
    """The state of a sweep between its rows."""

    sweep: Sweep
    store: Store
    workers: Workers
    usual: Limits
    fresh: bool
    verdicts: Verdicts
    observer: SweepObserver
    results: dict[int, RowResult] = field(default_factory=dict)
    kept: int = 0
    failed: int = 0
    best_gap: float | None = None
    waiting: int = 0
    seconds_waiting: float = 0.0
    seconds_searched: float = 0.0
    """Both as estimated before."""
    started: float = 0.0

    def run(self) -> SweepResult:
        interrupted, lost = False, ""
        try:
            tasks = self.tasks()
            self.waiting = len(tasks)
            self.seconds_waiting = sum(task.seconds for task in tasks)
            if tasks:
                self.search(tasks)
        except KeyboardInterrupt:
            interrupted = True
        except WorkersLost as error:
            interrupted, lost = True, str(error)
        return self.so_far(interrupted, lost)

    def so_far(self, interrupted: bool = True, lost: str = "") -> SweepResult:
        """What the sweep has come to."""
        rows = tuple(self.results.get(row.number, RowResult(row, RowStatus.OPEN)) for row in self.sweep.rows)
        return SweepResult(self.sweep, rows, interrupted, lost)

    def tasks(self) -> list[_Task]:
        """The searches to make, quick ones first, after rows that are known already have ended."""
        tasks: dict[tuple[object, ...], _Task] = {}
        for row in self.sweep.rows:
            trial = row.trial
            if trial is None or trial.wanted is not None:
                reason = "; ".join(" ".join(str(fault).split()) for fault in row.faults) or BARE_MAP
                self.end(RowResult(row, RowStatus.FAULTY, reason=reason))
                continue
            limits = limits_of(trial, self.usual)
            numbering, verdict_key = canonical(trial), key_of(trial, limits)
            if not self.fresh and self.is_known(row, trial, numbering, limits, verdict_key):
                continue
            key = numbering.digest, trial.aim.kind, limits, trial.search.seed
            if key in tasks:
                tasks[key].rows.append(row)
                continue
            known = recall(self.store, trial, numbering)
            start = None if self.fresh else known.contents
            search = Search(row.number, trial, numbering.digest, limits, start, known.shipped)
            tasks[key] = _Task([row], search, numbering, known, verdict_key, seconds_of(trial, limits))
        return sorted(tasks.values(), key=lambda task: task.seconds)

    def is_known(
        self, row: SweepRow, trial: Trial, numbering: Canonical, limits: Limits, verdict_key: str
    ) -> bool:
        """End a row whose plan is kept, or of which it is written down that it has none."""
        kept = kept_plan(self.store, trial, numbering, limits)
        if kept is not None:
            self.end(RowResult(row, RowStatus.PLANNED, kept, WhereFrom.KEPT))
            return True
        verdict = self.verdicts.get(verdict_key)
        if verdict is not None:
            reason, clashes = verdict.reason, verdict.clashes
            self.end(RowResult(row, verdict.status, None, WhereFrom.KEPT, reason, clashes))
        return verdict is not None

    def search(self, tasks: list[_Task]) -> None:
        """Make the searches, and take each as it ends."""
        if isinstance(self.workers, Processes):
            # Here, once: children that start cold would each compile for themselves.
            goals = {goal_of(task.search.trial.aim.kind) for task in tasks}
            wait_for_kernels(self.observer.note, sorted(goals))
        self.started = time.monotonic()
        self.observer.progress(self.progress())
        by_number = {task.search.number: task for task in tasks}
        with closing(self.workers.search([task.search for task in tasks])) as all_found:
            for found in all_found:
                self.take(by_number[found.number], found)
                self.observer.so_far(self.so_far)

    def take(self, task: _Task, found: Found) -> None:
        """Keep what a search found, and end the rows that it answers.

        Raises
        ------
        KeyboardInterrupt : the search was interrupted; what it had found is kept
        """
        self.waiting -= 1
        self.seconds_waiting -= task.seconds
        self.seconds_searched += task.seconds
        plan = found.plan
        if plan is None:
            self.verdicts.add(task.verdict_key, found)
        else:
            remember(self.store, task.numbering, plan, run_of(plan, task.search.limits, 1))
            try:
                plan = _with_known(plan, task)
            except RuntimeError as error:  # a mistake of ours in one row must not lose the others
                found = Found(found.number, RowStatus.FAILED, reason=f"internal error: {error}")
                plan = None
        row, *others = task.rows
        where_from = None if plan is None else WhereFrom.SEARCHED
        first = RowResult(row, found.status, plan, where_from, found.reason, found.clashes)
        self.end(first)
        if found.status is RowStatus.OPEN:
            raise KeyboardInterrupt
        for row in others:
            self.end(self.answered_alike(row, task, first))

    def answered_alike(self, row: SweepRow, task: _Task, first: RowResult) -> RowResult:
        """The result of a row whose problem another row has searched."""
        trial = row.trial
        if trial is None or first.status not in (RowStatus.PLANNED, RowStatus.IMPOSSIBLE):
            return replace(first, row=row)
        if first.plan is not None:
            plan = _carried(first.plan, task.numbering, trial)
            return RowResult(row, RowStatus.PLANNED, plan, WhereFrom.KEPT)
        found = impossible_alike(row.number, trial, first.row.number)
        self.verdicts.add(key_of(trial, task.search.limits), found)
        return RowResult(row, found.status, None, None, found.reason, found.clashes)

    def end(self, result: RowResult) -> None:
        """Note the result of a row, and tell it."""
        self.results[result.row.number] = result
        self.kept += result.where_from is WhereFrom.KEPT
        self.failed += result.plan is None
        gap = None if result.plan is None else result.plan.gap_percent
        if gap is not None and (self.best_gap is None or gap < self.best_gap):
            self.best_gap = gap
        self.observer.finished(result, self.progress())

    def progress(self) -> Progress:
        """Where the sweep stands now."""
        left = None
        if self.seconds_searched > 0:
            # Estimates are wrong by a factor that is much the same for all rows: it cancels here.
            spent = time.monotonic() - self.started
            left = spent / self.seconds_searched * self.seconds_waiting if self.waiting else 0.0
        return Progress(
            rows=len(self.sweep.rows),
            done=len(self.results),
            kept=self.kept,
            failed=self.failed,
            running=min(self.workers.threads, self.waiting),
            best_gap_percent=self.best_gap,
            seconds_left=left,
        )
