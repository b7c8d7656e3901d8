"""Ctrl-C, heard from the first moment of the command to the last."""

from __future__ import annotations

import signal
import threading
from types import FrameType

HEARD = threading.Event()
"""Set when somebody asked for an end, however that surfaced."""


def listen() -> None:
    """Turn every interrupt into a KeyboardInterrupt that leaves a trace in `HEARD`."""

    def hear(_signal: int, _frame: FrameType | None) -> None:
        HEARD.set()
        raise KeyboardInterrupt

    signal.signal(signal.SIGINT, hear)


def listen_no_more() -> None:
    """All is said and written: an interrupt could only spoil the end."""
    signal.signal(signal.SIGINT, signal.SIG_IGN)
