"""Tables that grow row by row: a long measurement goes on where it was broken off."""

from __future__ import annotations

import csv
from collections.abc import Sequence
from pathlib import Path


class Rows:
    """A CSV table on disk; its first columns name what a row is about.

    Parameters
    ----------
    path : of the table; rows that are there already are kept
    columns : all columns, those that name a row first
    naming : how many do so
    """

    def __init__(self, path: str, columns: Sequence[str], naming: int) -> None:
        self.path, self.columns, self.naming = Path(path), list(columns), naming
        if not self.path.exists():
            self._append(self.columns)
        with self.path.open(encoding="utf-8", newline="") as file:
            header, *rows = csv.reader(file)
        if header != self.columns:
            raise SystemExit(f"{path} has other columns: move it away first")
        self._done = {tuple(row[:naming]) for row in rows}

    def __contains__(self, name: Sequence[object]) -> bool:
        return tuple(map(str, name)) in self._done

    def add(self, row: Sequence[object]) -> None:
        """Write one row at once."""
        self._append(row)
        self._done.add(tuple(map(str, row[: self.naming])))

    def all(self) -> list[dict[str, str]]:
        """Every row, those of earlier measurements too."""
        with self.path.open(encoding="utf-8", newline="") as file:
            return list(csv.DictReader(file))

    def sort(self) -> None:
        """Put the rows in the order of their names, numbers by size."""
        with self.path.open(encoding="utf-8", newline="") as file:
            header, *rows = csv.reader(file)
        rows.sort(
            key=lambda row: [(0, float(x), "") if _number(x) else (1, 0.0, x) for x in row[: self.naming]]
        )
        with self.path.open("w", encoding="utf-8", newline="") as file:
            csv.writer(file, lineterminator="\n").writerows([header, *rows])

    def _append(self, row: Sequence[object]) -> None:
        with self.path.open("a", encoding="utf-8", newline="") as file:
            csv.writer(file, lineterminator="\n").writerow(row)


def _number(text: str) -> bool:
    return text.replace(".", "", 1).isdigit()
