"""The map of the field: letters become blocks."""

from __future__ import annotations

from search.foundation.errors import shown
from search.trial.catalogue import MOST_PLOTS
from search.trial.kinds import Report, Section
from search.trial.names import plain
from search.trial.records import Block, Ground, Numbering

EMPTY = "."


def read_ground(section: Section | None, report: Report) -> tuple[Ground | None, tuple[Block, ...] | None]:
    """The ground and the blocks it draws, in the order in which a reader meets their letters.

    Parameters
    ----------
    section : `ground` as the grammar read it, None where the file has none
    report : where faults go
    """
    if section is None:
        return None, None
    rows: tuple[str, ...] | None = section.get("rows")
    if rows is None:
        return None, None
    if not _sound(rows, section, report):
        return None, None
    letters = list(dict.fromkeys(c for row in rows for c in row if c != EMPTY))
    names = _names(letters, section, report)
    text = "".join(rows)
    blocks = tuple(Block(names[letter], text.count(letter)) for letter in letters)
    plot, gap, corner = section.get("plot_m"), section.get("gap_m"), section.get("corner")
    if corner is not None and len(corner) == 2 and abs(corner[0]) > 90:
        report.add(
            section.where["corner"],
            "ground.corner",
            f"the latitude {corner[0]:g}",
            "[latitude, longitude], the latitude from -90 to 90",
            remedy="latitude first",
        )
    ground = Ground(
        rows=rows,
        letters=tuple((letter, j) for j, letter in enumerate(letters)),
        plot_m=(plot[0], plot[1]) if plot is not None and len(plot) == 2 else None,
        gap_m=(gap[0], gap[1]) if gap is not None and len(gap) == 2 else (0.0, 0.0),
        numbering=Numbering(**section.get("numbering", {})),
        north_deg=section.get("north_deg"),
        corner=(corner[0], corner[1]) if corner is not None and len(corner) == 2 else None,
    )
    return ground, blocks


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
    node = section.where["rows"]
    given: Section = section.get("names", Section())
    for letter in given:
        if letter not in letters:
            report.add(
                given.key_at[letter],
                "ground.names",
                shown(letter),
                "a letter that is on the map",
                remedy=f"the letters of the map: {', '.join(letters)}",
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
