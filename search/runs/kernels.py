"""Waiting for the compiled kernels, so that an interrupt is heard meanwhile."""

from __future__ import annotations

import threading
from collections.abc import Callable

from search.solvers.compiled import are_cached, warm_up

SLOW = "the search kernels are compiled once on this machine, about 20 s"


def wait_for_kernels(note: Callable[[str], None], interrupted: Callable[[], bool] = bool) -> None:
    """Load the kernels, or compile them, in a thread of their own.

    Parameters
    ----------
    note : is told where it will take long
    interrupted : whether somebody asked for an end

    Raises
    ------
    KeyboardInterrupt : somebody did
    """
    if not are_cached():
        note(SLOW)
    failure: list[BaseException] = []

    def load() -> None:
        try:
            warm_up()
        except BaseException as error:
            failure.append(error)

    thread = threading.Thread(target=load, daemon=True)
    thread.start()
    while thread.is_alive():
        thread.join(0.02)
        if interrupted():
            raise KeyboardInterrupt
    if failure:
        raise failure[0]
