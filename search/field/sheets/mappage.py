"""The map of the field: every plot with its number and treatment, blocks tinted and outlined."""

from __future__ import annotations

from dataclasses import dataclass, replace
from functools import partial

from search.field.crew import CrewPacket
from search.field.randomise import Planted
from search.field.sheets.legend import legend_of
from search.field.sheets.lettering import width, wrapped
from search.field.sheets.mapcells import BLOCK, Cell, Form, forms_for
from search.field.sheets.mapheading import HEAD, heading
from search.field.sheets.palette import ACCENT, HAIR, INK, QUIET, WHITE, Colour
from search.field.sheets.sheet import FOOT, MARGIN, PAPERS, Page, Sheet
from search.field.sheets.steps import Steps, steps_of
from search.field.sheets.tiling import Tile, Tiling, tiled
from search.field.sheets.tints import block_tints
from search.field.walk import Pass

SIDE = 40
"""Width beside the map for the arrows of the passes."""
NAMES = 118
"""Width at the left for names of blocks where each block is a line."""
OUTLINE = 1.7
FRAME = 0.9
"""Line of the frame within a plot that is planted already."""
Position = tuple[int, int]


def map_pages(packet: CrewPacket) -> list[Page]:
    """The map, on as many pages as it takes to stay legible."""
    plan = _plan(packet)
    return [Page(plan.size, partial(_draw, plan, number)) for number in range(len(plan.tiling.tiles))]


@dataclass(frozen=True, slots=True)
class _Plan:
    """Everything that was decided about the map before a page of it is drawn."""

    packet: CrewPacket
    size: tuple[float, float]
    steps: Steps
    tiling: Tiling
    form: Form
    at: dict[Position, Planted]
    tints: tuple[Colour, ...]

    @property
    def sides(self) -> tuple[float, float]:
        """Room kept free at the left and the right of the map."""
        return (MARGIN + SIDE, MARGIN + SIDE) if self.packet.ground else (MARGIN + NAMES, MARGIN)


def _plan(packet: CrewPacket) -> _Plan:
    at = {(planted.place.row, planted.place.column): planted for planted in packet.plots}
    ground = packet.ground
    steps = steps_of(packet)
    upright = PAPERS[packet.paper]
    sizes = (upright, upright[::-1])
    beside = 2 * SIDE if ground else NAMES
    rooms = tuple(
        (
            wide - 2 * MARGIN - beside,
            high - MARGIN - FOOT - HEAD - legend_of(packet, wide - 2 * MARGIN).height - 22,
        )
        for wide, high in sizes
    )
    rows, columns = packet.extent
    forms = forms_for(packet)
    tiling = tiled(rows, columns, steps.shape, [form.least for form in forms], (rooms[0], rooms[1]))
    tiling = _within(rooms[tiling.landscape], tiling, steps)
    tints = block_tints(packet)
    return _Plan(packet, sizes[tiling.landscape], steps, tiling, forms[tiling.form], at, tints)


def _within(room: tuple[float, float], tiling: Tiling, steps: Steps) -> Tiling:
    """The tiling at a scale that lets the widest part, with whatever gaps it has, stay on its page."""
    wide = max(steps.width(tile) for tile in tiling.tiles)
    high = max(steps.height(tile) for tile in tiling.tiles)
    return replace(tiling, scale=min(tiling.scale, room[0] / wide, room[1] / high))


def _draw(plan: _Plan, number: int, sheet: Sheet) -> None:
    tile = plan.tiling.tiles[number]
    heading(sheet, plan.packet.ground, plan.steps.shape, plan.tiling, number)
    grid = _Grid(plan, tile)
    for row in tile.rows:
        for column in tile.columns:
            _plot(grid, (row, column), sheet)
    for row in tile.rows:
        for column in tile.columns:
            _outline(grid, (row, column), sheet)
    if plan.packet.ground:
        if not plan.form.lettered:
            _tags(grid, sheet)
        for walked in plan.packet.passes:
            _pass(grid, walked, sheet)
    else:
        _block_names(grid, sheet)
    legend = legend_of(plan.packet, sheet.right - sheet.left, plan.tints)
    legend.draw(sheet, sheet.page_height - FOOT - legend.height - 10)


class _Grid:
    """Where rows and columns of the map lie on the page."""

    def __init__(self, plan: _Plan, tile: Tile) -> None:
        scale, steps = plan.tiling.scale, plan.steps
        self.plan, self.tile, self.scale = plan, tile, scale
        self.wide, self.high = scale * steps.shape.wide, scale * steps.shape.long
        self.across, self.along = scale * steps.gap_across, scale * steps.gap_along
        first, last = plan.sides
        self.left = first + (plan.size[0] - first - last - scale * steps.width(tile)) / 2

    def corner(self, row: int, column: int) -> tuple[float, float]:
        """The top left corner of a plot."""
        columns, rows = self.plan.steps.columns, self.plan.steps.rows
        return (
            self.left + self.scale * (columns[column] - columns[self.tile.columns.start]),
            MARGIN + HEAD + self.along / 2 + self.scale * (rows[row] - rows[self.tile.rows.start]),
        )

    @property
    def right(self) -> float:
        """The right edge of the part of the map on this page."""
        return self.corner(0, self.tile.columns.stop - 1)[0] + self.wide


def _plot(grid: _Grid, position: Position, sheet: Sheet) -> None:
    planted = grid.plan.at.get(position)
    x, y = grid.corner(*position)
    if planted is None:
        if grid.plan.packet.ground:
            sheet.dot(x + grid.wide / 2, y + grid.high / 2, 1.6, QUIET)
        return
    packet, filler = grid.plan.packet, planted.treatment is None
    tint = WHITE if filler else grid.plan.tints[planted.place.block]
    sheet.box(x, y, grid.wide, grid.high, fill=tint, stroke=QUIET, weight=0.4)
    if filler:
        sheet.line(x, y, x + grid.wide, y + grid.high, ink=HAIR)
        sheet.line(x, y + grid.high, x + grid.wide, y, ink=HAIR)
    if planted.in_soil:
        sheet.box(x + 2, y + 2, grid.wide - 4, grid.high - 4, stroke=INK, weight=FRAME)
    treatment = packet.held(planted)
    cell = Cell(
        plot=str(planted.place.plot),
        code=treatment.code,
        block=packet.blocks[planted.place.block].letter,
        caution=bool(treatment.caution),
    )
    middle = (x + grid.wide / 2, y + grid.high / 2)
    grid.plan.form.draw(sheet, cell, *middle, grid.wide, grid.high)


def _outline(grid: _Grid, position: Position, sheet: Sheet) -> None:
    """A bold line wherever the block ends, in the middle of the gap."""
    at = grid.plan.at
    if position not in at:
        return
    row, column = position
    x, y = grid.corner(row, column)
    left, right = x - grid.across / 2, x + grid.wide + grid.across / 2
    top, bottom = y - grid.along / 2, y + grid.high + grid.along / 2
    sides = {
        (row - 1, column): (left, top, right, top),
        (row + 1, column): (left, bottom, right, bottom),
        (row, column - 1): (left, top, left, bottom),
        (row, column + 1): (right, top, right, bottom),
    }
    for beyond, edge in sides.items():
        if beyond not in at or at[beyond].place.block != at[position].place.block:
            sheet.line(*edge, weight=OUTLINE, ink=INK)


def _tags(grid: _Grid, sheet: Sheet) -> None:
    """The letter of each block at its first plot on the page, where cells have no room for it."""
    tagged: set[int] = set()
    for row in grid.tile.rows:
        for column in grid.tile.columns:
            planted = grid.plan.at.get((row, column))
            if planted is not None and planted.place.block not in tagged:
                tagged.add(planted.place.block)
                x, y = grid.corner(row, column)
                x, y = x - grid.across / 2, y - grid.along / 2
                letter = grid.plan.packet.blocks[planted.place.block].letter
                wide = max(10.0, width(letter, BLOCK, True) + 4)
                x += wide / 2 - 5
                sheet.box(x - wide / 2, y - 5, wide, 10, fill=INK)
                sheet.text(x, y + 3, letter, BLOCK, bold=True, ink=WHITE, align=0.5)


def _pass(grid: _Grid, walked: Pass, sheet: Sheet) -> None:
    """The number of a pass and its direction, at the side where it comes in."""
    row = walked.stops[0].place.row
    if row not in grid.tile.rows:
        return
    middle = grid.corner(row, 0)[1] + grid.high / 2
    side, way = (grid.left, 1) if walked.to_right else (grid.right, -1)
    sheet.arrow(side - way * 31, middle, way * 21, INK)
    sheet.text(side - way * 36, middle + 4, str(walked.number), 11, bold=True, align=(way + 1) / 2)
    if walked.number == 1 and walked.stops[0].place.column in grid.tile.columns:
        sheet.text(side - way * 21, middle + 17, "start", 9, bold=True, ink=ACCENT, align=0.5)


def _block_names(grid: _Grid, sheet: Sheet) -> None:
    for row in grid.tile.rows:
        name = grid.plan.packet.blocks[row].name
        lines = wrapped(name, 10, NAMES - 14, bold=True, most=2)
        top = grid.corner(row, 0)[1] + grid.high / 2 - 6.5 * len(lines)
        for number, line in enumerate(lines):
            sheet.text(grid.left - NAMES, top + 10 + 13 * number, line, 10, bold=True)
