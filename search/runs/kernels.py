"""Waiting for the compiled kernels, so that an interrupt is heard meanwhile."""

from __future__ import annotations

import threading
from collections.abc import Callable, Sequence

from search.solvers.compiled import are_cached, warm_up
from search.solvers.records import Goal

SLOW = "the search kernels are compiled once on this machine, about 20 s"


def wait_for_kernels(
    note: Callable[[str], None],
    goals: Sequence[Goal] = (Goal.SPREAD,),
    interrupted: Callable[[], bool] = bool,
) -> None:
    """Load the kernels, or compile them, in a thread of their own.

    Parameters
    ----------
    note : is told where it will take long
    goals : whose kernels are needed
    interrupted : whether somebody asked for an end

    Raises
    ------
    KeyboardInterrupt : somebody did
    """
    if not all(are_cached(goal) for goal in goals):
        note(SLOW)
    failure: list[BaseException] = []

    def load() -> None:
        try:
            for goal in goals:
                warm_up(goal)
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
