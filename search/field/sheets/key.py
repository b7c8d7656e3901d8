"""The key of a blind packet, on pages of its own that stay sealed."""

from __future__ import annotations

from search.field.crew import CrewPacket, TreatmentEntry
from search.field.sheets.flow import Piece, below, pages_of, paragraph, space
from search.field.sheets.palette import INK, QUIET, WARNING
from search.field.sheets.scripts import isolated
from search.field.sheets.sheet import MARGIN, PAPERS, Page, Sheet
from search.field.wording import counted

CODE, NAME, PLOTS = 0.0, 62.0, 330.0
OPENED = ("Sealed by", "Opened by", "On, and why")


def key_pages(packet: CrewPacket) -> list[Page]:
    """The key, in the order of the codes under which the crew knows the treatments."""
    size = PAPERS[packet.paper]
    room = size[0] - 2 * MARGIN
    order = sorted(range(len(packet.treatments)), key=lambda i: packet.treatments[i].code)
    plots: list[list[str]] = [[] for _ in order]
    for planted in packet.plots:
        if planted.treatment is not None:
            plots[planted.treatment].append(str(planted.place.plot))
    rows = [_row(packet.treatments[i], ", ".join(plots[i]), room) for i in order]
    return pages_of([_seal(room), *rows], size, _head(packet, len(order)))


def _head(packet: CrewPacket, many: int) -> Piece:
    def draw(sheet: Sheet, top: float) -> None:
        sheet.text(sheet.left, top + 15, "Sealed key", 17, bold=True, ink=WARNING)
        told = f"{counted(many, 'code')} of plan {packet.mark}. Not for the crew, and not for whoever scores."
        sheet.text(sheet.left, top + 31, told, 9, ink=QUIET)
        for x, name in ((CODE, "Code"), (NAME, "Treatment"), (PLOTS, "Plots")):
            sheet.text(sheet.left + x, top + 52, name, 8.5, bold=True, ink=QUIET)
        sheet.line(sheet.left, top + 57, sheet.right, top + 57, weight=0.9, ink=INK)

    return Piece(62, draw)


def _seal(room: float) -> Piece:
    told = paragraph(
        "Keep it folded and closed. Open it at once when somebody has been hurt or has swallowed something: "
        "doctors need the name. Otherwise open it after the last observation is written down.",
        MARGIN,
        room,
        size=9.5,
        leading=13,
    )

    def lines(sheet: Sheet, top: float) -> None:
        for number, name in enumerate(OPENED):
            x = sheet.left + number * room / len(OPENED)
            start = x + sheet.text(x, top + 20, name, 8.5, ink=QUIET) + 5
            sheet.line(start, top + 22, x + room / len(OPENED) - 12, top + 22, ink=INK)

    return below(space(4), told, Piece(36, lines))


def _row(entry: TreatmentEntry, plots: str, room: float) -> Piece:
    name = isolated(entry.name) + (", control" if entry.control else "")
    parts = [space(4), paragraph(name, MARGIN + NAME, PLOTS - NAME - 12, size=10.5, leading=14)]
    if entry.caution:
        words = paragraph(entry.caution, MARGIN + NAME, PLOTS - NAME - 12, size=9, leading=12, ink=WARNING)
        parts.append(words)
    text = below(*parts, space(5))
    where = below(space(5), paragraph(plots, MARGIN + PLOTS, room - PLOTS, size=9.5, leading=13), space(4))
    high = max(text.height, where.height)

    def draw(sheet: Sheet, top: float) -> None:
        sheet.text(sheet.left + CODE, top + 14.5, entry.code, 12, bold=True)
        text.draw(sheet, top)
        where.draw(sheet, top)
        sheet.line(sheet.left, top + high, sheet.right, top + high)

    return Piece(high, draw)
