"""How large the map is drawn, and on how many pages: legible first, then few pages, then large."""

from __future__ import annotations

from collections.abc import Iterator, Sequence
from dataclasses import dataclass
from itertools import product
from math import ceil, floor

LONGEST = 9.0
"""A plot is drawn at most so many times as long as wide; a longer one is shortened, and that is said."""
WIDEST_GAP = 3.0
"""A gap is drawn at most so many times as wide as the short side of a plot, nor wider than its own side."""
WIDEST_CELL, LONGEST_CELL = 66.0, 190.0
"""Points beyond which a larger plot would only look coarse."""


@dataclass(frozen=True, slots=True)
class Proportions:
    """A plot and the gaps around it, in any one unit.

    Parameters
    ----------
    true : whether they are those of the field
    """

    wide: float
    long: float
    gap_across: float
    gap_along: float
    true: bool = True


@dataclass(frozen=True, slots=True)
class Tile:
    """The part of the map on one page: half-open ranges of rows and columns."""

    rows: range
    columns: range


@dataclass(frozen=True, slots=True)
class Tiling:
    """A map cut into pages.

    Parameters
    ----------
    landscape : whether the pages lie on their long side
    form : number of the form of cell that was chosen
    scale : points per unit of the proportions
    tiles : one a page, in reading order
    """

    landscape: bool
    form: int
    scale: float
    tiles: tuple[Tile, ...]


def proportions(plot_m: tuple[float, float] | None, gap_m: tuple[float, float]) -> Proportions:
    """How a plot is drawn; without measures as a square. Extreme shapes and gaps are shortened."""
    if plot_m is None:
        return Proportions(1.0, 1.0, 0.0, 0.0)
    wide, long = plot_m
    drawn_wide, drawn_long = min(wide, LONGEST * long), min(long, LONGEST * wide)
    most = WIDEST_GAP * min(drawn_wide, drawn_long)
    across, along = min(gap_m[0], drawn_wide, most), min(gap_m[1], drawn_long, most)
    true = (drawn_wide, drawn_long, across, along) == (wide, long, *gap_m)
    return Proportions(drawn_wide, drawn_long, across, along, true)


def tiled(
    rows: int,
    columns: int,
    shape: Proportions,
    needs: Sequence[tuple[float, float]],
    rooms: tuple[tuple[float, float], tuple[float, float]],
) -> Tiling:
    """The best way to put a map on paper.

    Parameters
    ----------
    rows, columns : size of the map
    shape : a plot and its gaps
    needs : width and height in points of the smallest legible cell of each form, the best form first
    rooms : width and height in points for the map, on an upright page and on a lying one
    """
    ways = [
        _tiling(rows, columns, shape, least, rooms[lying], lying, form)
        for lying, (form, least) in product((False, True), enumerate(needs))
    ]

    def worth(way: Tiling) -> tuple[bool, int, int, float, bool]:
        legible = way.scale >= _smallest(shape, needs[way.form]) * (1 - 1e-9)
        return not legible, len(way.tiles), way.form, -way.scale, way.landscape

    return min(ways, key=worth)


def _smallest(shape: Proportions, least: tuple[float, float]) -> float:
    """The least scale at which a cell can be read."""
    return max(least[0] / shape.wide, least[1] / shape.long)


def _tiling(
    rows: int,
    columns: int,
    shape: Proportions,
    least: tuple[float, float],
    room: tuple[float, float],
    lying: bool,
    form: int,
) -> Tiling:
    smallest = _smallest(shape, least)
    steps = (shape.wide + shape.gap_across, shape.long + shape.gap_along)
    most = [max(1, floor(space / smallest / step)) for space, step in zip(room, steps, strict=True)]
    across, down = ceil(columns / most[0]), ceil(rows / most[1])
    held = (ceil(columns / across), ceil(rows / down))
    fitting = min(space / step / count for space, step, count in zip(room, steps, held, strict=True))
    largest = min(WIDEST_CELL / shape.wide, LONGEST_CELL / shape.long)
    return Tiling(
        landscape=lying,
        form=form,
        scale=min(fitting, max(largest, smallest)),
        tiles=tuple(
            Tile(down_part, across_part)
            for down_part, across_part in product(_parts(rows, down), _parts(columns, across))
        ),
    )


def _parts(total: int, parts: int) -> Iterator[range]:
    """Ranges of nearly equal length that cover 0 to total."""
    edges = [total * part // parts for part in range(parts + 1)]
    return map(range, edges, edges[1:])
