"""plots.csv: whole, readable, and inert in any spreadsheet."""

from __future__ import annotations

import csv
import io
from typing import Any

import pandas as pd
import pytest
from hypothesis import given
from hypothesis import strategies as st

from search.field.crew import crew_packet
from search.field.tables import plots_csv
from search.foundation.spreadsheets import inert
from search.trial.reading import trial_from_document
from tests.field.made import LOW_MOOR, document_of, trial_with


def csv_of(document: dict[str, Any]) -> str:
    """plots.csv of a trial file."""
    trial = trial_from_document(document)
    return plots_csv(crew_packet(trial, document_of(trial)))


def test_one_row_a_plot_in_the_order_of_numbers() -> None:
    """A general-purpose reader (pandas) finds every plot with its treatment."""
    trial = trial_with()
    document = document_of(trial)
    frame = pd.read_csv(io.StringIO(plots_csv(crew_packet(trial, document)).removeprefix("\ufeff")))
    assert list(frame) == ["plot", "block", "line", "place", "treatment", "code", "caution"]
    assert frame["plot"].is_monotonic_increasing
    expected = {plot["plot"]: plot["treatment"] for plot in document["plots"]}
    assert dict(zip(frame["plot"], frame["treatment"], strict=True)) == expected
    elder = frame[frame["treatment"] == "Elder"]
    assert set(elder["caution"]) == {"Treated seed: gloves, no food on the plot"}


def test_replicates_are_told_where_there_are_any() -> None:
    """A resolvable trial has a column for the replicate."""
    document = {
        "trial": "two sets",
        "treatments": 4,
        "blocks": {"a1": 2, "a2": 2, "b1": 2, "b2": 2},
        "rules": {"replicates": {"first": ["a1", "a2"], "second": ["b1", "b2"]}},
    }
    frame = pd.read_csv(io.StringIO(csv_of(document).removeprefix("\ufeff")))
    assert list(frame["replicate"]) == ["first"] * 4 + ["second"] * 4


def test_the_file_is_marked_as_utf8() -> None:
    """A byte-order mark, so that a spreadsheet does not garble accents; line ends as CSV has them."""
    text = csv_of(LOW_MOOR)
    assert text.startswith("\ufeff")
    assert text.endswith("\r\n")


@pytest.mark.parametrize("name", ["=1+1", "+44 7", "-5 °C", "@SUM(A1)", "＝1+1", '=HYPERLINK("x")'])
def test_formulas_are_put_to_sleep(name: str) -> None:
    """An apostrophe in front, and nothing else changed."""
    treatments: dict[str, Any] = {name: {}, "A": {}, "B": {}}
    document = {"trial": "hostile", "treatments": treatments, "blocks": {"count": 3, "plots": 2}}
    rows = list(csv.DictReader(io.StringIO(csv_of(document).removeprefix("\ufeff"))))
    assert f"'{name}" in {row["treatment"] for row in rows}
    assert not any(cell[0] in "=+-@" for row in rows for cell in row.values() if cell)


@given(st.text())
def test_no_cell_begins_with_a_formula(text: str) -> None:
    """Nor does one after a semicolon, which some settings take for the end of a cell."""
    for cell in inert(text).split(";"):
        assert not cell.lstrip().startswith(("=", "+", "-", "@"))


def test_harmless_names_stay_as_they_are() -> None:
    """A sign inside a name is no formula."""
    assert inert("Low-Moor = best + last @ home") == "Low-Moor = best + last @ home"
