"""Linear algebra on one thread: with more, the last bits of a result depend on their number."""

from __future__ import annotations

from contextlib import AbstractContextManager
from functools import cache
from typing import Any

import numpy  # noqa: F401  (its libraries must be loaded before they can be found)
from threadpoolctl import ThreadpoolController


def one_thread() -> AbstractContextManager[Any]:
    """Within this, numpy's linear algebra uses one thread."""
    limited: AbstractContextManager[Any] = _controller().limit(limits=1)
    return limited


@cache
def _controller() -> ThreadpoolController:
    # finding the libraries takes milliseconds, so it is done once
    return ThreadpoolController()
