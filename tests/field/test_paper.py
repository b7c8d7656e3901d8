"""The packet on paper: nothing missing, nothing too small, nothing alive."""

from __future__ import annotations

import io
import re
from typing import Any

import pymupdf
import pytest
from pypdf import PdfReader

from search.field.cautions import FIRST, USUAL
from search.field.crew import CrewPacket, crew_packet
from search.field.paper import packet_pdf
from search.trial.reading import trial_from_document
from tests.field.made import LOW_MOOR, document_of, trial_with

LONG = "the longest name that anybody ever gave to a variety of wheat " * 3
HOSTILE = {
    "<b>bold</b> & <para>": {"caution": '<a href="x">click</a>'},
    "=HYPERLINK(1)": {},
    "חיטה 12": {},
    "قمح شتوي": {},
    "小麦七号": {"amount": {"per_plot": 1.5, "unit": "<kg>"}},
    "गेहूँ": {},
    LONG.strip(): {},
    "x" * 200: {},
}


def packet_of(document: dict[str, Any]) -> CrewPacket:
    """The packet of a trial file."""
    trial = trial_from_document(document)
    return crew_packet(trial, document_of(trial))


def pages_of(packet: CrewPacket) -> list[str]:
    """The text of every page, as a general-purpose reader finds it, blanks made even."""
    reader = PdfReader(io.BytesIO(packet_pdf(packet)))
    return [" ".join(page.extract_text().split()) for page in reader.pages]


def field(columns: int, rows: int, **ground: Any) -> dict[str, Any]:
    """A trial file with a full rectangular map, cut into bays of five by three."""
    letters = "abcdefghijklmnopqrstuvwxyzABCDEFGHIJKLMNOPQRSTUVWXYZ"
    drawn = [
        "".join(letters[row // 3 * (columns // 5) + column // 5] for column in range(columns))
        for row in range(rows)
    ]
    plots = columns * rows
    return {
        "trial": "Long Drove",
        "treatments": plots // 4,
        "ground": {"rows": "\n".join(drawn), **ground},
    }


@pytest.fixture(scope="module")
def low_moor() -> CrewPacket:
    """The packet of the design document's trial."""
    return packet_of(LOW_MOOR)


def test_mark_date_and_page_stand_on_every_page(low_moor: CrewPacket) -> None:
    """A sheet that the wind takes can be put back where it belongs."""
    pages = pages_of(low_moor)
    for number, text in enumerate(pages, start=1):
        assert low_moor.mark in text
        assert "issued 2 March 2027" in text
        assert f"page {number} of {len(pages)}" in text


def test_every_plot_and_every_caution_is_told(low_moor: CrewPacket) -> None:
    """Plot numbers on map and sheets, every caution, the lines to fill in, the standing in words."""
    pages = pages_of(low_moor)
    numbers = {str(planted.place.plot) for planted in low_moor.plots}
    for kind in ("Field map", "Planting order"):
        told = " ".join(text for text in pages if kind in text)
        assert numbers <= set(re.findall(r"\d+", told))
    cover = pages[0]
    for title, text in (FIRST, *USUAL):
        assert title in cover
        assert text in cover
    assert "Elder (EL)" in cover
    assert "Treated seed: gloves, no food on the plot" in cover
    for line in ("Emergency number", "Re-entry interval", "Harvest interval", "Treated surplus goes to"):
        assert line in cover
    assert "more than 0.85 % better" in cover
    assert "layout seed 8123" in cover
    assert "no choice in the number of plots" in cover


def test_the_sheets_follow_the_walk(low_moor: CrewPacket) -> None:
    """Each pass with its direction; the plots stand in planting order."""
    told = " ".join(text for text in pages_of(low_moor) if "Planting order" in text)
    at = [told.index(f" {stop.place.plot} ") for walked in low_moor.passes for stop in walked.stops]
    assert at == sorted(at)
    assert "Pass 2 right to left on the map, 10 plots" in told


def test_codes_and_amounts_are_explained(low_moor: CrewPacket) -> None:
    """Each code beside its treatment, with what to weigh out."""
    for title in ("Treatments", "Bag list"):
        told = next(text for text in pages_of(low_moor) if text.startswith(title))
        for treatment in low_moor.treatments:
            sign = "! " if treatment.caution else ""
            assert f"{treatment.code} {sign}{treatment.name}" in told
    assert f"{low_moor.treatments[4].plots} 0 0.42 kg {low_moor.treatments[4].total}" in told


@pytest.mark.parametrize(
    "document",
    [
        LOW_MOOR,
        field(20, 15),
        field(20, 15, plot_m=[1.5, 6], gap_m=[0.3, 1], north_deg=200),
        field(20, 15, plot_m=[0.5, 40], gap_m=[30, 0]),
        field(20, 15, plot_m=[12, 1]),
        {"trial": "no map", "treatments": 10, "blocks": {f"panel {j}": 4 for j in range(40)}},
        {"trial": "long", "treatments": 120, "blocks": {"one": 120, "two": 120}},
    ],
    ids=["odd", "squares", "true to scale", "extreme", "wide plots", "no map", "long lines"],
)
def test_plot_numbers_are_at_least_ten_points(document: dict[str, Any]) -> None:
    """Every plot number is drawn once on the map, in ten points or more, and within the page.

    Measured by a general-purpose PDF reader.
    """
    packet = packet_of(document)
    wanted = {str(planted.place.plot) for planted in packet.plots}
    found: list[str] = []
    with pymupdf.open(stream=packet_pdf(packet)) as pdf:
        for page in pdf:
            if "Field map" not in page.get_text():
                continue
            for block in page.get_text("dict")["blocks"]:
                spans = [span for line in block.get("lines", ()) for span in line["spans"]]
                for span in spans:
                    assert page.rect.contains(pymupdf.Rect(span["bbox"]))
                    if span["text"] in wanted and "Bold" not in span["font"]:
                        assert span["size"] > 9.99
                        found.append(span["text"])
    assert sorted(found) == sorted(wanted)


@pytest.mark.parametrize(("paper", "size"), [("A4", (595, 842)), ("letter", (612, 792))])
def test_paper_is_as_asked_for(paper: str, size: tuple[int, int]) -> None:
    """A4 is 210 mm × 297 mm, letter 8.5 in × 11 in; the map may lie on its side."""
    packet = packet_of({**LOW_MOOR, "packet": {"paper": paper}})
    for page in PdfReader(io.BytesIO(packet_pdf(packet))).pages:
        box = (round(float(page.mediabox.width)), round(float(page.mediabox.height)))
        assert box in (size, size[::-1])


def test_hostile_names_are_printed_and_nothing_more() -> None:
    """Markup, formulas, long names and other scripts: all of it text, no link, no script, no file."""
    document = {
        "trial": "<script>alert(1)</script>",
        "treatments": HOSTILE,
        "blocks": {"bay <i>x</i>": 4, "区画": 4, "חלקה": 4, "z" * 200: 4, "e": 4},
    }
    packet = packet_of(document)
    data = packet_pdf(packet)
    told = " ".join(pages_of(packet))
    for text in ("<script>alert(1)</script>", "<b>bold</b> & <para>", "=HYPERLINK(1)", "小麦七号", "<kg>"):
        assert text in told
    assert LONG.strip() in told
    assert "treatment 6" in told
    reader = PdfReader(io.BytesIO(data))
    assert not any("/Annots" in page for page in reader.pages)
    assert not {"/OpenAction", "/AA", "/Names", "/AcroForm"} & set(reader.root_object)
    assert b"/JavaScript" not in data


def test_the_same_packet_gives_the_same_bytes(low_moor: CrewPacket) -> None:
    """Nothing of the moment of drawing enters the file."""
    assert packet_pdf(low_moor) == packet_pdf(low_moor)


def test_a_caution_about_many_treatments_loses_none() -> None:
    """Ninety treated treatments: the cover names the code of every one."""
    names = {f"Entry {i}": {"caution": "Treated seed: gloves"} for i in range(90)}
    packet = packet_of({"trial": "many", "treatments": names, "blocks": {"count": 18, "plots": 10}})
    told = " ".join(pages_of(packet)[:2])
    assert {treatment.code for treatment in packet.treatments} <= set(re.split(r"[ ,]+", told))


def test_notes_for_the_office_stay_off_when_there_are_none() -> None:
    """A plan without faults has no section for the office."""
    document = {"trial": "plain", "treatments": 6, "blocks": {"count": 5, "plots": 5}}
    assert "For the office" not in pages_of(packet_of(document))[0]
    assert trial_with().name in pages_of(packet_of(LOW_MOOR))[0]
