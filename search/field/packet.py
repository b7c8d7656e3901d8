"""Everything that the crew carries, written into one folder."""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import replace
from pathlib import Path
from typing import Any

from search.field.blind import blind_codes, blinded
from search.field.crew import CrewPacket, crew_packet, with_codes
from search.field.geojson import plots_geojson
from search.field.office import OfficeSheet, office_sheet
from search.field.page import plan_html
from search.field.paper import key_pdf, labels_pdf, packet_pdf
from search.field.tables import plots_csv
from search.field.workbook import packet_xlsx
from search.foundation.documents import write_whole
from search.trial.records import Trial

SEALED = "sealed"
"""Folder for what the crew of a blind trial must not see."""


def write_packet(
    trial: Trial, document: dict[str, Any], folder: Path, *, only_missing: bool = False
) -> list[Path]:
    """Write the crew's documents; the same plan gives the same bytes.

    Parameters
    ----------
    trial : the trial
    document : its plan as in plan.json
    folder : where they go; made if it is not there
    only_missing : leave alone what is there: somebody may have written into the workbook

    Returns
    -------
    the files, the one to print first

    Raises
    ------
    BadInput : the plan does not fit the trial, or the folder cannot be written to
    """
    contents = dict(_contents(trial, document))
    for name, content in contents.items():
        if not (only_missing and (folder / name).exists()):
            write_whole(folder / name, content)
    return [folder / name for name in contents]


def _contents(trial: Trial, document: dict[str, Any]) -> Iterator[tuple[str, str | bytes]]:
    """Names and contents of the files."""
    whole = crew_packet(trial, document)
    office = office_sheet(trial, document, whole.office)
    if not trial.packet.blind:
        yield from _for_the_crew(whole, office)
        return
    yield from _for_the_crew(crew_packet(*blinded(trial, document), blind=True), None)
    codes = blind_codes(trial.t, document["layout"]["seed"])
    key = with_codes(whole, codes)
    office = replace(office, labels=codes if office.labels else ())
    yield f"{SEALED}/key.pdf", key_pdf(key)
    yield f"{SEALED}/office.html", plan_html(key, office, sealed=True)


def _for_the_crew(packet: CrewPacket, office: OfficeSheet | None) -> Iterator[tuple[str, str | bytes]]:
    yield "packet.pdf", packet_pdf(packet)
    yield "labels.pdf", labels_pdf(packet)
    yield "packet.xlsx", packet_xlsx(packet)
    yield "plots.csv", plots_csv(packet)
    yield "plan.html", plan_html(packet, office)
    geojson = plots_geojson(packet)
    if geojson is not None:
        yield "plots.geojson", geojson
