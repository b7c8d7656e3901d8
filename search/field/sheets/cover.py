"""The first page: what, where, which plan, and how everybody comes home well."""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import replace

from search.field.crew import Caution, CrewPacket
from search.field.sheets.flow import Piece, below, beside, pages_of, paragraph, space
from search.field.sheets.lettering import named, width, wrapped
from search.field.sheets.palette import ACCENT, HAIR, INK, PANEL, QUIET, WARNING, WARNING_TINT
from search.field.sheets.sheet import MARGIN, PAPERS, Page, Sheet

LABELS = 108
"""Width of the column of labels; what they label starts to the right of it."""
FILLED_IN_BY_HAND = (
    "Emergency number",
    "In charge today",
    "Where help finds us",
    "Re-entry interval",
    "Harvest interval",
    "Treated surplus goes to",
)
WHOLE = 12
"""Lines of a caution that are never parted; only a longer one may run over the end of a page."""
COLUMNS = 3
GUTTER = 16
MARK_BOX = (124, 58)
MANY = 8
"""Over so many treatments under one caution, their plots are left to the signs on map and sheets."""


def cover_pages(packet: CrewPacket) -> list[Page]:
    """The cover; it runs on to another page only where cautions or details are many."""
    size = PAPERS[packet.paper]
    x, room = MARGIN + LABELS, size[0] - 2 * MARGIN - LABELS
    sections = (
        ("The trial", list(_details(packet, x, room))),
        ("Cautions", [p for caution in packet.cautions for p in _caution(caution, packet, x, room)]),
        ("Fill in before work", list(_by_hand(x, room))),
        ("How good it is", [paragraph(" ".join(packet.standing), x, room)]),
        ("For the office", [_note(text, x, room) for text in packet.office]),
    )
    pieces = [_masthead(packet, size[0] - 2 * MARGIN)]
    for label, content in sections:
        if content:
            pieces += _section(label, content)
    return pages_of(pieces, size)


def _masthead(packet: CrewPacket, room: float) -> Piece:
    free = room - MARK_BOX[0] - 24
    titles = wrapped(packet.title, 25, free, bold=True)
    size, leading = (25, 31) if len(titles) <= 2 else (15, 20)
    titles = wrapped(packet.title, size, free, bold=True)
    last = 15 + size + leading * (len(titles) - 1)
    height = max(MARK_BOX[1] + 22, last + 40)

    def draw(sheet: Sheet, top: float) -> None:
        sheet.text(sheet.left, top + 9, "Planting packet", 10, bold=True, ink=ACCENT)
        for number, line in enumerate(titles):
            sheet.text(sheet.left, top + 15 + size + leading * number, line, size, bold=True)
        sheet.text(sheet.left, top + last + 21, packet.size, 11, ink=QUIET)
        _mark(sheet, packet.mark, sheet.right - MARK_BOX[0], top)

    return Piece(height, draw)


def _mark(sheet: Sheet, mark: str, x: float, top: float) -> None:
    wide, high = MARK_BOX
    sheet.box(x, top, wide, high, fill=PANEL, stroke=INK, weight=1.2)
    sheet.text(x + wide / 2, top + 15, "mark of this plan", 8.5, ink=QUIET, align=0.5)
    sheet.text(x + wide / 2, top + 45, mark, 26, bold=True, align=0.5)


def _section(label: str, content: list[Piece]) -> list[Piece]:
    """A rule, the label at the left, and the content beside it."""

    def draw(sheet: Sheet, top: float) -> None:
        sheet.line(sheet.left, top, sheet.right, top, ink=HAIR, weight=0.8)

    rule = Piece(9, draw, clings=True)
    name = paragraph(label, MARGIN, LABELS - 14, bold=True, ink=ACCENT)
    first = replace(beside(name, content[0]), clings=content[0].clings)
    return [rule, first, *content[1:], space(11)]


def _details(packet: CrewPacket, x: float, room: float) -> Iterator[Piece]:
    entries = (*packet.about, ("issued", packet.issued), ("layout seed", str(packet.seed)))
    short = [entry for entry in entries if _fits(entry, _column(x, room, 0)[1])]
    for at in range(0, len(short), COLUMNS):
        row = enumerate(short[at : at + COLUMNS])
        yield beside(*(_detail(entry, *_column(x, room, number)) for number, entry in row))
    yield from (_detail(entry, x, room) for entry in entries if entry not in short)


def _column(x: float, room: float, number: int) -> tuple[float, float]:
    """Left edge and width of one of the columns."""
    wide = (room - (COLUMNS - 1) * GUTTER) / COLUMNS
    return x + number * (wide + GUTTER), wide


def _fits(entry: tuple[str, str], room: float) -> bool:
    key, value = entry
    return max(width(key, 8.5), width(value, 10.5)) <= room


def _detail(entry: tuple[str, str], x: float, room: float) -> Piece:
    key, value = entry
    return below(
        paragraph(key, x, room, size=8.5, leading=12, ink=QUIET),
        paragraph(value, x, room, size=10.5, leading=14, after=5),
    )


def _caution(caution: Caution, packet: CrewPacket, x: float, room: float) -> Iterator[Piece]:
    """A caution line by line on a tinted strip; one about some treatments names them, with a sign."""
    inner, left = room - 44, x + 34
    title = _concerned(caution, packet) if caution.about else caution.title
    lines = [(line, True) for line in wrapped(title, 9.5, inner, True)]
    lines += [(line, False) for line in wrapped(caution.text, 9.5, inner)]
    for number, (line, bold) in enumerate(lines):
        words = paragraph(line, left, inner, size=9.5, leading=13, bold=bold)
        first, last = number == 0, number == len(lines) - 1
        strip = _strip(words, x, room, first, last, signed=first and bool(caution.about))
        yield replace(strip, clings=not last and number < WHOLE)


def _strip(words: Piece, x: float, room: float, first: bool, last: bool, signed: bool) -> Piece:
    """A line of a caution with its share of the tinted ground, which overlaps so that no seam shows."""
    over, under = (4 if first else 0), (6 if last else 0)
    high = over + words.height + under

    def draw(sheet: Sheet, top: float) -> None:
        seam = 0 if first else 1
        sheet.box(x, top - seam, room, high + seam, fill=WARNING_TINT)
        sheet.box(x, top - seam, 3, high + seam, fill=WARNING)
        if signed:
            sheet.caution_sign(x + 11, top + over + 12, 12.5)
        words.draw(sheet, top + over)

    return Piece(high + (2 if last else 0), draw)


def _concerned(caution: Caution, packet: CrewPacket) -> str:
    """Names and plots of the treatments; codes alone where there are many, never fewer than all."""
    concerned = [packet.treatments[i] for i in caution.about]
    if len(concerned) > MANY:
        return ", ".join(treatment.code for treatment in concerned)
    names = ", ".join(
        f"{named(treatment.name, treatment.number)} ({treatment.code})" if treatment.name else treatment.code
        for treatment in concerned
    )
    plots = [str(p.place.plot) for p in packet.plots if p.treatment in caution.about]
    return f"{names}: {'plot' if len(plots) == 1 else 'plots'} {', '.join(plots)}"


def _by_hand(x: float, room: float) -> Iterator[Piece]:
    for at in range(0, len(FILLED_IN_BY_HAND), COLUMNS):
        row = enumerate(FILLED_IN_BY_HAND[at : at + COLUMNS])
        yield beside(*(_blank(label, *_column(x, room, number)) for number, label in row))


def _blank(label: str, x: float, room: float) -> Piece:
    def draw(sheet: Sheet, top: float) -> None:
        sheet.text(x, top + 9, label, 8.5, ink=QUIET)
        sheet.line(x, top + 35, x + room, top + 35, ink=INK, weight=0.7)

    return Piece(41, draw)


def _note(text: str, x: float, room: float) -> Piece:
    return paragraph(text, x, room, size=9.5, leading=13, after=3)
