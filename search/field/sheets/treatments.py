"""The treatment pages: every code with its whole name and its plots."""

from __future__ import annotations

from search.field.crew import CrewPacket, TreatmentEntry
from search.field.sheets.flow import Piece, below, pages_of, paragraph, space
from search.field.sheets.lettering import readable
from search.field.sheets.palette import INK, QUIET, WARNING
from search.field.sheets.scripts import isolated
from search.field.sheets.sheet import MARGIN, PAPERS, Page, Sheet

CODE, NAME = 0.0, 48.0


def treatment_pages(packet: CrewPacket) -> list[Page]:
    """The treatment pages of a packet."""
    size = PAPERS[packet.paper]
    room = size[0] - 2 * MARGIN
    rows = [_row(entry, room) for entry in packet.treatments]
    return pages_of(rows, size, _head(packet.blind))


def _head(blind: bool) -> Piece:
    told = "Codes as on the map" + (", in the place of names." if blind else ".")

    def draw(sheet: Sheet, top: float) -> None:
        sheet.text(sheet.left, top + 15, "Treatments", 17, bold=True)
        sheet.text(sheet.left, top + 31, told, 9, ink=QUIET)
        for x, name in ((CODE, "Code"), (NAME, "Caution" if blind else "Treatment")):
            sheet.text(sheet.left + x, top + 52, name, 8.5, bold=True, ink=QUIET)
        sheet.text(sheet.right, top + 52, "Plots", 8.5, bold=True, ink=QUIET, align=1)
        sheet.line(sheet.left, top + 57, sheet.right, top + 57, weight=0.9, ink=INK)

    return Piece(62, draw)


def _row(entry: TreatmentEntry, room: float) -> Piece:
    left = MARGIN + NAME
    wide = room - NAME - 44
    parts = [space(4)]
    if entry.name or not entry.caution:
        name = isolated(entry.name) + (", control" if entry.control else "")
        parts.append(paragraph(name, left, wide, size=10.5, leading=14))
    if not readable(entry.name):
        told = f"Treatment {entry.number} of the trial; plots.csv spells its name in full."
        parts.append(paragraph(told, left, wide, size=8.5, leading=12, ink=QUIET))
    if entry.caution:
        parts.append(paragraph(entry.caution, left, wide, size=9, leading=12, ink=WARNING, after=1))
    text = below(*parts, space(5))

    def draw(sheet: Sheet, top: float) -> None:
        base = top + 14.5
        sheet.text(sheet.left + CODE, base, entry.code, 11, bold=True)
        if entry.caution:
            sheet.caution_sign(left - 15, base, 10.5)
        text.draw(sheet, top)
        sheet.text(sheet.right, base, str(entry.plots), 10.5, align=1)
        sheet.line(sheet.left, top + text.height, sheet.right, top + text.height)

    return Piece(text.height, draw)
