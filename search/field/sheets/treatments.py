"""The treatment pages: every code with its whole name, its plots and what to weigh out."""

from __future__ import annotations

from search.field.crew import CrewPacket, TreatmentEntry
from search.field.sheets.flow import Piece, below, pages_of, paragraph, space
from search.field.sheets.lettering import cut, readable
from search.field.sheets.palette import INK, QUIET, WARNING
from search.field.sheets.scripts import isolated
from search.field.sheets.sheet import MARGIN, PAPERS, Page, Sheet
from search.field.wording import counted

CODE, NAME = 0.0, 48.0
PLOTS, EACH, TOTAL, TICK = 200.0, 116.0, 26.0, 14.0
"""Where the columns of numbers end (the last: begins), in points from the right margin."""


def treatment_pages(packet: CrewPacket) -> list[Page]:
    """The treatment pages of a packet."""
    size = PAPERS[packet.paper]
    room = size[0] - 2 * MARGIN
    weighed = any(entry.total for entry in packet.treatments)
    rows = [_row(entry, weighed, room) for entry in packet.treatments]
    return pages_of(rows, size, _head(packet, weighed, room))


def _head(packet: CrewPacket, weighed: bool, room: float) -> Piece:
    told = "Codes as on the map."
    if weighed:
        spare = packet.spare_bags
        more = f", and {counted(spare, 'spare bag')} of each" if spare else ""
        told += f" To weigh out: plots times amount{more}. Tick when weighed."

    def draw(sheet: Sheet, top: float) -> None:
        sheet.text(sheet.left, top + 15, "Treatments", 17, bold=True)
        sheet.text(sheet.left, top + 31, told, 9, ink=QUIET)
        for x, name in ((CODE, "Code"), (NAME, "Treatment")):
            sheet.text(sheet.left + x, top + 52, name, 8.5, bold=True, ink=QUIET)
        for x, name in _numbers(weighed, "Plots", "A plot", "To weigh out"):
            sheet.text(sheet.right - x, top + 52, name, 8.5, bold=True, ink=QUIET, align=1)
        sheet.line(sheet.left, top + 57, sheet.right, top + 57, weight=0.9, ink=INK)

    return Piece(62, draw)


def _numbers(weighed: bool, plots: str, each: str, total: str) -> tuple[tuple[float, str], ...]:
    """Columns from the right: what to weigh out only where the trial says how much."""
    if not weighed:
        return ((0.0, plots),)
    return (PLOTS, plots), (EACH, each), (TOTAL, total)


def _row(entry: TreatmentEntry, weighed: bool, room: float) -> Piece:
    left = MARGIN + NAME
    wide = room - NAME - (PLOTS + 34 if weighed else 44)
    name = isolated(entry.name) + (", control" if entry.control else "")
    parts = [space(4), paragraph(name, left, wide, size=10.5, leading=14)]
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
        for x, number in _numbers(weighed, str(entry.plots), entry.per_plot, entry.total):
            sheet.text(sheet.right - x, base, cut(number, 10.5, EACH - TOTAL - 10), 10.5, align=1)
        if entry.total:
            sheet.box(sheet.right - TICK, top + 5, 11.5, 11.5, stroke=INK, weight=1)
        sheet.line(sheet.left, top + text.height, sheet.right, top + text.height)

    return Piece(text.height, draw)
