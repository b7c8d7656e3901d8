"""The planting sheets: every plot in planting order, pass by pass, with a box to tick."""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import replace

from search.field.crew import FILLER_TOLD, IN_SOIL_TOLD, CrewPacket, TreatmentEntry
from search.field.randomise import Planted
from search.field.sheets.flow import Piece, below, pages_of, paragraph, space
from search.field.sheets.lettering import cut, named, width
from search.field.sheets.palette import ACCENT, INK, PANEL, QUIET, WARNING
from search.field.sheets.scripts import isolated
from search.field.sheets.sheet import MARGIN, PAPERS, Page, Sheet
from search.field.walk import Pass
from search.field.wording import counted

TICK, PLOT, BLOCK, CODE, NAME = 0.0, 26.0, 76.0, 158.0, 204.0
"""Where the columns begin, in points from the left margin."""
REMARKS = 112.0
"""Width of the column for pencil notes at the right."""
HEAD = 62


def planting_pages(packet: CrewPacket) -> list[Page]:
    """The planting sheets of a packet."""
    size = PAPERS[packet.paper]
    room = size[0] - 2 * MARGIN
    pieces: list[Piece] = []
    for walked in packet.passes:
        pieces += _pass(packet, walked, room)
    return pages_of(pieces, size, _head(packet, room))


def _head(packet: CrewPacket, room: float) -> Piece:
    columns = (
        (PLOT, "Plot"),
        (BLOCK, "Block"),
        (CODE, "Code"),
        (NAME, "Caution" if packet.blind else "Treatment"),
    )

    def draw(sheet: Sheet, top: float) -> None:
        sheet.text(sheet.left, top + 15, "Planting order", 17, bold=True)
        told = "Top to bottom, as the field is walked. Tick each plot when it is sown."
        sheet.text(sheet.left, top + 31, told, 9, ink=QUIET)
        for x, name in (*columns, (room - REMARKS + 8, "Remarks")):
            sheet.text(sheet.left + x, top + 52, name, 8.5, bold=True, ink=QUIET)
        sheet.line(sheet.left, top + 57, sheet.right, top + 57, weight=0.9, ink=INK)

    return Piece(HEAD, draw)


def _pass(packet: CrewPacket, walked: Pass, room: float) -> Iterator[Piece]:
    title = f"Pass {walked.number}" if packet.ground else isolated(packet.blocks[walked.line - 1].name)
    yield replace(_pass_head(title, walked, room), clings=True)
    again = _pass_head(f"{title}, continued", walked, room)
    stood = {planted.place.plot: planted for planted in packet.plots}
    for stop in walked.stops:
        if stop.skipped:
            yield replace(_skipped(stop.skipped), clings=True, context=again)
        planted = stood[stop.place.plot]
        block = packet.blocks[stop.place.block].name
        yield replace(_plot(planted, packet.held(planted), block, room), context=again)
    yield space(12)


def _pass_head(title: str, walked: Pass, room: float) -> Piece:
    def draw(sheet: Sheet, top: float) -> None:
        sheet.box(sheet.left, top, room, 24, fill=PANEL)
        x = sheet.left + 8
        told = f"{walked.heading}, {counted(len(walked.stops), 'plot')}"
        free = room - 8 - 14 - 34 - width(told, 9.5) - 118
        x += sheet.text(x, top + 17, cut(title, 13, free, bold=True), 13, bold=True) + 14
        way = 22 if walked.to_right else -22
        sheet.arrow(x if way > 0 else x - way, top + 12.5, way, ACCENT)
        sheet.text(x + 34, top + 16.5, told, 9.5)
        sheet.text(sheet.right - 104, top + 16.5, "done at", 8.5, ink=QUIET)
        sheet.line(sheet.right - 70, top + 18, sheet.right - 8, top + 18, ink=INK)

    return Piece(26, draw)


def _skipped(places: int) -> Piece:
    def draw(sheet: Sheet, top: float) -> None:
        told = f"no plot: pass over {counted(places, 'place')}"
        sheet.text(sheet.left + PLOT, top + 11, told, 8.5, ink=QUIET)
        sheet.line(sheet.left, top + 16, sheet.right, top + 16)

    return Piece(16, draw)


def _plot(planted: Planted, entry: TreatmentEntry, block: str, room: float) -> Piece:
    left, wide = MARGIN + NAME, room - NAME - REMARKS
    parts = [space(4.5)]
    if entry.name:
        name = named(entry.name, entry.number) + (", control" if entry.control else "")
        parts.append(paragraph(name, left, wide, size=10.5, leading=13, most=2))
    if told := FILLER_TOLD if planted.treatment is None else IN_SOIL_TOLD if planted.in_soil else "":
        parts.append(paragraph(told, left, wide, size=9, leading=12, ink=QUIET, most=2))
    if entry.caution:
        words = paragraph(entry.caution, left, wide, size=8.5, leading=11, ink=WARNING, most=3, after=1.5)
        parts.append(words)
    text = below(*parts, space(4))
    where = below(space(5), paragraph(block, MARGIN + BLOCK, CODE - BLOCK - 8, size=10, leading=12, most=2))
    high = max(text.height, where.height + 4)

    def draw(sheet: Sheet, top: float) -> None:
        base = top + 15
        if planted.in_soil:  # nothing to tick: nothing is sown
            sheet.line(sheet.left + TICK + 4, top + 11, sheet.left + TICK + 13, top + 11, weight=1, ink=INK)
        else:
            sheet.box(sheet.left + TICK + 3, top + 5, 11.5, 11.5, stroke=INK, weight=1)
        sheet.text(sheet.left + PLOT, base, str(planted.place.plot), 12.5, bold=True)
        sheet.text(sheet.left + CODE, base, entry.code, 11, bold=True)
        if entry.caution:
            sheet.caution_sign(left - 15, base, 10.5)
        text.draw(sheet, top)
        where.draw(sheet, top)
        bottom = top + high
        sheet.line(sheet.left, bottom, sheet.right, bottom)
        sheet.line(sheet.right - REMARKS, top + 3, sheet.right - REMARKS, bottom - 3)

    return Piece(high, draw)
