"""Where compiled code is kept: the user's cache folder, never beside the source."""

from __future__ import annotations

import os
import tempfile
from pathlib import Path


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


def keep_compiled() -> None:
    """Let the compiler keep what it makes in the cache folder; `NUMBA_CACHE_DIR` is honoured where set."""
    import numba

    if "NUMBA_CACHE_DIR" not in os.environ:
        numba.config.CACHE_DIR = str(cache_folder())  # type: ignore[attr-defined]  # made at run time
