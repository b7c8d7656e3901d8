"""The legend under the map: codes and their treatments, letters and their blocks."""

from __future__ import annotations

from collections.abc import Callable, Iterator, Sequence

from search.field.crew import FILLER, BlockEntry, CrewPacket, TreatmentEntry
from search.field.sheets.flow import Piece, below, paragraph, space
from search.field.sheets.lettering import cut, named
from search.field.sheets.palette import HAIR, INK, QUIET, WHITE, Colour
from search.field.sheets.scripts import isolated
from search.field.sheets.sheet import MARGIN, Sheet
from search.field.wording import counted

MOST_TREATMENTS = 40
"""More than these would take the map's place; they stand on pages of their own anyway."""
COLUMN = 160
"""Points that an entry has at least."""
ROW = 15


def legend_of(packet: CrewPacket, room: float, tints: Sequence[Colour] = ()) -> Piece:
    """The legend, `room` wide; names that do not fit are cut, the treatment pages have them whole.

    Parameters
    ----------
    packet : the packet
    room : width in points
    tints : of the blocks; may be left out where only the height is wanted
    """
    parts = [_rule(room), space(5)]
    if any(block.letter and block.name != block.letter for block in packet.blocks):
        tinted = list(zip(packet.blocks, tints or [WHITE] * len(packet.blocks), strict=True))
        parts += [_grid([_block(block, tint) for block, tint in tinted], room), space(6)]
    if packet.blind and not any(entry.caution for entry in packet.treatments):
        parts.append(paragraph("Codes stand for treatments.", MARGIN, room, size=9, ink=QUIET))
    elif all(entry.code == entry.name and not entry.caution for entry in packet.treatments):
        parts.append(paragraph("Codes are the names of the treatments.", MARGIN, room, size=9, ink=QUIET))
    elif len(packet.treatments) <= MOST_TREATMENTS:
        shown = [entry for entry in packet.treatments if entry.name or entry.caution]
        parts.append(_grid([_treatment(entry) for entry in shown], room))
    else:
        told = "Codes and their treatments stand in full on the pages Treatments."
        parts.append(paragraph(told, MARGIN, room, size=9, ink=QUIET))
    if packet.filler or packet.in_soil:
        parts += [space(4), _grid(list(_marks(packet)), room)]
    return below(*parts)


def _marks(packet: CrewPacket) -> Iterator[Entry]:
    """What else a plot of the map may show."""
    if packet.filler:
        yield _mark(f"{counted(packet.filler, 'plot')} of filler, no treatment", _crossed)
    if packet.in_soil:
        yield _mark(f"{counted(packet.in_soil, 'plot')} planted already", _framed)


def _mark(told: str, sign: Callable[[Sheet, float, float], None]) -> Entry:
    def draw(sheet: Sheet, x: float, y: float, room: float) -> None:
        sheet.box(x, y - 9, 24, 12, fill=WHITE, stroke=QUIET, weight=0.4)
        sign(sheet, x, y - 9)
        sheet.text(x + 32, y, cut(told, 9.5, room - 32), 9.5)

    return draw


def _crossed(sheet: Sheet, x: float, y: float) -> None:
    sheet.line(x, y, x + 24, y + 12, ink=HAIR)
    sheet.line(x, y + 12, x + 24, y, ink=HAIR)
    sheet.text(x + 12, y + 9, FILLER.code, 9, bold=True, align=0.5)


def _framed(sheet: Sheet, x: float, y: float) -> None:
    sheet.box(x + 2, y + 2, 20, 8, stroke=INK, weight=0.9)


def _rule(room: float) -> Piece:
    return Piece(1, lambda sheet, top: sheet.line(MARGIN, top, MARGIN + room, top, ink=HAIR, weight=0.8))


Entry = Callable[[Sheet, float, float, float], None]
"""Draws an entry at x on a baseline, given the width that it has."""


def _grid(entries: Sequence[Entry], room: float) -> Piece:
    """Entries in columns, read downwards."""
    columns = max(1, min(len(entries), int(room // COLUMN)))
    rows = -(-len(entries) // columns)
    step = room / columns

    def draw(sheet: Sheet, top: float) -> None:
        for number, entry in enumerate(entries):
            x = MARGIN + number // rows * step
            entry(sheet, x, top + 11 + number % rows * ROW, step - 12)

    return Piece(rows * ROW, draw)


def _block(block: BlockEntry, tint: Colour) -> Entry:
    def draw(sheet: Sheet, x: float, y: float, room: float) -> None:
        sheet.box(x, y - 9, 24, 12, fill=tint, stroke=INK, weight=1)
        sheet.text(x + 12, y, block.letter, 9, align=0.5)
        told = ", ".join(filter(None, (isolated(block.name), block.size, isolated(block.replicate))))
        sheet.text(x + 32, y, cut(told, 9.5, room - 32), 9.5)

    return draw


def _treatment(entry: TreatmentEntry) -> Entry:
    def draw(sheet: Sheet, x: float, y: float, room: float) -> None:
        sheet.text(x, y, entry.code, 10, bold=True)
        name = named(entry.name, entry.number) if entry.name else ""
        name += ", control" if entry.control else ""
        end = x + 38 + sheet.text(x + 38, y, cut(name, 9.5, room - 52), 9.5)
        if entry.caution:
            sheet.caution_sign(end + 4, y, 9)

    return draw
