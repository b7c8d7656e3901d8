"""Blind packets: the crew sees codes alone, the key is apart, cautions are never hidden."""

from __future__ import annotations

import io
from pathlib import Path
from typing import Any

import openpyxl
import pymupdf
import pytest
from pypdf import PdfReader

from search.field.blind import blind_codes
from search.field.packet import write_packet
from search.trial.reading import trial_from_document
from tests.field.made import LOW_MOOR, document_of

NAMES = tuple(LOW_MOOR["treatments"])
CAUTION = "Treated seed: gloves, no food on the plot"
GROUND = {**LOW_MOOR["ground"], "corner": [52.1, 0.3], "north_deg": 20}


@pytest.fixture(scope="module")
def packet(tmp_path_factory: pytest.TempPathFactory) -> tuple[Path, list[Path], dict[str, Any]]:
    """A blind packet of Low Moor: its folder, its files, its plan."""
    folder = tmp_path_factory.mktemp("blind")
    trial = trial_from_document(
        {**LOW_MOOR, "ground": GROUND, "packet": {"blind": True, "spare_bags": 2}, "about": {}}
    )
    document = document_of(trial)
    return folder, write_packet(trial, document, folder), document


def told(path: Path) -> str:
    """Everything that a file says."""
    if path.suffix == ".pdf":
        return " ".join(" ".join(page.extract_text().split()) for page in PdfReader(path).pages)
    if path.suffix == ".xlsx":
        book = openpyxl.load_workbook(io.BytesIO(path.read_bytes()))
        cells = (cell for sheet in book for row in sheet.iter_rows(values_only=True) for cell in row)
        return " ".join(str(cell) for cell in cells if cell is not None)
    return path.read_text(encoding="utf-8")


def test_no_name_leaves_the_sealed_folder(packet: tuple[Path, list[Path], dict[str, Any]]) -> None:
    """Paper, sheet, page, table and GeoJSON of the crew name no treatment and no control."""
    folder, files, _ = packet
    crew = [path for path in files if path.parent == folder]
    assert {path.name for path in crew} == {
        "packet.pdf",
        "labels.pdf",
        "packet.xlsx",
        "plots.csv",
        "plan.html",
        "plots.geojson",
    }
    for path in crew:
        text = told(path)
        assert not [name for name in NAMES if name in text], path.name
        assert "control" not in text
        assert "Office sheet" not in text


def test_the_caution_stands_wherever_its_code_stands(
    packet: tuple[Path, list[Path], dict[str, Any]],
) -> None:
    """Every bag of the treated treatment, spares too, every sheet row, and the weakening is told."""
    folder, _, document = packet
    code = dict(zip(NAMES, blind_codes(8, document["layout"]["seed"]), strict=True))["Elder"]
    plots = sum(plot["treatment"] == "Elder" for plot in document["plots"])
    labels = told(folder / "labels.pdf")
    assert labels.count(CAUTION) == plots + 2
    assert labels.count(code) == plots + 2
    paper = told(folder / "packet.pdf")
    assert paper.count(CAUTION) >= plots + 2
    assert "Blinding is weakened: 1 of 8 codes" in paper
    for name in ("packet.xlsx", "plots.csv", "plan.html"):
        assert CAUTION in told(folder / name)


def test_the_key_undoes_the_codes(packet: tuple[Path, list[Path], dict[str, Any]]) -> None:
    """Code, name and plots side by side, with the list to fill bags from; the office page is sealed too."""
    folder, files, document = packet
    assert folder / "sealed" / "key.pdf" in files
    key = told(folder / "sealed" / "key.pdf")
    for name, code in zip(NAMES, blind_codes(8, document["layout"]["seed"]), strict=True):
        plots = sorted(plot["plot"] for plot in document["plots"] if plot["treatment"] == name)
        assert f"{code} {name}" in key or f"{code} ! {name}" in key
        assert ", ".join(map(str, plots)) in key
    assert "0.42 kg" in key
    page = told(folder / "sealed" / "office.html")
    assert "Sealed." in page
    assert "Office sheet" in page


def test_codes_are_drawn_and_say_nothing() -> None:
    """All different, in no order of the file, the same for the same seed, other for another."""
    codes = blind_codes(200, 7)
    assert len(set(codes)) == 200
    assert list(codes) != sorted(codes)
    assert codes == blind_codes(200, 7)
    assert codes != blind_codes(200, 8)
    assert len(set(blind_codes(5000, 1))) == 5000


def test_labels_are_three_by_seven_or_one_a_page(tmp_path: Path) -> None:
    """30 plots and 8 spare bags fill two sheets, or 38 pages; QR codes are filled squares, not pictures."""
    for labels, pages in (("sheet", 2), ("single", 38)):
        trial = trial_from_document({**LOW_MOOR, "packet": {"labels": labels, "spare_bags": 1}})
        write_packet(trial, document_of(trial), tmp_path / labels)
        with pymupdf.open(tmp_path / labels / "labels.pdf") as pdf:
            assert len(pdf) == pages
            assert not pdf[0].get_images()
            assert len(pdf[0].get_drawings()) > 0
            words = " ".join(page.get_text() for page in pdf)
        for plot in document_of(trial)["plots"]:
            assert f"{plot['plot']}\n" in words
