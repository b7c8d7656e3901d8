"""The tint of each block on the map, the same on paper, in the sheet and on the page."""

from __future__ import annotations

from functools import lru_cache

from search.field.crew import CrewPacket
from search.field.sheets.palette import Colour, tints_for


@lru_cache(maxsize=8)
def block_tints(packet: CrewPacket) -> tuple[Colour, ...]:
    """A tint for each block, unlike those of the blocks beside it."""
    at = {(planted.place.row, planted.place.column): planted.place.block for planted in packet.plots}
    neighbours = [
        (block, at[beyond])
        for (row, column), block in at.items()
        for beyond in ((row + 1, column), (row, column + 1))
        if beyond in at and at[beyond] != block
    ]
    return tints_for(len(packet.blocks), neighbours)
