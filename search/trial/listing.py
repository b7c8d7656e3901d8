"""The map of the field as a table: one row a plot, for tramlines, odd gaps and more than 52 blocks."""

from __future__ import annotations

import csv
import re
from collections.abc import Iterator, Sequence
from dataclasses import dataclass, field
from pathlib import Path

from search.foundation.errors import Fault, did_you_mean, shown
from search.trial.kinds import MOST_NAME, Report
from search.trial.names import plain
from search.trial.nodes import Node
from search.trial.records import Spot

HEAD = ("line", "place", "block", "x_m", "y_m")
REQUIRED = ("line", "place")
MOST_BYTES = 16 << 20
MOST_LINE, MOST_PLACE = 9_999, 999
FARTHEST_M = 10_000_000.0
MOST_TOLD = 20
"""Faults of one table beyond these are the same slip again."""


@dataclass(slots=True)
class Table:
    """The lines of a table and how to speak of one of them.

    Parameters
    ----------
    lines : header first
    report : where faults go
    node : where the trial file names or holds the table
    file : the file that holds it; empty where the trial file does
    """

    lines: Sequence[str]
    report: Report
    node: Node
    file: str = ""
    told: int = field(default=0, init=False)

    def fault(self, number: int, found: str, must: str, why: str = "", remedy: str = "") -> None:
        """Report a fault in a line, counted from 1."""
        self.told += 1
        if self.told > MOST_TOLD:
            return
        if self.file:
            self.report.faults.append(Fault("ground.file", found, must, why, remedy, self.file, number, 1))
        else:
            where = f"{found} in line {number} of the table"
            self.report.add(self.node, "ground.places", where, must, why, remedy)


def open_table(name: str, node: Node, report: Report) -> Table | None:
    """The table of a file that a trial file names, by a path from its own folder."""
    must = "a table in UTF-8: line, place, block, and x_m, y_m where positions are measured"
    if not report.file:
        report.add(
            node,
            "ground.file",
            shown(name),
            "a map within the document",
            "a plan must hold its whole trial",
            "the table itself, under places",
        )
        return None
    path = Path(report.file).parent / name
    try:
        with path.open("rb") as stream:
            data = stream.read(MOST_BYTES + 1)
        if len(data) > MOST_BYTES:
            report.add(node, "ground.file", f"over {MOST_BYTES >> 20} MiB in {shown(str(path))}", must)
            return None
        text = data.decode("utf-8-sig")
    except (OSError, ValueError) as error:
        reason = getattr(error, "strerror", None) or "bytes that are not UTF-8 text"
        report.add(node, "ground.file", f"{reason.lower()}: {shown(str(path))}", must)
        return None
    return Table(text.splitlines(), report, node, str(path))


def spots_of(table: Table, bare: bool) -> tuple[tuple[Spot, ...], tuple[str, ...]]:
    """The plots of a table and the names of their blocks; both empty where it has faults.

    Parameters
    ----------
    table : its lines
    bare : no blocks are wanted from it
    """
    mark = ";" if table.lines and ";" in table.lines[0] else ","
    rows = csv.reader(table.lines, delimiter=mark)
    head = [cell.strip().casefold() for cell in next(rows, [])]
    if not _sound_head(head, table, bare):
        return (), ()
    spots: list[Spot] = []
    names: dict[str, int] = {}
    spelled: dict[str, str] = {}
    seen: set[tuple[int, int]] = set()
    for number, row in enumerate(rows, start=2):
        if not any(cell.strip() for cell in row):
            continue
        if len(row) != len(head):
            table.fault(number, f"{len(row)} cells", f"{len(head)}, as many as in the first line")
            continue
        cells = {name: cell.strip() for name, cell in zip(head, row, strict=True)}
        spot = _spot(cells, number, table)
        name = "" if bare else _block(cells.get("block", ""), spelled, number, table)
        if spot is None or name is None:
            continue
        if (spot.line, spot.place) in seen:
            table.fault(number, f"line {spot.line}, place {spot.place} a second time", "one plot a place")
            continue
        seen.add((spot.line, spot.place))
        block = None if bare else names.setdefault(name, len(names))
        spots.append(Spot(spot.line, spot.place, block, spot.x_m, spot.y_m))
    if not spots and not table.told:
        table.fault(1, "no plots", "a row for each plot")
    return ((), ()) if table.told else (tuple(spots), tuple(names))


def table_lines(spots: Sequence[Spot], names: Sequence[str]) -> Iterator[str]:
    """Spots as the lines of a table that reads back as the same."""
    measured = any(spot.x_m is not None for spot in spots)
    blocked = any(spot.block is not None for spot in spots)
    wanted = [name for name in HEAD if (name != "block" or blocked) and (name[1:] != "_m" or measured)]
    yield ",".join(wanted)
    for spot in spots:
        cells = {
            "line": str(spot.line),
            "place": str(spot.place),
            "block": "" if spot.block is None else _quoted(names[spot.block]),
            "x_m": repr(spot.x_m),
            "y_m": repr(spot.y_m),
        }
        yield ",".join(cells[name] for name in wanted)


def _quoted(name: str) -> str:
    doubled = name.replace('"', '""')
    return f'"{doubled}"' if re.search(r'[",;]', name) else name


def _sound_head(head: list[str], table: Table, bare: bool) -> bool:
    for name in head:
        if name not in HEAD:
            table.fault(
                1, f"the column {shown(name)}", f"only {', '.join(HEAD)}", "", did_you_mean(name, HEAD)
            )
        elif head.count(name) > 1:
            table.fault(1, f"the column {name} more than once", "each column once")
    for name in (*REQUIRED, *(() if bare else ("block",))):
        if name not in head:
            table.fault(1, f"no column {name}", f"a first line with {', '.join(HEAD[:3])}")
    if ("x_m" in head) != ("y_m" in head):
        table.fault(1, "one of x_m and y_m", "both or neither")
    return table.told == 0


def _spot(cells: dict[str, str], number: int, table: Table) -> Spot | None:
    line = _whole(cells, "line", MOST_LINE, number, table)
    place = _whole(cells, "place", MOST_PLACE, number, table)
    x, y = (_metres(cells, name, number, table) for name in ("x_m", "y_m"))
    if line is None or place is None or ("x_m" in cells and (x is None or y is None)):
        return None
    return Spot(line, place, None, x, y)


def _whole(cells: dict[str, str], name: str, most: int, number: int, table: Table) -> int | None:
    text = cells[name]
    if re.fullmatch(r"[0-9]{1,9}", text) and 1 <= int(text) <= most:
        return int(text)
    table.fault(number, f"the {name} {shown(text)}", f"a whole number from 1 to {most:,}")
    return None


def _metres(cells: dict[str, str], name: str, number: int, table: Table) -> float | None:
    if name not in cells:
        return None
    text = cells[name]
    if re.fullmatch(r"[+-]?[0-9]{1,7}(\.[0-9]{0,20})?([eE][+-]?[0-9]{1,2})?", text):
        metres = float(text)
        if abs(metres) <= FARTHEST_M:
            return metres
    remedy = f"a decimal point: {text.replace(',', '.')}" if "," in text else ""
    table.fault(number, f"{name} {shown(text)}", "a number of metres, on every row", remedy=remedy)
    return None


def _block(name: str, spelled: dict[str, str], number: int, table: Table) -> str | None:
    key = plain(name)
    if not key or len(name) > MOST_NAME or not name.isprintable():
        table.fault(number, f"the block {shown(name)}", f"a name of at most {MOST_NAME} characters")
        return None
    if spelled.setdefault(key, name) != name:
        table.fault(
            number,
            f"{shown(name)} beside {shown(spelled[key])}",
            "block names that differ in more than case and blanks",
        )
        return None
    return name
