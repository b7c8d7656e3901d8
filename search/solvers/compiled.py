"""The compiled kernels, loaded or compiled where they are first used."""

from __future__ import annotations

import os
import sys
from contextlib import suppress
from functools import cache
from pathlib import Path
from types import ModuleType

from search.foundation.compiling import cache_folder, keep_compiled
from search.solvers.records import Goal

ENTRIES = ("wander", "make_move", "anneal", "best_move", "cross", "mend")
"""The functions of the kernel that are compiled and kept."""
MORE_ENTRIES = {
    Goal.SPREAD: (),
    Goal.MEETINGS: ("anneal_meetings", "anneal_ties", "best_even_move", "make_even_move"),
    Goal.WORST: ("list_worst", "anneal_worst", "best_worst_move"),
}
"""Those that only one goal needs."""


def are_cached(goal: Goal = Goal.SPREAD) -> bool:
    """Whether the kernel of this version was compiled before on this machine, as far as can be seen."""
    folder = Path(os.environ.get("NUMBA_CACHE_DIR") or cache_folder())
    written = Path(__file__).with_name("kernel.py").stat().st_mtime
    python = f"py{sys.version_info.major}{sys.version_info.minor}"
    return all(
        any(index.stat().st_mtime >= written for index in folder.glob(f"**/kernel.{entry}-*.{python}*.nbi"))
        for entry in (*ENTRIES, *MORE_ENTRIES[goal])
    )


def warm_up(goal: Goal = Goal.SPREAD) -> None:
    """Load the compiled kernels, or compile them; where none is kept this takes about 10 seconds."""
    module = kernel()
    for entry in MORE_ENTRIES[goal]:
        getattr(module, entry).warm_up()
    stats = getattr(module.anneal, "stats", None)  # none where nothing is compiled
    if stats is None or are_cached(goal):
        return
    # The compiler knows its source by content, and this one was written anew with the same: so it was kept.
    for entry in (*ENTRIES, *MORE_ENTRIES[goal]):
        for index in Path(stats.cache_path).glob(f"kernel.{entry}-*.nbi"):
            with suppress(OSError):
                os.utime(index)


@cache
def kernel() -> ModuleType:
    """The module of compiled functions; the first call loads or compiles it.

    `NUMBA_CACHE_DIR` is honoured where it is set.
    """
    keep_compiled()
    from search.solvers import kernel as module

    return module
