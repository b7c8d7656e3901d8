"""Every plot with its number, block, line and place, as it is staked out in the field."""

from __future__ import annotations

from collections.abc import Iterator, Sequence
from dataclasses import dataclass

from search.foundation.errors import BadInput
from search.trial.records import Block, Ground, Trial

NO_PLOT = "."
MOST_PLACES = 999


@dataclass(frozen=True, slots=True)
class Place:
    """A plot of the field.

    Parameters
    ----------
    plot : number on the stake, line × 100 + place (× 1000 where a line has more than 99 places)
    block : number of the block that it belongs to
    line : line of plots, counted from 1 at the side where numbering starts
    place : position in the line, counted from 1; places without a plot count too
    row, column : position on the map as drawn, counted from 0 at its top left
    """

    plot: int
    block: int
    line: int
    place: int
    row: int
    column: int


def places(trial: Trial) -> tuple[Place, ...]:
    """The plots of a trial in the order of their numbers.

    Without a ground every block is a line, drawn and numbered like a page that is read.

    Raises
    ------
    BadInput : a line has more places than three digits can number, or the blocks are not cut yet
    """
    if trial.wanted is not None:
        raise BadInput("the blocks of this trial are not cut from its map yet: plan the trial first")
    return places_on(trial.ground, trial.blocks)


def places_on(ground: Ground | None, blocks: Sequence[Block]) -> tuple[Place, ...]:
    """The same for a ground and its blocks.

    Raises
    ------
    BadInput : a line has more places than three digits can number
    """
    if ground is None:
        found = _blocks_as_lines(blocks)
    elif ground.spots:
        found = _listed(ground)
    else:
        found = _drawn(ground)
    return tuple(sorted(found, key=lambda place: place.plot))


def extent(sites: Sequence[Place], ground: Ground | None) -> tuple[int, int]:
    """Rows and columns of the map as drawn, empty ones at its edges included."""
    if ground and ground.rows:
        return len(ground.rows), len(ground.rows[0])
    return 1 + max(site.row for site in sites), 1 + max(site.column for site in sites)


def _drawn(ground: Ground) -> Iterator[Place]:
    block_of = dict(ground.letters)
    height = len(ground.rows)
    width = max(len(row) for row in ground.rows)
    step = _step(width)
    for row, letters in enumerate(ground.rows):
        line = height - row if ground.numbering.start.startswith("bottom") else row + 1
        from_left = _from_left(ground, line)
        for column, letter in enumerate(letters):
            if letter != NO_PLOT:
                place = column + 1 if from_left else width - column
                yield Place(line * step + place, block_of.get(letter, 0), line, place, row, column)


def _listed(ground: Ground) -> Iterator[Place]:
    """Plots of a table: line and place are given, row and column follow from them."""
    height = max(spot.line for spot in ground.spots)
    width = max(spot.place for spot in ground.spots)
    step = _step(width)
    for spot in ground.spots:
        row = height - spot.line if ground.numbering.start.startswith("bottom") else spot.line - 1
        column = spot.place - 1 if _from_left(ground, spot.line) else width - spot.place
        plot = spot.line * step + spot.place
        yield Place(plot, spot.block or 0, spot.line, spot.place, row, column)


def _from_left(ground: Ground, line: int) -> bool:
    turned = ground.numbering.way == "serpentine" and line % 2 == 0
    return ground.numbering.start.endswith("left") != turned


def _blocks_as_lines(blocks: Sequence[Block]) -> Iterator[Place]:
    step = _step(max(block.plots for block in blocks))
    for number, block in enumerate(blocks):
        for column in range(block.plots):
            line, place = number + 1, column + 1
            yield Place(line * step + place, number, line, place, number, column)


def _step(longest: int) -> int:
    if longest > MOST_PLACES:
        raise BadInput(
            f"a line of the field has {longest} places; plot numbers hold at most {MOST_PLACES} a line: "
            "break the line into two lines of the map, or the block into two blocks"
        )
    return 100 if longest <= 99 else 1000
