"""Where compiled kernels are kept: the user's cache folder, never beside the source."""

from __future__ import annotations

import os
import sys
import tempfile
from functools import cache
from pathlib import Path
from types import ModuleType

ENTRIES = ("wander", "make_move", "anneal", "best_move", "cross", "mend")
"""The functions of the kernel that are compiled and kept."""


def cache_folder() -> Path:
    """A folder for compiled code that can be written to.

    Returns
    -------
    folder : `evenfield` in `XDG_CACHE_HOME` or `~/.cache`; where neither can be written to, a folder
        of this user's in the system's place for temporary files
    """
    base = os.environ.get("XDG_CACHE_HOME") or os.path.join(os.path.expanduser("~"), ".cache")
    folder = Path(base) / "evenfield"
    return folder if _writable(folder) else Path(tempfile.gettempdir()) / f"evenfield-{os.getuid()}"


def _writable(folder: Path) -> bool:
    try:
        folder.mkdir(parents=True, exist_ok=True)
        with tempfile.TemporaryFile(dir=folder):
            return True
    except OSError:
        return False


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
    import numba

    if "NUMBA_CACHE_DIR" not in os.environ:
        numba.config.CACHE_DIR = str(cache_folder())  # type: ignore[attr-defined]  # made at run time
    from search.solvers import kernel as module

    return module
