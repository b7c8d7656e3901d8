"""What stands on each plot, read from a plan file that may lie."""

from __future__ import annotations

from typing import Any

import pytest

from search.field.planshape import Document
from search.field.planted import planted_plots
from search.foundation.errors import BadInput
from tests.field.made import document_of, trial_with

COMPLETE = {"rows": "aaaaaaaa\nbbbbbbbb\ncccccccc"}
"""Three complete blocks of eight, each a line."""


@pytest.fixture(scope="module")
def document() -> Document:
    """A plan of the Low Moor trial."""
    return document_of(trial_with())


@pytest.mark.parametrize(
    ("change", "told"),
    [
        ({"plot": 999}, "does not list the plots"),
        ({"block": "bay f"}, "does not lie"),
        ({"line": 9}, "does not lie"),
        ({"treatment": "Nobody"}, "no treatment of the trial"),
    ],
)
def test_plots_must_be_those_of_the_trial(document: Document, change: Any, told: str) -> None:
    """A plan that was sealed with plots of another field is refused when its plots are read."""
    plots = [{**document["plots"][0], **change}, *document["plots"][1:]]
    with pytest.raises(BadInput, match=told):
        planted_plots(trial_with(), {**document, "plots": plots})
    with pytest.raises(BadInput, match="does not list"):
        planted_plots(trial_with(), {**document, "plots": document["plots"][1:]})
    assert len(planted_plots(trial_with(), document)) == 30


def test_a_plan_that_breaks_a_rule_is_never_printed(document: Document) -> None:
    """Two plots exchanged against the rules, or against the list of blocks, are found."""
    swapped = [dict(plot) for plot in document["plots"]]
    heather = next(plot for plot in swapped if plot["treatment"] == "Heather")
    other = next(plot for plot in swapped if plot["block"] == "bay c" and plot["treatment"] != "Dunlin")
    heather["treatment"], other["treatment"] = other["treatment"], "Heather"
    with pytest.raises(BadInput, match="holds other treatments than its plots"):
        planted_plots(trial_with(), {**document, "plots": swapped})
    blocks = {
        block: [plot["treatment"] for plot in swapped if plot["block"] == block]
        for block in document["blocks"]
    }
    with pytest.raises(BadInput, match="breaks a rule"):
        planted_plots(trial_with(), {**document, "plots": swapped, "blocks": blocks})


def test_neighbours_that_clash_are_never_printed() -> None:
    """Arlen moved within its block to a plot beside Elder, whom it must not meet, is found."""
    trial = trial_with(
        treatments=["Arlen", "Elder", "C", "D", "E", "F", "G", "H"],
        rules={"not_beside": {"pairs": [["Arlen", "Elder"]]}},
        ground=COMPLETE,
        plots_each=None,
    )
    document = document_of(trial)
    assert len(planted_plots(trial, document)) == 24
    standing = {plot["plot"]: plot["treatment"] for plot in document["plots"]}
    elder = next(plot for plot, name in standing.items() if name == "Elder")
    beside = elder + 1 if elder + 1 in standing else elder - 1
    block = {plot["plot"]: plot["block"] for plot in document["plots"]}
    arlen = next(p for p, name in standing.items() if name == "Arlen" and block[p] == block[beside])
    standing[arlen], standing[beside] = standing[beside], "Arlen"
    plots = [{**plot, "treatment": standing[plot["plot"]]} for plot in document["plots"]]
    with pytest.raises(BadInput, match="stands beside"):
        planted_plots(trial, {**document, "plots": plots})
