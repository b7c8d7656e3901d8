"""The map of plan.html: where every plot, outline and arrow lies, in pixels."""

from __future__ import annotations

from collections.abc import Callable, Iterator
from dataclasses import dataclass

from search.field.crew import CrewPacket
from search.field.positions import is_measured
from search.field.sheets.palette import WHITE, hex_of
from search.field.sheets.steps import steps_of
from search.field.sheets.tints import block_tints
from search.field.tables import named

WIDE, LONG = 52.0, 58.0
"""Pixels of the smallest plot in which number, code and block can be read."""
LONGEST = 190.0
SIDE = 74.0
_Pair = tuple[float, float]
_Corner = Callable[[int, int], _Pair]
"""From row and column to the top left corner of a plot."""


@dataclass(frozen=True, slots=True)
class Cell:
    """A plot on the page."""

    x: float
    y: float
    tint: str
    plot: int
    code: str
    letter: str
    caution: bool
    told: str
    filler: bool = False
    in_soil: bool = False


@dataclass(frozen=True, slots=True)
class Arrow:
    """Where a pass comes in, and which way it runs."""

    number: int
    x: float
    y: float
    to_right: bool


@dataclass(frozen=True, slots=True)
class PageMap:
    """The map, drawn.

    Parameters
    ----------
    wide, high : of the whole drawing
    cell_wide, cell_high : of a plot
    outline : the path along which blocks end
    dots : places without a plot
    to_scale : whether plots and gaps keep their proportions
    """

    wide: float
    high: float
    cell_wide: float
    cell_high: float
    cells: tuple[Cell, ...]
    outline: str
    dots: tuple[tuple[float, float], ...]
    arrows: tuple[Arrow, ...]
    to_scale: bool


def page_map(packet: CrewPacket) -> PageMap:
    """The map of a packet."""
    ground = packet.ground
    shape = steps_of(packet).shape
    scale = max(WIDE / shape.wide, LONG / shape.long)
    wide, high = shape.wide * scale, min(shape.long * scale, max(LONG, LONGEST))
    across, along = shape.gap_across * scale, shape.gap_along * scale * high / (shape.long * scale)
    rows, columns = packet.extent

    def corner(row: int, column: int) -> tuple[float, float]:
        return SIDE + column * (wide + across), 3 + along / 2 + row * (high + along)

    even = bool(ground and ground.plot_m and not is_measured(ground))
    tints = [hex_of(tint) for tint in block_tints(packet)]
    at = {(planted.place.row, planted.place.column): planted for planted in packet.plots}
    cells = []
    for (row, column), planted in at.items():
        treatment, block = packet.held(planted), packet.blocks[planted.place.block]
        filler = planted.treatment is None
        told = [f"plot {planted.place.plot}", block.name, named(packet, planted), packet.note(planted)]
        told.append(treatment.caution)
        cells.append(
            Cell(
                *corner(row, column),
                tint=hex_of(WHITE) if filler else tints[planted.place.block],
                plot=planted.place.plot,
                code=treatment.code,
                letter=block.letter,
                caution=bool(treatment.caution),
                told=", ".join(filter(None, told)),
                filler=filler,
                in_soil=planted.in_soil,
            )
        )
    empty = [
        (row, column)
        for row in range(rows if ground else 0)
        for column in range(columns)
        if (row, column) not in at
    ]
    return PageMap(
        wide=2 * SIDE + columns * (wide + across) - across,
        high=6 + rows * (high + along),
        cell_wide=wide,
        cell_high=high,
        cells=tuple(cells),
        outline=" ".join(_outline(packet, corner, (wide, high), (across / 2, along / 2))),
        dots=tuple((x + wide / 2, y + high / 2) for x, y in (corner(*place) for place in empty)),
        arrows=tuple(_arrows(packet, corner, (wide, high))),
        to_scale=shape.true and even and high == shape.long * scale,
    )


def _outline(packet: CrewPacket, corner: _Corner, size: _Pair, half_gap: _Pair) -> Iterator[str]:
    at = {(planted.place.row, planted.place.column): planted.place.block for planted in packet.plots}
    for (row, column), block in at.items():
        x, y = corner(row, column)
        left, right = x - half_gap[0], x + size[0] + half_gap[0]
        top, bottom = y - half_gap[1], y + size[1] + half_gap[1]
        sides = {
            (row - 1, column): f"M{left:.1f} {top:.1f}H{right:.1f}",
            (row + 1, column): f"M{left:.1f} {bottom:.1f}H{right:.1f}",
            (row, column - 1): f"M{left:.1f} {top:.1f}V{bottom:.1f}",
            (row, column + 1): f"M{right:.1f} {top:.1f}V{bottom:.1f}",
        }
        yield from (path for beyond, path in sides.items() if at.get(beyond) != block)


def _arrows(packet: CrewPacket, corner: _Corner, size: _Pair) -> Iterator[Arrow]:
    if packet.ground is None:
        return
    last = packet.extent[1] - 1
    for walked in packet.passes:
        row = walked.stops[0].place.row
        x = corner(row, 0)[0] if walked.to_right else corner(row, last)[0] + size[0]
        yield Arrow(walked.number, x, corner(row, 0)[1] + size[1] / 2, walked.to_right)
