"""Everything that the crew carries, written into one folder."""

from __future__ import annotations

from pathlib import Path
from typing import Any

from search.field.blind import blind_codes, blinded
from search.field.crew import crew_packet
from search.field.paper import key_pdf, labels_pdf, packet_pdf
from search.field.tables import plots_csv
from search.field.workbook import packet_xlsx
from search.foundation.documents import write_whole
from search.trial.records import Trial

SEALED = "sealed"
"""Folder for what the crew of a blind trial must not see."""


def write_packet(trial: Trial, document: dict[str, Any], folder: Path) -> list[Path]:
    """Write the crew's documents; the same plan gives the same bytes.

    Parameters
    ----------
    trial : the trial
    document : its plan as in plan.json
    folder : where they go; made if it is not there

    Returns
    -------
    the files, the one to print first

    Raises
    ------
    BadInput : the plan does not fit the trial, or the folder cannot be written to
    """
    whole = crew_packet(trial, document)
    packet, codes = whole, ()
    if trial.packet.blind:
        codes = blind_codes(trial.t, document["layout"]["seed"])
        packet = crew_packet(*blinded(trial, document), blind=True)
    contents: dict[str, str | bytes] = {
        "packet.pdf": packet_pdf(packet),
        "labels.pdf": labels_pdf(packet),
        "plots.csv": plots_csv(packet),
        "packet.xlsx": packet_xlsx(packet),
    }
    if codes:
        contents[f"{SEALED}/key.pdf"] = key_pdf(whole, codes)
    for name, content in contents.items():
        write_whole(folder / name, content)
    return [folder / name for name in contents]
