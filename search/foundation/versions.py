"""Which versions of program and libraries made a result."""

from __future__ import annotations

import platform
from functools import cache
from importlib.metadata import PackageNotFoundError, version

LIBRARIES = ("evenfield", "numpy", "scipy", "numba", "ortools")


def versions() -> dict[str, str]:
    """Versions of everything that may change the bits of a plan."""
    return dict(_found())


@cache
def _found() -> dict[str, str]:
    # Looked up once: each of a sweep's thousands of results names them.
    found = {"python": platform.python_version()}
    for library in LIBRARIES:
        try:
            found[library] = version(library)
        except PackageNotFoundError:  # run from a checkout that was never installed
            continue
    return found
