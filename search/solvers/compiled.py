"""The compiled kernels, loaded or compiled where they are first used."""

from __future__ import annotations

import os
import sys
from functools import cache
from pathlib import Path
from types import ModuleType

from search.foundation.compiling import cache_folder, keep_compiled

ENTRIES = ("wander", "make_move", "anneal", "best_move")
"""The functions of the kernel that are compiled and kept."""


def are_cached() -> bool:
    """Whether the kernel of this version was compiled before on this machine, as far as can be seen."""
    folder = Path(os.environ.get("NUMBA_CACHE_DIR") or cache_folder())
    written = Path(__file__).with_name("kernel.py").stat().st_mtime
    python = f"py{sys.version_info.major}{sys.version_info.minor}"
    return all(
        any(index.stat().st_mtime >= written for index in folder.glob(f"**/kernel.{entry}-*.{python}*.nbi"))
        for entry in ENTRIES
    )


def warm_up() -> None:
    """Load the compiled kernels, or compile them; where none is kept this takes about 10 seconds."""
    kernel()


@cache
def kernel() -> ModuleType:
    """The module of compiled functions; the first call loads or compiles it.

    `NUMBA_CACHE_DIR` is honoured where it is set.
    """
    keep_compiled()
    from search.solvers import kernel as module

    return module
