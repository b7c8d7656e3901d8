"""The workbook, read back by a general-purpose library."""

from __future__ import annotations

import io
from typing import Any

import openpyxl
import pytest

from search.field.crew import crew_packet
from search.field.workbook import DATA, STATES, packet_xlsx
from search.trial.reading import trial_from_document
from tests.field.made import LOW_MOOR, document_of
from tests.field.test_paper import HOSTILE


def book_of(document: dict[str, Any]) -> Any:
    """The workbook of a trial file."""
    trial = trial_from_document(document)
    return openpyxl.load_workbook(io.BytesIO(packet_xlsx(crew_packet(trial, document_of(trial)))))


@pytest.fixture(scope="module")
def low_moor() -> Any:
    """The workbook of the design document's trial."""
    return book_of(LOW_MOOR)


def test_every_plot_has_its_row_and_its_columns_to_fill_in(low_moor: Any) -> None:
    """Thirty rows under a frozen, filtered head; mark and plot number stand in each."""
    sheet = low_moor["Plots"]
    head = [cell.value for cell in sheet[1]]
    assert head[-len(DATA) :] == list(DATA)
    rows = [dict(zip(head, row, strict=True)) for row in sheet.iter_rows(min_row=2, values_only=True)]
    assert len(rows) == 30
    assert [row["plot"] for row in rows] == sorted(row["plot"] for row in rows)
    assert len({row["mark"] for row in rows}) == 1
    assert all(row[name] is None for row in rows for name in DATA)
    assert sheet.freeze_panes == "B2"
    assert sheet.auto_filter.ref.startswith("A1:")


def test_columns_to_fill_in_refuse_what_cannot_be_meant(low_moor: Any) -> None:
    """A list of states, dates, numbers; and nothing else is checked."""
    rules = low_moor["Plots"].data_validations.dataValidation
    assert sorted(rule.type for rule in rules) == ["date", "decimal", "decimal", "decimal", "list"]
    states = next(rule for rule in rules if rule.type == "list")
    assert states.formula1.strip('"').split(",") == list(STATES)
    assert all(rule.showErrorMessage and rule.error for rule in rules)
    assert {str(rule.sqref).split(":")[0][-1] for rule in rules} == {"2"}


def test_the_map_is_coloured_and_whole(low_moor: Any) -> None:
    """Every plot number stands once on the map, blocks in their tints, bold where one ends."""
    cells = [cell for row in low_moor["Map"]["A1:L3"] for cell in row if cell.value]
    assert len(cells) == 30
    assert len({cell.value.split("\n")[0] for cell in cells}) == 30
    assert len({cell.fill.fgColor.rgb for cell in cells}) == 6
    assert {cell.border.left.style for cell in cells} == {"medium", "dotted"}


def test_bags_and_key(low_moor: Any) -> None:
    """What to weigh out of each treatment, and each code beside its name."""
    bags = {row[1]: row for row in low_moor["Bags"].iter_rows(min_row=2, values_only=True)}
    assert bags["Elder"][4] == "0.42 kg"
    key = {row[0]: row[1] for row in low_moor["Key"].iter_rows(min_row=2, max_row=9, values_only=True)}
    assert key["DU"] == "Dunlin, control"


def test_hostile_names_stay_text() -> None:
    """Formulas, links, markup and other scripts are strings, never formulas or links."""
    names = {**HOSTILE, "https://example.org/x": {}, "=1+1": {}, "+44 20": {}, "@SUM(1)": {}, "1e5": {}}
    book = book_of(
        {"trial": "=cmd|' /C calc'!A0 & more", "treatments": names, "blocks": {"=a": 7, "b": 7, "c": 7}}
    )
    found = set()
    for sheet in book:
        for row in sheet.iter_rows():
            for cell in row:
                assert cell.data_type != "f"
                assert cell.hyperlink is None
                found.add(cell.value)
    assert {"=1+1", "https://example.org/x", "@SUM(1)", "1e5", "=a", "小麦七号"} <= found


def test_the_same_packet_gives_the_same_bytes() -> None:
    """Nothing of the moment of writing enters the file."""
    trial = trial_from_document(LOW_MOOR)
    packet = crew_packet(trial, document_of(trial))
    assert packet_xlsx(packet) == packet_xlsx(packet)
