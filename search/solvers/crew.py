"""Threads that work on the runs of a round, while the caller's thread keeps watch."""

from __future__ import annotations

import threading
from collections.abc import Callable, Sequence
from concurrent.futures import Future, ThreadPoolExecutor, wait
from types import TracebackType

from search.foundation.stopping import Stop
from search.solvers.anneal import Found
from search.solvers.walk import Report

WATCH_SECONDS = 0.1

Watch = Callable[[float, int, float], None]
"""Told the best objective, the moves scored and the seconds gone."""

Job = Callable[[Report], Found]
"""A run, waiting for somebody to report moves to."""


class Crew:
    """Workers on one search; the kernels they run release Python's lock.

    Parameters
    ----------
    workers : threads
    stop : tells when the search is due to end
    watch : told how the search stands, a few times a second
    """

    def __init__(self, workers: int, stop: Stop, watch: Watch) -> None:
        self._pool = ThreadPoolExecutor(workers)
        self._stop = stop
        self._watch = watch
        self._lock = threading.Lock()
        self._moves = 0

    def __enter__(self) -> Crew:
        return self

    def __exit__(
        self, kind: type[BaseException] | None, error: BaseException | None, trace: TracebackType | None
    ) -> None:
        if error is not None:
            self._stop.interrupt()  # or the threads would work to the end of their runs
        self._pool.shutdown(cancel_futures=True)

    def work(self, jobs: Sequence[Job], best: float) -> list[Found | None]:
        """Do the jobs of a round, and wait for all of them.

        The first Ctrl-C only sets the flag of the stop, so that what was found is handed back; where
        it is set already the interrupt goes on to the caller.

        Parameters
        ----------
        jobs : runs, in the order of their numbers
        best : the best objective before the round, for the watcher

        Returns
        -------
        found : what each job came to; None for one that was not begun before the search was due to end
        """
        futures = [self._pool.submit(self._do, job) for job in jobs]
        waiting: set[Future[Found | None]] = set(futures)
        while waiting:
            try:
                done, waiting = wait(waiting, timeout=WATCH_SECONDS)
            except KeyboardInterrupt:
                if self._stop.interrupted:
                    raise
                self._stop.interrupt()
                continue
            reached = [found.objective for future in done if (found := future.result()) is not None]
            best = min([best, *reached])
            self._watch(best, self._moves, self._stop.elapsed)
        return [future.result() for future in futures]

    def _do(self, job: Job) -> Found | None:
        return None if self._stop.due else job(self._report)

    def _report(self, moves: int) -> None:
        with self._lock:
            self._moves += moves
