"""Labels for bags and stakes in planting order: 3 by 7 on a sheet, or one a page."""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import dataclass
from functools import partial

from search.field.crew import CrewPacket, TreatmentEntry
from search.field.sheets.lettering import cut, named, width, wrapped
from search.field.sheets.palette import HAIR, INK, QUIET, WARNING, WARNING_TINT
from search.field.sheets.qr import qr_code
from search.field.sheets.scripts import isolated
from search.field.sheets.sheet import MM, PAPERS, Page, Sheet

ACROSS, DOWN = 3, 7
SINGLE = (100 * MM, 62 * MM)
"""One label a page, for label printers."""
INSET = 5 * MM
QR = 21 * MM
LEAST_WHERE = 30.0
"""Points below which the place of a plot is not worth beginning."""
CAUTION_SIZES = (8.0, 7.0, 6.0, 5.2)


@dataclass(frozen=True, slots=True)
class Label:
    """What a label says.

    Parameters
    ----------
    head : plot number, or that it is spare
    entry : the treatment
    where : block, line and place
    turn : its place in the planting order
    coded : text of the QR code
    in_soil : whether the plot is planted already
    """

    head: str
    entry: TreatmentEntry
    where: str
    turn: str
    coded: str
    in_soil: bool = False


def label_pages(packet: CrewPacket) -> list[Page]:
    """The labels of a packet: one for each plot in planting order, then those of spare bags.

    Filler has none. What is planted already has one for its stake, which asks for no seed.
    """
    labels = list(_labels(packet))
    if packet.labels == "single":
        return [Page(SINGLE, partial(_label, packet, label, (0.0, 0.0), SINGLE)) for label in labels]
    size = PAPERS[packet.paper]
    many = ACROSS * DOWN
    return [
        Page(size, partial(_sheet, packet, labels[at : at + many], size))
        for at in range(0, len(labels), many)
    ]


def _labels(packet: CrewPacket) -> Iterator[Label]:
    stood = {planted.place.plot: planted for planted in packet.plots}
    stops = [
        (walked, stop.place.plot)
        for walked in packet.passes
        for stop in walked.stops
        if stood[stop.place.plot].treatment is not None
    ]
    for turn, (walked, plot) in enumerate(stops, start=1):
        planted = stood[plot]
        place = planted.place
        yield Label(
            head=str(plot),
            entry=packet.held(planted),
            where=f"{isolated(packet.blocks[place.block].name)}, line {place.line}, place {place.place}",
            turn=f"{turn} of {len(stops)}" + (f", pass {walked.number}" if packet.ground else ""),
            coded=f"{packet.mark} {plot}",
            in_soil=planted.in_soil,
        )
    for entry in packet.treatments:
        for bag in range(1, packet.spare_bags + 1):
            yield Label(
                "spare", entry, f"spare bag {bag} of {packet.spare_bags}", "", f"{packet.mark} {entry.code}"
            )


def _sheet(packet: CrewPacket, labels: list[Label], size: tuple[float, float], sheet: Sheet) -> None:
    wide, high = size[0] / ACROSS, size[1] / DOWN
    for column in range(1, ACROSS):
        sheet.line(column * wide, 0, column * wide, size[1], ink=HAIR)
    for row in range(1, DOWN):
        sheet.line(0, row * high, size[0], row * high, ink=HAIR)
    for at, label in enumerate(labels):
        corner = (at % ACROSS * wide, at // ACROSS * high)
        _label(packet, label, corner, (wide, high), sheet)


def _label(
    packet: CrewPacket, label: Label, corner: tuple[float, float], size: tuple[float, float], sheet: Sheet
) -> None:
    grown = min(size[0] / (70 * MM), size[1] / (42 * MM))
    grown = 1.0 if grown < 1.1 else grown
    x, top = corner[0] + INSET, corner[1] + INSET * 0.9
    room, bottom = size[0] - 2 * INSET, corner[1] + size[1] - INSET * 0.9
    code = QR * grown
    qr_code(sheet, label.coded, x + room - code + 3, top - 3, code)
    beside = room - code - 2
    entry = label.entry
    sheet.text(x, top + 18 * grown, label.head, 23 * grown, bold=True)
    base = top + 34 * grown
    wide = sheet.text(x, base, entry.code, 13 * grown, bold=True)
    if entry.caution:
        sheet.caution_sign(x + wide + 5, base, 11 * grown)
    told: tuple[str, ...] = ()
    if entry.name not in ("", entry.code):
        told = wrapped(named(entry.name, entry.number), 8.5 * grown, beside, most=2)
    for number, line in enumerate(told):
        sheet.text(x, base + (10.5 + 9.5 * number) * grown, line, 8.5 * grown)
    amount = f"{entry.per_plot}   " if entry.per_plot else ""
    amount = "no seed: planted already   " if label.in_soil else amount
    below = len(told) > 1 or width(amount, 8 * grown, True) + width(label.where, 8 * grown) > beside
    base = top + (65 if below else 58) * grown
    wide = sheet.text(x, base, cut(amount, 8 * grown, room), 8 * grown, bold=True)
    if room - wide > LEAST_WHERE:
        sheet.text(x + wide, base, cut(label.where, 8 * grown, room - wide), 8 * grown, ink=QUIET)
    foot = bottom - 1
    wide = sheet.text(x, foot, packet.mark, 8 * grown, bold=True)
    sheet.text(x + wide + 6, foot, packet.issued, 7 * grown, ink=QUIET)
    sheet.text(x + room, foot, label.turn, 7 * grown, ink=QUIET, align=1)
    if entry.caution:
        _caution(sheet, entry.caution, x, base + 4 * grown, room, foot - 10 * grown, grown)


def _caution(sheet: Sheet, text: str, x: float, top: float, room: float, bottom: float, grown: float) -> None:
    """As much of a caution as a label holds; the sign stands above it, the cover has all of it."""
    for size in (size * grown for size in CAUTION_SIZES):
        most = int((bottom - top) / (1.15 * size))
        if len(wrapped(text, size, room - 6)) <= most:
            break
    ending = " … whole caution on the cover"
    lines = list(wrapped(text, size, room - 6))
    if len(lines) > most:
        kept = lines[: most - 1]
        free = room - 6 - width(ending, size)
        lines = [*kept, cut(lines[most - 1], size, free).rstrip("…") + ending]
    sheet.box(x, top, room, len(lines) * 1.15 * size + 3, fill=WARNING_TINT)
    sheet.box(x, top, 2, len(lines) * 1.15 * size + 3, fill=WARNING)
    for number, line in enumerate(lines):
        sheet.text(x + 5, top + size * (1 + 1.15 * number), line, size, ink=INK)
