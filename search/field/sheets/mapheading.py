"""The heading of a map page: how to hold it, its scale, the north, and which part it shows."""

from __future__ import annotations

from collections.abc import Iterator, Sequence

from search.field.positions import is_measured
from search.field.sheets.palette import ACCENT, INK, QUIET, WHITE
from search.field.sheets.sheet import MARGIN, Sheet
from search.field.sheets.tiling import Proportions, Tile, Tiling
from search.trial.records import Ground

HEAD = 64
"""Height of the heading above the map."""
BARS_M = (0.1, 0.2, 0.5, 1, 2, 5, 10, 20, 50, 100, 200, 500, 1000)
SHORTEST_BAR = 40


def heading(sheet: Sheet, ground: Ground | None, shape: Proportions, tiling: Tiling, number: int) -> None:
    """Draw the heading of one page of the map.

    Parameters
    ----------
    sheet : the page
    ground : the field; None where every block is a line
    shape : how a plot is drawn
    tiling : the pages of the map
    number : of this page among them, from 0
    """
    top, tiles = MARGIN, tiling.tiles
    x = sheet.left + sheet.text(sheet.left, top + 15, "Field map", 17, bold=True)
    if len(tiles) > 1:
        sheet.text(x + 12, top + 15, _part(tiles, number), 10, ink=QUIET)
    for at, line in enumerate(_remarks(ground, shape)):
        sheet.text(sheet.left, top + 30 + 13 * at, line, 9, ink=QUIET)
    right = sheet.right
    if ground and ground.north_deg is not None:
        _north(sheet, right - 14, top + 19, ground.north_deg)
        right -= 54
    if ground and ground.plot_m and shape.true:
        right -= _scale_bar(sheet, right, top + 12, tiling.scale) + 24
    if len(tiles) > 1:
        _key_map(sheet, tiles, number, right)


def _part(tiles: Sequence[Tile], number: int) -> str:
    tile = tiles[number]
    rows, columns = (f"{part.start + 1} to {part.stop}" for part in (tile.rows, tile.columns))
    return f"part {number + 1} of {len(tiles)}: rows {rows}, columns {columns}"


def _remarks(ground: Ground | None, shape: Proportions) -> Iterator[str]:
    if ground is None:
        yield "Not to scale: the trial file has no map. Each block is a line; take the blocks where they lie."
        return
    yield f"Far side at the top. Start {ground.numbering.start}; arrows show the passes in order."
    if ground.plot_m is None:
        yield "Not to scale: the trial file gives no size of plots. A dot: a place without a plot."
        return
    wide, long = ground.plot_m
    across, along = ground.gap_m
    gaps = f"gaps {across:g} m between neighbours, {along:g} m between lines"
    gaps = gaps if across or along else "no gaps"
    drawn = "To scale." if shape.true else "Lengths shortened, not to scale."
    if is_measured(ground):
        gaps = "gaps as measured in the table of plots"
        drawn = "To scale." if shape.true else "Drawn on a grid, not to scale."
    yield f"Plots {wide:g} m wide, {long:g} m long; {gaps}. {drawn}"


def _north(sheet: Sheet, x: float, y: float, bearing: float) -> None:
    """An arrow to the north; the bearing is that of the way up the page."""
    with sheet.turned(x, y, -bearing):
        sheet.shape([(0, -15), (5.5, 12), (0, 8)], INK)
        sheet.shape([(0, -15), (-5.5, 12), (0, 8)], QUIET)
        sheet.shape([(-0.6, -9), (-0.6, 7.5), (-4.4, 10.3)], WHITE)
    sheet.text(x, y + 27, "north", 8.5, ink=QUIET, align=0.5)


def _scale_bar(sheet: Sheet, right: float, y: float, scale: float) -> float:
    """A bar of a round number of metres that ends at `right`; gives its width."""
    metres = next(step for step in BARS_M if step * scale >= SHORTEST_BAR)
    wide = metres * scale
    sheet.box(right - wide, y, wide / 2, 4, fill=INK)
    sheet.box(right - wide, y, wide, 4, stroke=INK, weight=0.7)
    sheet.text(right - wide / 2, y + 15, f"{metres:g} m", 8.5, ink=QUIET, align=0.5)
    return wide


def _key_map(sheet: Sheet, tiles: Sequence[Tile], number: int, right: float) -> None:
    """A small picture of all parts, this one filled."""
    across = len({tile.columns.start for tile in tiles})
    down = len(tiles) // across
    high, wide = min(12.0, 24 / down), min(18.0, 90 / across)
    for part in range(len(tiles)):
        x = right - (across - part % across) * wide
        y = MARGIN + 2 + part // across * high
        fill = ACCENT if part == number else None
        sheet.box(x, y, wide, high, fill=fill, stroke=QUIET, weight=0.6)
