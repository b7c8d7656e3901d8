"""Files of a sweep: the table and the page, written whole at its end, and now and then before."""

from __future__ import annotations

import time
from collections.abc import Callable
from pathlib import Path

from search.foundation.documents import write_whole
from search.foundation.errors import BadInput
from search.runs.report.page import sweep_html
from search.runs.sweep import SweepResult
from search.runs.sweep_table import csv_of

EVERY_SECONDS = 60.0
SHARE = 0.01
"""Part of the time that writing while the sweep goes on may take."""


class SweepFiles:
    """Files of one sweep in a folder.

    Parameters
    ----------
    folder : where they go
    """

    def __init__(self, folder: Path) -> None:
        self.table = folder / "sweep.csv"
        self.page = folder / "sweep.html"
        self.verdicts = folder / "sweep.verdicts.jsonl"
        self.failure = ""
        """Why the last writing in between failed; the sweep goes on, for the disk may have room later."""
        self._due = time.monotonic() + EVERY_SECONDS

    def write(self, result: SweepResult) -> tuple[Path, Path]:
        """Write both files.

        Raises
        ------
        BadInput : one cannot be written
        """
        columns, rows = result.sweep.columns, result.rows
        write_whole(self.table, csv_of(columns, rows))
        write_whole(self.page, sweep_html(result.sweep.name, columns, rows, result.interrupted))
        return self.table, self.page

    def write_now_and_then(self, result: Callable[[], SweepResult]) -> None:
        """Write both files if the last time is long enough ago.

        Parameters
        ----------
        result : gives what the sweep has come to
        """
        started = time.monotonic()
        if started < self._due:
            return
        self.failure = ""
        try:
            self.write(result())
        except BadInput as error:
            self.failure = str(error)
        ended = time.monotonic()
        self._due = ended + max(EVERY_SECONDS, (ended - started) / SHARE)
