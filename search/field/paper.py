"""The crew packet on paper: one PDF with cover, map, treatments and planting sheets."""

from __future__ import annotations

import io

from search.field.crew import CrewPacket
from search.field.sheets.cover import cover_pages
from search.field.sheets.lettering import cut
from search.field.sheets.mappage import map_pages
from search.field.sheets.palette import HAIR, INK, QUIET
from search.field.sheets.planting import planting_pages
from search.field.sheets.sheet import FOOT, Page, Sheet
from search.field.sheets.treatments import treatment_pages


def packet_pdf(packet: CrewPacket) -> bytes:
    """Draw a packet; the same packet gives the same bytes."""
    from reportlab.pdfgen.canvas import Canvas

    pages: list[Page] = [
        *cover_pages(packet),
        *map_pages(packet),
        *treatment_pages(packet),
        *planting_pages(packet),
    ]
    stream = io.BytesIO()
    canvas = Canvas(stream, invariant=1, pageCompression=1)
    canvas.setTitle(f"{packet.title}, {packet.mark}")
    canvas.setAuthor("")
    canvas.setSubject("planting packet")
    for number, page in enumerate(pages, start=1):
        canvas.setPageSize(page.size)
        sheet = Sheet(canvas, *page.size)
        page.draw(sheet)
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
