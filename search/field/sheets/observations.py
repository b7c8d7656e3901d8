"""Observation sheets: every plot in walking order with room to write, and no treatment to lean on."""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import replace

from search.field.crew import CrewPacket
from search.field.sheets.flow import Piece, pages_of, space
from search.field.sheets.lettering import cut
from search.field.sheets.palette import HAIR, INK, PANEL, QUIET
from search.field.sheets.scripts import isolated
from search.field.sheets.sheet import MARGIN, PAPERS, Page, Sheet
from search.field.walk import Pass, Stop

PLOT, BLOCK, FIRST = 4.0, 52.0, 128.0
"""Where the columns begin, in points from the left margin."""
COLUMNS = 4
REMARKS = 128.0
ROW = 17.0
HEAD = 104


def observation_pages(packet: CrewPacket) -> list[Page]:
    """The observation sheets of a packet."""
    size = PAPERS[packet.paper]
    room = size[0] - 2 * MARGIN
    pieces: list[Piece] = []
    for walked in packet.passes:
        pieces += _pass(packet, walked, room)
    return pages_of(pieces, size, _head(room))


def _edges(room: float) -> list[float]:
    """Left edges of the columns to fill in, and of the remarks."""
    step = (room - FIRST - REMARKS) / COLUMNS
    return [MARGIN + FIRST + step * number for number in range(COLUMNS + 1)]


def _head(room: float) -> Piece:
    edges = _edges(room)

    def draw(sheet: Sheet, top: float) -> None:
        sheet.text(sheet.left, top + 15, "Observations", 17, bold=True)
        told = "Plots without treatments, so that nobody scores what they hope to see."
        sheet.text(sheet.left, top + 31, told, 9, ink=QUIET)
        for number, name in enumerate(("observer", "date", "growth stage")):
            x = sheet.left + number * room / 3
            end = sheet.left + (number + 1) * room / 3 - 14
            start = x + sheet.text(x, top + 54, name, 8.5, ink=QUIET) + 5
            sheet.line(start, top + 56, end, top + 56, ink=INK)
        for x, name in ((PLOT, "Plot"), (BLOCK, "Block")):
            sheet.text(sheet.left + x, top + 94, name, 8.5, bold=True, ink=QUIET)
        for number, x in enumerate(edges[:-1], start=1):
            sheet.text(x + 5, top + 75, f"{number}  what, unit", 8, ink=QUIET)
        sheet.text(edges[-1] + 5, top + 94, "Remarks", 8.5, bold=True, ink=QUIET)
        for x in edges:
            sheet.line(x, top + 66, x, top + 99, ink=HAIR)
        sheet.line(sheet.left, top + 99, sheet.right, top + 99, weight=0.9, ink=INK)

    return Piece(HEAD, draw)


def _pass(packet: CrewPacket, walked: Pass, room: float) -> Iterator[Piece]:
    title = f"Pass {walked.number}" if packet.ground else isolated(packet.blocks[walked.line - 1].name)
    yield replace(_pass_head(title, walked, room), clings=True)
    again = _pass_head(f"{title}, continued", walked, room)
    filler = {planted.place.plot for planted in packet.plots if planted.treatment is None}
    for number, stop in enumerate(walked.stops):
        block = packet.blocks[stop.place.block].name
        row = _plot(stop, block, number % 2 == 1, stop.place.plot in filler, room)
        yield replace(row, context=again)
    yield space(8)


def _pass_head(title: str, walked: Pass, room: float) -> Piece:
    def draw(sheet: Sheet, top: float) -> None:
        wide = sheet.text(sheet.left + PLOT, top + 14, cut(title, 10, room / 2, bold=True), 10, bold=True)
        told = cut(walked.heading, 8.5, room - wide - 30)
        sheet.text(sheet.left + PLOT + wide + 10, top + 14, told, 8.5, ink=QUIET)
        sheet.line(sheet.left, top + 18, sheet.right, top + 18)

    return Piece(18, draw)


def _plot(stop: Stop, block: str, shaded: bool, filler: bool, room: float) -> Piece:
    edges = _edges(room)
    name = cut(block, 8.5, FIRST - BLOCK - 6)

    def draw(sheet: Sheet, top: float) -> None:
        if shaded:
            sheet.box(sheet.left, top, room, ROW, fill=PANEL)
        sheet.text(sheet.left + PLOT, top + 12.5, str(stop.place.plot), 11, bold=True)
        sheet.text(sheet.left + BLOCK, top + 12.5, name, 8.5)
        if filler:
            sheet.text(edges[0] + 5, top + 12.5, "filler: nothing to score", 8.5, ink=QUIET)
        for x in edges[-1:] if filler else edges:
            sheet.line(x, top, x, top + ROW, ink=HAIR)
        sheet.line(sheet.left, top + ROW, sheet.right, top + ROW)

    return Piece(ROW, draw)
