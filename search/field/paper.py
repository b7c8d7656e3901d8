"""The crew packet on paper: the packet itself, the labels, and the sealed key of a blind one."""

from __future__ import annotations

import io
from collections.abc import Sequence

from search.field.crew import CrewPacket
from search.field.sheets.bags import bag_pages
from search.field.sheets.cover import cover_pages
from search.field.sheets.key import key_pages
from search.field.sheets.labels import label_pages
from search.field.sheets.lettering import cut
from search.field.sheets.mappage import map_pages
from search.field.sheets.observations import observation_pages
from search.field.sheets.palette import HAIR, INK, QUIET
from search.field.sheets.planting import planting_pages
from search.field.sheets.sheet import FOOT, Page, Sheet
from search.field.sheets.treatments import treatment_pages


def packet_pdf(packet: CrewPacket) -> bytes:
    """Draw a packet; the same packet gives the same bytes."""
    pages = [
        *cover_pages(packet),
        *map_pages(packet),
        *treatment_pages(packet),
        *([] if packet.blind else bag_pages(packet)),
        *planting_pages(packet),
        *observation_pages(packet),
    ]
    return _pdf(packet, pages, "planting packet")


def labels_pdf(packet: CrewPacket) -> bytes:
    """Draw the labels, which go through the printer on paper of their own; each tells mark and date."""
    return _pdf(packet, label_pages(packet), "labels", footed=False)


def key_pdf(packet: CrewPacket) -> bytes:
    """Draw the sealed key of a blind packet, with the list from which its bags are filled.

    Parameters
    ----------
    packet : the packet with the true names, and the codes under which the crew knows them
    """
    pages = [*key_pages(packet), *bag_pages(packet, "Sealed bag list")]
    return _pdf(packet, pages, "sealed key")


def _pdf(packet: CrewPacket, pages: Sequence[Page], subject: str, footed: bool = True) -> bytes:
    from reportlab.pdfgen.canvas import Canvas

    stream = io.BytesIO()
    canvas = Canvas(stream, invariant=1, pageCompression=1)
    canvas.setTitle(f"{packet.title}, {packet.mark}")
    canvas.setAuthor("")
    canvas.setSubject(subject)
    for number, page in enumerate(pages, start=1):
        canvas.setPageSize(page.size)
        sheet = Sheet(canvas, *page.size)
        page.draw(sheet)
        if footed:
            _foot(sheet, packet, f"page {number} of {len(pages)}")
        canvas.showPage()
    canvas.save()
    return stream.getvalue()


def _foot(sheet: Sheet, packet: CrewPacket, page: str) -> None:
    """Mark, title, date and page number: a sheet that is lost can be put back where it belongs."""
    rule, base = sheet.page_height - FOOT, sheet.page_height - FOOT + 14
    sheet.line(sheet.left, rule, sheet.right, rule, ink=HAIR, weight=0.8)
    x = sheet.left + sheet.text(sheet.left, base, packet.mark, 11, bold=True, ink=INK) + 14
    told = f"issued {packet.issued}     {page}"
    wide = sheet.text(sheet.right, base, told, 9, ink=QUIET, align=1)
    sheet.text(x, base, cut(packet.title, 9, sheet.right - x - wide - 20), 9, ink=QUIET)
