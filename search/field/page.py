"""plan.html: one page that needs nothing else, with the map, and the office sheet below it."""

from __future__ import annotations

from pathlib import Path

from search.field.crew import CrewPacket
from search.field.office import OfficeSheet
from search.field.pagemap import page_map
from search.field.sheets.palette import hex_of
from search.field.sheets.tints import block_tints
from search.foundation.pages import template

TEMPLATES = Path(__file__).parent / "templates"


def plan_html(packet: CrewPacket, office: OfficeSheet | None, sealed: bool = False) -> str:
    """Draw the page.

    Parameters
    ----------
    packet : what the crew reads
    office : what the office reads; None leaves it out
    sealed : the page tells what a blind packet hides
    """
    tints = [hex_of(tint) for tint in block_tints(packet)]
    return template(TEMPLATES / "plan.html.j2").render(
        packet=packet,
        map=page_map(packet),
        office=office,
        blocks=list(zip(packet.blocks, tints, strict=True)),
        sealed=sealed,
    )
