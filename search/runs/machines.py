"""Searches of many rows on other machines: the workers of a dask scheduler, fed by joblib.

One parallel call sends every row and none is made within it: joblib on dask loses tasks of nested calls.
A worker that is killed costs no row, for the scheduler gives what it had to another. The scheduler itself is
watched from here, since joblib would wait for it without end.
"""

from __future__ import annotations

import threading
import time
from collections.abc import Generator, Sequence
from contextlib import contextmanager, suppress
from queue import Empty, Queue
from typing import TYPE_CHECKING, Any

from search.foundation.errors import BadInput, WorkersLost
from search.foundation.versions import versions
from search.runs.row_search import Found, Search
from search.runs.workers import Results, patiently, search_elsewhere

if TYPE_CHECKING:
    from distributed import Client

CONNECT_SECONDS = 5.0
WAIT_SECONDS = 30.0
"""Wall time in which a scheduler must have its first worker."""
LOOK_SECONDS, COUNT_SECONDS = 0.2, 2.0
NOBODY = -1
"""Number of no process: workers of another machine may bear the number of this one."""
MISSING = (
    "dask is not installed, which --dask needs: pip install 'evenfield[dask]', here and where the workers run"
)


class Machines:
    """The workers of a scheduler.

    Parameters
    ----------
    address : of the scheduler, such as `tcp://192.168.1.4:8786`
    client : connected to it
    """

    def __init__(self, address: str, client: Client) -> None:
        self.address = address
        self.client = client
        self._threads = 1
        self._asked = -COUNT_SECONDS

    @property
    def threads(self) -> int:
        """Rows that are searched at a time, as of a moment ago: workers come and go."""
        if self.client.status == "running" and time.monotonic() - self._asked > COUNT_SECONDS:
            self._asked = time.monotonic()
            with suppress(OSError, TimeoutError):
                self._threads = sum(self.client.ncores().values())
        return self._threads

    def search(self, searches: Sequence[Search]) -> Results:
        """Searches on all workers, those included that come later.

        Raises
        ------
        WorkersLost : the scheduler answers no more
        """
        from distributed import KilledWorker

        return patiently(searches, self._send, KilledWorker, self.threads)

    def _send(self, searches: Sequence[Search]) -> Results:
        arrived: Queue[Found | BaseException | None] = Queue()
        threading.Thread(target=self._fetch, args=(searches, arrived), daemon=True).start()
        while True:
            try:
                found = arrived.get(timeout=LOOK_SECONDS)
            except Empty:
                self._look()
                continue
            if found is None:
                return
            if isinstance(found, BaseException):
                self._look()
                raise found
            yield found

    def _fetch(self, searches: Sequence[Search], arrived: Queue[Found | BaseException | None]) -> None:
        """Hand on what joblib hands back; in a thread, since joblib waits without looking up."""
        from joblib import Parallel, delayed, parallel_config

        try:
            with parallel_config(backend="dask", client=self.client):
                parallel = Parallel(
                    n_jobs=-1, return_as="generator_unordered", pre_dispatch="all", batch_size=1
                )
                for found in parallel(delayed(search_elsewhere)(asked, NOBODY) for asked in searches):
                    arrived.put(found)
            arrived.put(None)
        except BaseException as error:
            arrived.put(error)

    def _look(self) -> None:
        # A client that has to connect again has lost what it was waiting for.
        if self.client.status != "running":
            raise WorkersLost(f"the dask scheduler at {self.address} answers no more")


@contextmanager
def machines(address: str) -> Generator[Machines, None, None]:
    """Workers of a scheduler, found ready: this program is there, its kernels are compiled.

    Parameters
    ----------
    address : of the scheduler

    Raises
    ------
    BadInput : dask is not installed, nothing answers, there is no worker, or they cannot search
    """
    client = _connected(address)
    try:
        _check_workers(client, address)
        yield Machines(address, client)
    finally:
        client.close(timeout=1)


def _connected(address: str) -> Client:
    try:
        from distributed import Client
    except ImportError:
        raise BadInput(MISSING) from None
    try:
        return Client(address, timeout=CONNECT_SECONDS, set_as_default=False)
    except (OSError, ValueError, TypeError) as error:
        told = " ".join(str(error).split()) or type(error).__name__
        raise BadInput(
            f"no dask scheduler answers at {address} within {CONNECT_SECONDS:g} s ({told}); start one with "
            "`dask scheduler`, and give the address that it prints, such as tcp://192.168.1.4:8786"
        ) from None


def _check_workers(client: Client, address: str) -> None:
    try:
        client.wait_for_workers(1, timeout=WAIT_SECONDS)
    except TimeoutError:
        raise BadInput(
            f"the dask scheduler at {address} has no worker; start some with `dask worker {address}`"
        ) from None
    here = versions()
    for worker, found in client.run(_ready, on_error="return").items():
        if isinstance(found, BaseException):
            told = f"cannot run this program ({type(found).__name__}: {found})"
        elif found.get("evenfield") != here.get("evenfield"):
            told = f"has version {found.get('evenfield')} of evenfield, and here is {here.get('evenfield')}"
        else:
            continue
        raise BadInput(f"the dask worker {worker} {told}; install the same evenfield there and start it anew")


def _ready() -> dict[str, Any]:
    """Done on every worker before the first row: load the kernels, or compile them; tell the versions."""
    from search.solvers.compiled import warm_up

    warm_up()
    return versions()
