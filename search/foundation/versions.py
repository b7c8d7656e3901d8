"""Which versions of program and libraries made a result."""

from __future__ import annotations

import platform
from importlib.metadata import PackageNotFoundError, version

LIBRARIES = ("evenfield", "numpy", "scipy", "numba", "ortools")


def versions() -> dict[str, str]:
    """Versions of everything that may change the bits of a plan."""
    found = {"python": platform.python_version()}
    for library in LIBRARIES:
        try:
            found[library] = version(library)
        except PackageNotFoundError:  # run from a checkout that was never installed
            continue
    return found
