"""Threads that work on the runs of a round, while the caller's thread keeps watch."""

from __future__ import annotations

import math
import threading
from collections.abc import Callable, Iterator, Sequence
from concurrent.futures import Future, ThreadPoolExecutor, wait
from types import TracebackType
from typing import TypeVar

from search.foundation.stopping import Stop
from search.solvers.anneal import Found
from search.solvers.walk import Report

WATCH_SECONDS = 0.1

Watch = Callable[[float, int, float], None]
"""Told the best objective, the moves scored and the seconds gone."""

Job = Callable[[Report], Found]
"""A run, waiting for somebody to report moves to."""

T = TypeVar("T")


class Crew:
    """Workers on one search; the kernel releases Python's lock, so that they work at the same time.

    The caller's thread only waits, since Ctrl-C is heard there and must not fall into the kernel. The
    first one sets the flag of the stop, so that work ends soon and what was found is handed back; where
    the flag is set already, the interrupt goes on to the caller.

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

    def one(self, task: Callable[[], T]) -> T:
        """What a single task comes to."""
        future = self._pool.submit(task)
        for _ in self._finished({future}):
            pass
        return future.result()

    def round(self, jobs: Sequence[Job], best: float) -> list[Found | None]:
        """Do the jobs of a round, and wait for all of them.

        Parameters
        ----------
        jobs : runs, in the order of their numbers
        best : the best objective before the round, for the watcher

        Returns
        -------
        found : what each job came to; None for one that was not begun before the search was due to end
        """
        futures = [self._pool.submit(self._do, job) for job in jobs]
        for done in self._finished(set(futures)):
            best = min(best, *(_objective(future) for future in done), math.inf)
            self._watch(best, self._moves, self._stop.elapsed)
        return [future.result() for future in futures]

    def _finished(self, waiting: set[Future[T]]) -> Iterator[set[Future[T]]]:
        """What was finished since the last look, a few times a second, until nothing is left."""
        while waiting:
            try:
                done, waiting = wait(waiting, timeout=WATCH_SECONDS)
            except KeyboardInterrupt:
                if self._stop.interrupted:
                    raise
                self._stop.interrupt()
            else:
                yield done

    def _do(self, job: Job) -> Found | None:
        return None if self._stop.due else job(self._report)

    def _report(self, moves: int) -> None:
        with self._lock:
            self._moves += moves


def _objective(future: Future[Found | None]) -> float:
    found = future.result()
    return math.inf if found is None else found.objective
