"""plots.csv: one row a plot, for spreadsheets."""

from __future__ import annotations

import csv
import io

from search.field.crew import CrewPacket
from search.field.randomise import Planted
from search.foundation.spreadsheets import inert


def plots_csv(packet: CrewPacket) -> str:
    """The plots in the order of their numbers.

    Text that a spreadsheet might run as a formula gets an apostrophe in front; it stays readable.
    A byte-order mark tells spreadsheets that the file is UTF-8: without it they garble every accent.
    """
    resolvable = any(block.replicate for block in packet.blocks)
    noted = any(packet.note(planted) for planted in packet.plots)
    text = io.StringIO()
    writer = csv.writer(text, quoting=csv.QUOTE_NONNUMERIC, lineterminator="\r\n")
    head = ["plot", "block", "replicate", "line", "place", "treatment", "code", "caution"]
    head += ["note"] if noted else []
    writer.writerow(name for name in head if resolvable or name != "replicate")
    for planted in packet.plots:
        place, block = planted.place, packet.blocks[planted.place.block]
        treatment = packet.held(planted)
        replicate = [inert(block.replicate)] if resolvable else []
        writer.writerow(
            [
                place.plot,
                inert(block.name),
                *replicate,
                place.line,
                place.place,
                inert(named(packet, planted)),
                inert(treatment.code),
                inert(treatment.caution),
                *([packet.note(planted)] if noted else []),
            ]
        )
    return "\N{BYTE ORDER MARK}" + text.getvalue()


def named(packet: CrewPacket, planted: Planted) -> str:
    """The treatment of a plot as a table has it: its name, its code in a blind packet, nothing for filler."""
    entry = packet.held(planted)
    return "" if planted.treatment is None else entry.name or entry.code
