"""Searches of many rows, by this process or by several on this machine; each is handed back as it ends."""

from __future__ import annotations

import os
import signal
import threading
from collections.abc import Callable, Generator, Sequence
from contextlib import closing

from search.foundation.stopping import Stop
from search.runs.row_search import Found, Search, search_row
from search.runs.sweep_records import RowStatus

MOST_DEATHS = 3
"""Workers that may die, with no row ended between, before the rows that they had are given up."""
KILLED = f"the process that searched it was killed {MOST_DEATHS} times; has it too little memory?"

Results = Generator[Found, None, None]


def one_by_one(searches: Sequence[Search]) -> Results:
    """Searches in this process."""
    for asked in searches:
        yield _search_here(asked)


def _search_here(asked: Search) -> Found:
    """Search in a thread, so that an interrupt is heard here, and ends it with its best so far."""
    stop, done = Stop(asked.limits), threading.Event()
    found: list[Found] = []

    def work() -> None:
        found.append(search_row(asked, stop))
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


def side_by_side(searches: Sequence[Search], workers: int) -> Results:
    """Searches in processes; the caller's joblib context may choose other workers."""
    from joblib.externals.loky.process_executor import BrokenProcessPool

    return patiently(searches, lambda rest: _in_processes(rest, workers), BrokenProcessPool, workers)


def _in_processes(searches: Sequence[Search], workers: int) -> Results:
    from joblib import Parallel, delayed

    # Rows are long against a message to a worker: one at a time, so that an end loses few.
    parallel = Parallel(n_jobs=workers, return_as="generator_unordered", pre_dispatch=workers, batch_size=1)
    home = os.getpid()
    found: Results = parallel(delayed(search_elsewhere)(asked, home) for asked in searches)
    return found


def search_elsewhere(asked: Search, home: int) -> Found:
    """Search one row for another process.

    Parameters
    ----------
    asked : the row
    home : number of the process that asks
    """
    # Ctrl-C reaches every process of a terminal: the one at home decides what to do.
    if os.getpid() != home and threading.current_thread() is threading.main_thread():
        signal.signal(signal.SIGINT, signal.SIG_IGN)
    return search_row(asked, Stop(asked.limits))


def patiently(
    searches: Sequence[Search],
    make: Callable[[Sequence[Search]], Results],
    death: type[BaseException],
    workers: int,
) -> Results:
    """Searches by workers that may be killed: what a dead one had is searched again.

    Parameters
    ----------
    searches : what to search; earlier ones are begun earlier
    make : starts workers on searches
    death : is raised when a worker has died
    workers : searched at a time
    """
    left, deaths = {asked.number: asked for asked in searches}, 0
    while left:
        try:
            with closing(make(list(left.values()))) as all_found:
                for found in all_found:
                    del left[found.number]
                    deaths = 0
                    yield found
        except death:
            deaths += 1
            if deaths < MOST_DEATHS:
                continue
            deaths = 0
            for number in list(left)[:workers]:
                del left[number]
                yield Found(number, RowStatus.FAILED, reason=KILLED)
