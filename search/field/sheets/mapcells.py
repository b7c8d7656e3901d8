"""One cell of the map: plot number, treatment code, block, caution sign."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass
from functools import partial

from search.field.crew import FILLER, CrewPacket
from search.field.sheets.lettering import width
from search.field.sheets.sheet import Sheet

NUMBER, CODE, BLOCK = 10.0, 11.0, 8.0
"""Smallest type sizes in points."""
LARGEST = 1.4
"""In large cells the type grows up to so many times."""
PADDING = 3.0
LINE = 13.0
SIGN = 12.0
"""Width of a caution sign with the blank before it."""


@dataclass(frozen=True, slots=True)
class Cell:
    """What a cell says."""

    plot: str
    code: str
    block: str
    caution: bool


@dataclass(frozen=True, slots=True)
class Form:
    """A way to write a cell.

    Parameters
    ----------
    least : width and height in points of the smallest cell in which every plot can be read
    draw : writes a cell about the middle of a place of the width and height given
    lettered : whether it tells the block; a form that does not needs a tag at each block
    """

    least: tuple[float, float]
    draw: Callable[[Sheet, Cell, float, float, float, float], None]
    lettered: bool


def forms_for(packet: CrewPacket) -> tuple[Form, ...]:
    """The forms of cell for a packet, the most readable first."""
    number = max(width(str(planted.place.plot), NUMBER) for planted in packet.plots)
    shown = [*packet.treatments, *([FILLER] if packet.filler else [])]
    code = max(width(treatment.code, CODE, True) for treatment in shown)
    signed = max(
        width(treatment.code, CODE, True) + (SIGN if treatment.caution else 0) for treatment in shown
    )
    sign = SIGN if any(treatment.caution for treatment in packet.treatments) else 0
    letter = max(width(block.letter, BLOCK) for block in packet.blocks) + sign
    forms = (
        Form(
            (max(number, code, letter) + 2 * PADDING, 3 * LINE + PADDING),
            partial(_stacked, (number, code)),
            True,
        ),
        Form(
            (max(number, signed) + 2 * PADDING, 2 * LINE + PADDING),
            partial(_paired, (number, code, sign)),
            False,
        ),
        Form((LINE + 2, number + code + letter + 4 * PADDING), partial(_along, (number, code, letter)), True),
        Form((LINE + 2, number + signed + 3 * PADDING), partial(_along, (number, signed, 0.0)), False),
    )
    return forms if letter > sign else tuple(form for form in forms if not form.lettered)


def _stacked(
    widths: tuple[float, float],
    sheet: Sheet,
    cell: Cell,
    x: float,
    y: float,
    wide: float,
    high: float,
) -> None:
    """Number over code over block; `widths` are the greatest of the first two over all plots."""
    grown = _growth(high / (3 * LINE + PADDING), (wide - 2 * PADDING) / max(widths))
    sheet.text(x, y - 7.5 * grown, cell.plot, NUMBER * grown, align=0.5)
    sheet.text(x, y + 5.5 * grown, cell.code, CODE * grown, bold=True, align=0.5)
    left = x - (width(cell.block, BLOCK) + SIGN * cell.caution) / 2
    _sign(sheet, cell, left + sheet.text(left, y + 17 * grown, cell.block, BLOCK), y + 17 * grown)


def _paired(
    widths: tuple[float, float, float],
    sheet: Sheet,
    cell: Cell,
    x: float,
    y: float,
    wide: float,
    high: float,
) -> None:
    """Number over code; `widths` are the greatest of both over all plots, and that of the sign."""
    number, code, sign = widths
    room = wide - 2 * PADDING
    grown = _growth(high / (2 * LINE + PADDING), room / number, (room - sign) / code)
    sheet.text(x, y - 2.5 * grown, cell.plot, NUMBER * grown, align=0.5)
    left = x - (width(cell.code, CODE * grown, True) + SIGN * cell.caution) / 2
    end = left + sheet.text(left, y + 10 * grown, cell.code, CODE * grown, bold=True)
    _sign(sheet, cell, end, y + 10 * grown)


def _along(
    tabs: tuple[float, float, float],
    sheet: Sheet,
    cell: Cell,
    x: float,
    y: float,
    wide: float,
    high: float,
) -> None:
    """Number, code and block in one line along the plot, from its near end, aligned over all plots.

    `tabs` are the greatest widths of the three in smallest type; a form without block has 0 for it.
    """
    number, code, letter = tabs
    room = high - letter - 2 * PADDING
    grown = _growth(wide / (LINE + 2), (room - 2 * PADDING) / (number + code))
    gaps = 2 if letter else 1
    gap = min(11.0, (room - grown * (number + code)) / gaps)
    base = 0.36 * NUMBER * grown
    with sheet.turned(x, y, -90):
        left = -(grown * (number + code) + letter + gaps * gap) / 2
        sheet.text(left, base, cell.plot, NUMBER * grown)
        left += grown * number + gap
        end = left + sheet.text(left, base, cell.code, CODE * grown, bold=True)
        if letter:
            left += grown * code + gap
            end = left + sheet.text(left, base, cell.block, BLOCK)
        _sign(sheet, cell, end, base)


def _growth(*rooms: float) -> float:
    """How many times the smallest type fits, the same for every plot of a map."""
    return max(1.0, min(LARGEST, *rooms))


def _sign(sheet: Sheet, cell: Cell, x: float, y: float) -> None:
    if cell.caution:
        sheet.caution_sign(x + 3, y + 0.5, 8)
