"""Many trials, one after another and side by side, each searched once and kept.

Rows run in processes of one worker each; they hand their plans back to this process, which alone writes
the store. A row that the store answers already is taken from there, so a sweep that was cut short goes
on where it stopped, and rows that are the same problem are searched once.
"""

from __future__ import annotations

import os
import signal
import threading
import time
from collections.abc import Generator
from contextlib import closing
from dataclasses import dataclass, field
from enum import StrEnum

from search.efficiency.evaluator import score
from search.foundation.errors import Impossible, Undecided
from search.foundation.stopping import Ended, Limits, Stop
from search.runs.conductor import find
from search.runs.keeping import covers, recall, remember, run_of
from search.runs.plan import Plan
from search.runs.store import Store
from search.runs.sweep_file import Sweep, SweepRow
from search.solvers.records import Goal, goal_of
from search.trial.canonical import Canonical, canonical
from search.trial.records import Contents, Trial

USUAL = Limits(seconds=5.0)
"""How far a row is searched whose trial does not say."""


class RowStatus(StrEnum):
    """How a row ended."""

    PLANNED = "planned"
    FAULTY = "faulty"
    IMPOSSIBLE = "impossible"
    UNDECIDED = "undecided"
    FAILED = "failed"
    OPEN = "not finished"


class WhereFrom(StrEnum):
    """Where the plan of a row comes from."""

    SEARCHED = "searched"
    KEPT = "kept"


@dataclass(frozen=True, slots=True)
class RowResult:
    """A row and what came of it.

    Parameters
    ----------
    row : the row
    status : how it ended
    plan : its plan, where there is one
    where_from : searched now, or kept from an earlier search
    reason : why there is no plan
    """

    row: SweepRow
    status: RowStatus
    plan: Plan | None = None
    where_from: WhereFrom | None = None
    reason: str = ""


@dataclass(frozen=True, slots=True)
class SweepResult:
    """A sweep and its rows in the order of the file; `interrupted` where some did not finish."""

    sweep: Sweep
    rows: tuple[RowResult, ...]
    interrupted: bool


@dataclass(frozen=True, slots=True)
class Progress:
    """Where a sweep stands.

    Parameters
    ----------
    rows : in all
    done : ended, in whatever way
    kept : of these, taken from the store
    failed : of these, without a plan
    running : being searched
    best_gap_percent : least gap of the plans so far
    seconds_left : estimate, from the second search on
    """

    rows: int
    done: int
    kept: int
    failed: int
    running: int
    best_gap_percent: float | None
    seconds_left: float | None


class SweepObserver:
    """Watches a sweep; every method does nothing by default."""

    def note(self, text: str) -> None:
        """A stage begins, said in a short sentence."""

    def finished(self, result: RowResult, progress: Progress) -> None:
        """A row has ended."""

    def progress(self, progress: Progress) -> None:
        """The sweep goes on."""


def run_sweep(
    sweep: Sweep,
    store: Store,
    *,
    workers: int = 1,
    usual: Limits = USUAL,
    observer: SweepObserver | None = None,
) -> SweepResult:
    """Plan every row of a sweep.

    An interrupt ends the sweep early; what had finished is kept and told.

    Parameters
    ----------
    sweep : the rows
    store : kept results; new ones are written to it
    workers : rows searched at a time
    usual : how far to search where a trial does not say
    observer : is told of every row

    Raises
    ------
    BadInput : the store cannot be read or written
    """
    return _Sweeping(sweep, store, workers, usual, observer or SweepObserver()).run()


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
    kept = recall(store, trial, numbering)
    if kept.plan is None or kept.contents is None:
        return None
    return Plan(
        trial=trial,
        contents=kept.contents,
        score=score(trial, kept.contents),
        bound=kept.bound,
        ended_by=Ended(run.ended_by),
        seed=kept.plan.seed,
        moves=kept.plan.moves,
        seconds=kept.plan.seconds,
        start=kept.plan.start,
        digest=numbering.digest,
    )


@dataclass(frozen=True, slots=True)
class _Task:
    """One search, and the rows that it answers."""

    rows: list[SweepRow]
    trial: Trial
    numbering: Canonical
    limits: Limits
    kept: Contents | None


@dataclass(frozen=True, slots=True)
class _Found:
    """What the search of a row came to."""

    number: int
    status: RowStatus
    plan: Plan | None = None
    reason: str = ""


@dataclass(slots=True)
class _Sweeping:
    """The state of a sweep between its rows."""

    sweep: Sweep
    store: Store
    workers: int
    usual: Limits
    observer: SweepObserver
    results: dict[int, RowResult] = field(default_factory=dict)
    kept: int = 0
    failed: int = 0
    best_gap: float | None = None
    waiting: int = 0
    searched: int = 0
    started: float = 0.0

    def run(self) -> SweepResult:
        interrupted = False
        try:
            tasks = self.tasks()
            self.waiting = len(tasks)
            if tasks:
                self.search(tasks)
        except KeyboardInterrupt:
            interrupted = True
        rows = tuple(self.results.get(row.number, RowResult(row, RowStatus.OPEN)) for row in self.sweep.rows)
        return SweepResult(self.sweep, rows, interrupted)

    def tasks(self) -> list[_Task]:
        """The searches to make, after faulty rows and rows that the store answers have ended."""
        tasks: dict[tuple[object, ...], _Task] = {}
        for row in self.sweep.rows:
            trial = row.trial
            if trial is None:
                reason = "; ".join(" ".join(str(fault).split()) for fault in row.faults)
                self.end(RowResult(row, RowStatus.FAULTY, reason=reason))
                continue
            numbering, limits = canonical(trial), limits_of(trial, self.usual)
            kept = kept_plan(self.store, trial, numbering, limits)
            key = numbering.digest, trial.aim.kind, limits, trial.search.seed
            if kept is not None:
                self.end(RowResult(row, RowStatus.PLANNED, kept, WhereFrom.KEPT))
            elif key in tasks:
                tasks[key].rows.append(row)
            else:
                start = recall(self.store, trial, numbering).contents
                tasks[key] = _Task([row], trial, numbering, limits, start)
        return list(tasks.values())

    def search(self, tasks: list[_Task]) -> None:
        """Make the searches, `workers` of them at a time, and take each as it ends."""
        self.make_kernels_ready({goal_of(task.trial.aim.kind) for task in tasks})
        self.started = time.monotonic()
        self.observer.progress(self.progress())
        by_number = {task.rows[0].number: task for task in tasks}
        with closing(
            _one_by_one(tasks) if self.workers == 1 else _side_by_side(tasks, self.workers)
        ) as all_found:
            for found in all_found:
                self.take(by_number[found.number], found)

    def make_kernels_ready(self, goals: set[Goal]) -> None:
        """Compile once, here: children that start cold would each compile for themselves."""
        from search.solvers.compiled import are_cached, warm_up

        if not all(are_cached(goal) for goal in goals):
            self.observer.note("the search kernels are compiled once on this machine, about 20 s")
        for goal in sorted(goals):
            warm_up(goal)

    def take(self, task: _Task, found: _Found) -> None:
        """Keep what a search found, and end the rows that it answers.

        Raises
        ------
        KeyboardInterrupt : the search was interrupted; what it had found is kept
        """
        self.waiting -= 1
        self.searched += 1
        if found.plan is not None:
            remember(self.store, task.numbering, found.plan, run_of(found.plan, task.limits, 1))
        first, *others = task.rows
        where_from = WhereFrom.SEARCHED if found.plan is not None else None
        self.end(RowResult(first, found.status, found.plan, where_from, found.reason))
        if found.status is RowStatus.OPEN:
            raise KeyboardInterrupt
        for row in others:
            self.end(self.answered_alike(row, found, task.limits))

    def answered_alike(self, row: SweepRow, found: _Found, limits: Limits) -> RowResult:
        """The result of a row whose problem another row has searched."""
        if row.trial is None or found.plan is None:
            return RowResult(row, found.status, reason=found.reason)
        plan = kept_plan(self.store, row.trial, canonical(row.trial), limits)
        return RowResult(row, RowStatus.PLANNED, plan, WhereFrom.KEPT)

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
        if self.searched:
            left = (time.monotonic() - self.started) / self.searched * self.waiting
        return Progress(
            rows=len(self.sweep.rows),
            done=len(self.results),
            kept=self.kept,
            failed=self.failed,
            running=min(self.workers, self.waiting),
            best_gap_percent=self.best_gap,
            seconds_left=left,
        )


def _side_by_side(tasks: list[_Task], workers: int) -> Generator[_Found, None, None]:
    """Searches in processes, as they end; the caller's joblib context may choose other workers."""
    from joblib import Parallel, delayed

    parallel = Parallel(n_jobs=workers, return_as="generator_unordered", pre_dispatch=workers)
    home = os.getpid()
    found: Generator[_Found, None, None] = parallel(delayed(_search_elsewhere)(task, home) for task in tasks)
    return found


def _search_elsewhere(task: _Task, home: int) -> _Found:
    # Ctrl-C reaches every process of a terminal: the one at home decides what to do.
    if os.getpid() != home and threading.current_thread() is threading.main_thread():
        signal.signal(signal.SIGINT, signal.SIG_IGN)
    return _search(task, Stop(task.limits))


def _one_by_one(tasks: list[_Task]) -> Generator[_Found, None, None]:
    """Searches in this process, as they end."""
    for task in tasks:
        yield _search_here(task)


def _search_here(task: _Task) -> _Found:
    """Search in a thread, so that an interrupt is heard here, and ends it with its best so far."""
    stop, done = Stop(task.limits), threading.Event()
    found: list[_Found] = []

    def work() -> None:
        found.append(_search(task, stop))
        done.set()

    threading.Thread(target=work, daemon=True).start()
    while not done.is_set():
        try:
            while not done.wait(0.1):
                pass
        except KeyboardInterrupt:
            if stop.interrupted:
                raise
            stop.interrupt()
    return found[0]


def _search(task: _Task, stop: Stop) -> _Found:
    """Search one row; whatever goes wrong is the row's own."""
    number = task.rows[0].number
    try:
        plan = find(
            task.trial,
            limits=task.limits,
            seed=task.trial.search.seed,
            workers=1,
            digest=task.numbering.digest,
            kept=task.kept,
            stop=stop,
        )
    except Impossible as error:
        return _Found(number, RowStatus.IMPOSSIBLE, reason="; ".join(error.causes))
    except Undecided as error:
        return _Found(number, RowStatus.OPEN if stop.interrupted else RowStatus.UNDECIDED, reason=str(error))
    except KeyboardInterrupt:
        return _Found(number, RowStatus.OPEN, reason="interrupted")
    except Exception as error:
        return _Found(number, RowStatus.FAILED, reason=f"internal error: {type(error).__name__}: {error}")
    interrupted = plan.ended_by is Ended.INTERRUPTED
    return _Found(number, RowStatus.OPEN if interrupted else RowStatus.PLANNED, plan)
