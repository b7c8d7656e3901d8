"""What stands on each plot, read from a plan file that may lie."""

from __future__ import annotations

from typing import Any

import pytest

from search.field.planshape import Document
from search.field.planted import planted_plots
from search.foundation.errors import BadInput
from tests.field.made import document_of, trial_with


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
    """Two plots of one block exchanged so that a treatment stands beside itself are found."""
    trial = trial_with(rules={"not_beside": {"itself": True}})
    document = document_of(trial)
    planted_plots(trial, document)
    for one in document["plots"]:
        for other in document["plots"]:
            if one["block"] != other["block"] or one["treatment"] == other["treatment"]:
                continue
            to = {one["plot"]: other["treatment"], other["plot"]: one["treatment"]}
            plots = [{**x, "treatment": to.get(x["plot"], x["treatment"])} for x in document["plots"]]
            try:
                planted_plots(trial, {**document, "plots": plots})
            except BadInput as error:
                assert "stands beside" in str(error)
                return
    pytest.fail("no exchange made a clash")
