"""The bag list: what to weigh out of each treatment, how many bags, how many of them to spare."""

from __future__ import annotations

from search.field.crew import CrewPacket, TreatmentEntry
from search.field.sheets.flow import Piece, below, pages_of, paragraph, space
from search.field.sheets.lettering import cut, readable, width
from search.field.sheets.palette import INK, QUIET, WARNING
from search.field.sheets.scripts import isolated
from search.field.sheets.sheet import MARGIN, PAPERS, Page, Sheet
from search.field.wording import counted

CODE, NAME = 0.0, 48.0
BAGS, SPARE, EACH, TOTAL, TICK = 268.0, 226.0, 138.0, 52.0, 20.0
"""Where the columns of numbers end (the last: begins), in points from the right margin."""
COLUMN = EACH - TOTAL - 8
SIZES = (10.5, 8.5, 6.5)
"""Type for an amount: the largest in which it fits its column."""


def bag_pages(packet: CrewPacket, title: str = "Bag list") -> list[Page]:
    """The bag list of a packet."""
    size = PAPERS[packet.paper]
    room = size[0] - 2 * MARGIN
    head = _head(packet, title, room)
    return pages_of([_row(entry, packet, room) for entry in packet.treatments], size, head)


def _head(packet: CrewPacket, title: str, room: float) -> Piece:
    bags = sum(entry.to_sow + packet.spare_bags for entry in packet.treatments)
    spare = (
        f", {counted(packet.spare_bags, 'spare bag')} of each treatment among them"
        if packet.spare_bags
        else ""
    )
    told = f"{counted(bags, 'bag')}{spare}. One bag a plot; tick when weighed, and when the bags are counted."
    already = f"{counted(packet.in_soil, 'plot')} planted already: no bag for those."

    def draw(sheet: Sheet, top: float) -> None:
        sheet.text(sheet.left, top + 15, title, 17, bold=True)
        sheet.text(sheet.left, top + 31, told, 9, ink=QUIET)
        if packet.in_soil:
            sheet.text(sheet.left, top + 42, already, 9, ink=QUIET)
        for x, name in ((CODE, "Code"), (NAME, "Treatment")):
            sheet.text(sheet.left + x, top + 52, name, 8.5, bold=True, ink=QUIET)
        for x, name in _columns(packet, "Bags", "Spare", "In a bag", "To weigh out"):
            sheet.text(sheet.right - x, top + 52, name, 8.5, bold=True, ink=QUIET, align=1)
        sheet.line(sheet.left, top + 57, sheet.right, top + 57, weight=0.9, ink=INK)

    return Piece(62, draw)


def _columns(
    packet: CrewPacket, bags: str, spare: str, each: str, total: str
) -> tuple[tuple[float, str], ...]:
    """Columns from the right: amounts only where the trial gives some."""
    if not any(entry.total for entry in packet.treatments):
        return (EACH, bags), (TOTAL, spare)
    return (BAGS, bags), (SPARE, spare), (EACH, each), (TOTAL, total)


def _row(entry: TreatmentEntry, packet: CrewPacket, room: float) -> Piece:
    left = MARGIN + NAME
    first = _columns(packet, "", "", "", "")[0][0]
    wide = room - NAME - first - 34
    name = isolated(entry.name) + (", control" if entry.control else "")
    parts = [space(4), paragraph(name, left, wide, size=10.5, leading=14)]
    if not readable(entry.name):
        told = f"Treatment {entry.number} of the trial; plots.csv spells its name in full."
        parts.append(paragraph(told, left, wide, size=8.5, leading=12, ink=QUIET))
    if entry.caution:
        words = paragraph(entry.caution, left, room - NAME - TOTAL, size=9, leading=12, ink=WARNING, after=1)
        parts.append(words)
    text = below(*parts, space(5))
    cells = (str(entry.to_sow + packet.spare_bags), str(packet.spare_bags), entry.per_plot, entry.total)

    def draw(sheet: Sheet, top: float) -> None:
        base = top + 14.5
        sheet.text(sheet.left + CODE, base, entry.code, 11, bold=True)
        if entry.caution:
            sheet.caution_sign(left - 15, base, 10.5)
        text.draw(sheet, top)
        for x, number in _columns(packet, *cells):
            size = next((size for size in SIZES if width(number, size) <= COLUMN), SIZES[-1])
            sheet.text(sheet.right - x, base, cut(number, size, COLUMN), size, align=1)
        for x in (TICK + 14, TICK - 6):
            sheet.box(sheet.right - x, top + 5, 11.5, 11.5, stroke=INK, weight=1)
        sheet.line(sheet.left, top + text.height, sheet.right, top + text.height)

    return Piece(text.height, draw)
