"""The map of the field, drawn with letters or listed in a table: both become blocks."""

from __future__ import annotations

from collections import Counter
from typing import Any

from search.foundation.errors import did_you_mean, shown
from search.trial.catalogue import MOST_PLOTS
from search.trial.kinds import Report, Section
from search.trial.listing import Table, open_table, spots_of
from search.trial.names import plain
from search.trial.records import Block, Ground, Numbering, Spot

EMPTY = "."
FORMS = ("rows", "file", "places")


def read_ground(
    section: Section | None, report: Report, bare: bool = False
) -> tuple[Ground | None, tuple[Block, ...] | None]:
    """The ground and the blocks it draws, in the order in which a reader meets them.

    Parameters
    ----------
    section : `ground` as the grammar read it, None where the file has none
    report : where faults go
    bare : the map shows plots alone, blocks are still to be cut from it; then no blocks are returned
    """
    if section is None:
        return None, None
    given = [form for form in FORMS if form in section.where]
    if len(given) > 1:
        report.add(
            section.where[given[1]],
            "ground",
            " and ".join(given),
            "the map in one form",
            "two accounts of one field: one of them is wrong",
            "rows drawn with letters, or file or places with a table of plots",
        )
    if len(given) != 1 or given[0] not in section:
        return None, None
    settings = _settings(section, report)
    if given[0] == "rows":
        return _drawn(section["rows"], section, settings, report, bare)
    return _listed(given[0], section, settings, report, bare)


def _settings(section: Section, report: Report) -> dict[str, Any]:
    """Sizes, numbering and bearings, which every form of map has."""
    plot, gap, corner = section.get("plot_m"), section.get("gap_m"), section.get("corner")
    if corner is not None and len(corner) == 2 and abs(corner[0]) > 90:
        report.add(
            section.where["corner"],
            "ground.corner",
            f"the latitude {corner[0]:g}",
            "[latitude, longitude], the latitude from -90 to 90",
            remedy="latitude first",
        )
    return {
        "plot_m": (plot[0], plot[1]) if plot is not None and len(plot) == 2 else None,
        "gap_m": (gap[0], gap[1]) if gap is not None and len(gap) == 2 else (0.0, 0.0),
        "north_deg": section.get("north_deg"),
        "corner": (corner[0], corner[1]) if corner is not None and len(corner) == 2 else None,
    }


def _drawn(
    rows: tuple[str, ...], section: Section, settings: dict[str, Any], report: Report, bare: bool
) -> tuple[Ground | None, tuple[Block, ...] | None]:
    if not _sound(rows, section, report):
        return None, None
    letters = list(dict.fromkeys(c for row in rows for c in row if c != EMPTY))
    numbering = Numbering(**section.get("numbering", {}))
    if bare:
        if len(letters) > 1 or "names" in section.where:
            report.add(
                section.where["rows"],
                "ground.rows",
                f"the letters {', '.join(letters)}",
                "a bare map: one letter for every plot, and no names",
                "blocks.wanted asks for bays to be cut, and here some are drawn",
                "leave wanted out, or draw every plot with the same letter",
            )
            return None, None
        return Ground(rows=rows, numbering=numbering, **settings), None
    names = _names(letters, section, report)
    text = "".join(rows)
    blocks = tuple(Block(names[letter], text.count(letter)) for letter in letters)
    numbers = tuple((letter, j) for j, letter in enumerate(letters))
    return Ground(rows=rows, letters=numbers, numbering=numbering, **settings), blocks


def _listed(
    form: str, section: Section, settings: dict[str, Any], report: Report, bare: bool
) -> tuple[Ground | None, tuple[Block, ...] | None]:
    node = section.where[form]
    table = (
        open_table(section["file"], node, report)
        if form == "file"
        else Table(section["places"], report, node)
    )
    if table is None:
        return None, None
    spots, keys = spots_of(table, bare)
    if len(spots) > MOST_PLOTS:
        report.add(node, f"ground.{form}", f"{len(spots):,} plots", f"at most {MOST_PLOTS:,}")
    if not spots or not _apart(spots, settings["plot_m"], form, section, report):
        return None, None
    # Places of a table are the numbers on the stakes, so they run one way unless the file says otherwise.
    numbering = Numbering(**{"way": "same way", **section.get("numbering", {})})
    ground = Ground(spots=spots, numbering=numbering, **settings)
    if bare:
        return ground, None
    names = _names(list(keys), section, report)
    plots = Counter(spot.block for spot in spots)
    return ground, tuple(Block(names[key], plots[j]) for j, key in enumerate(keys))


def _apart(
    spots: tuple[Spot, ...],
    plot_m: tuple[float, float] | None,
    form: str,
    section: Section,
    report: Report,
) -> bool:
    """Whether no two measured plots lie on one another; a millimetre is forgiven."""
    if spots[0].x_m is None:
        return True
    wide, long = plot_m or (0.002, 0.002)
    cells: dict[tuple[int, int], list[tuple[float, float, Spot]]] = {}
    for spot in spots:
        x, y = spot.x_m or 0.0, spot.y_m or 0.0
        across, along = int(x // wide), int(y // long)
        for cell in ((across + i, along + j) for i in (-1, 0, 1) for j in (-1, 0, 1)):
            for other_x, other_y, other in cells.get(cell, ()):
                if abs(x - other_x) < wide - 1e-3 and abs(y - other_y) < long - 1e-3:
                    report.add(
                        section.where[form],
                        f"ground.{form}",
                        f"line {spot.line}, place {spot.place} upon line {other.line}, place {other.place}",
                        "plots that do not overlap: x_m and y_m are the middle of a plot, in metres",
                    )
                    return False
        cells.setdefault((across, along), []).append((x, y, spot))
    return True


def _sound(rows: tuple[str, ...], section: Section, report: Report) -> bool:
    node, key = section.where["rows"], "ground.rows"
    before = len(report.faults)
    width = max(len(row) for row in rows)
    for number, row in enumerate(rows, start=1):
        strange = next((c for c in row if c != EMPTY and not (c.isascii() and c.isalpha())), None)
        if strange is not None:
            report.add(
                node,
                key,
                f"{shown(strange)} in line {number} of the map",
                "letters a-z and A-Z for blocks, a dot for a place without a plot",
                remedy="a dot, or a letter of its own for the block",
            )
        elif len(row) != width:
            report.add(
                node,
                key,
                f"{len(row)} places in line {number} of the map, {width} in the longest",
                "lines of one length",
                "nobody can tell on which side the missing places lie",
                "fill the line up with dots",
            )
    plots = sum(c != EMPTY for row in rows for c in row)
    if not 0 < plots <= MOST_PLOTS:
        remedy = "a letter for every plot"
        report.add(node, key, f"{plots:,} plots", f"1 to {MOST_PLOTS:,} plots", remedy=remedy)
    return len(report.faults) == before


def _names(letters: list[str], section: Section, report: Report) -> dict[str, str]:
    node = next(section.where[form] for form in FORMS if form in section.where)
    given: Section = section.get("names", Section())
    known = set(letters)
    for letter in given:
        if letter not in known:
            report.add(
                given.key_at[letter],
                "ground.names",
                shown(letter),
                "a letter that is on the map",
                remedy=did_you_mean(letter, letters) or f"the letters of the map: {', '.join(letters[:60])}",
            )
    names = {letter: given.get(letter, letter) for letter in letters}
    seen: dict[str, str] = {}
    for letter, name in names.items():
        if plain(name) in seen:
            report.add(
                given.key_at.get(letter, node),
                "ground.names",
                f"{shown(name)} for {seen[plain(name)]} and {letter}",
                "a name of its own for every block, unlike in more than case and blanks",
                remedy="use only small letters, or name the blocks",
            )
        seen.setdefault(plain(name), letter)
    return names
