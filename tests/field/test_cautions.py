"""Warnings for the office, each told when it is due and only then."""

from __future__ import annotations

from typing import Any

import pytest

from search.field.cautions import office_notes
from search.trial.reading import trial_from_document
from search.trial.records import Trial
from tests.field.made import document_of, trial_with

PLAIN = {"trial": "plain", "treatments": 6, "blocks": {"count": 5, "plots": 5}}


def trial(**changes: Any) -> Trial:
    """Six treatments in five blocks of five, 15 residual degrees of freedom, with some keys changed."""
    return trial_from_document({**PLAIN, **changes})


def notes(of: Trial, gap: float | None = 0.001, **score: Any) -> str:
    """All notes on a plan of a trial, some figures of its score changed."""
    document = document_of(of, gap)
    return " ".join(office_notes(of, {**document, "score": {**document["score"], **score}}))


def test_a_good_plan_needs_no_note() -> None:
    """Fifteen degrees of freedom, small blocks, four or five plots each, a small gap: silence."""
    assert notes(trial()) == ""


@pytest.mark.parametrize(("df", "told"), [(11, True), (12, False)])
def test_few_degrees_of_freedom(df: int, told: bool) -> None:
    """Fewer than 12 are told (EPPO standard PP 1/152, from memory); 12 are enough."""
    assert ("EPPO" in notes(trial(), residual_df=df)) is told


def test_a_disconnected_plan() -> None:
    """A plan that falls into parts is told first."""
    assert notes(trial(), connected=False).startswith("The plan is disconnected")


def test_a_treatment_on_one_plot() -> None:
    """It is named; one on two plots is not."""
    few = {"T": {"plots": 1}, "U": {"plots": 2}, **{name: {} for name in "ABCD"}}
    sizes = {"a": 5, "b": 5, "c": 5, "d": 4, "e": 4}
    assert "On one plot only: T. One lost plot" in notes(trial(treatments=few, blocks=sizes))


def test_a_weak_control_matters_only_where_the_aim_leans_on_it() -> None:
    """A control of three plots beside others of more is told against control, not for all pairs."""
    names: dict[str, Any] = {name: {} for name in "ABCDE"}
    names["Z"] = {"plots": 3, "control": True}
    weak = {"treatments": names, "plots_each": [4, 5]}
    assert "The control Z has 3 plots, the others 4.4" in notes(trial(aim="against control", **weak))
    assert "control" not in notes(trial(**weak))


@pytest.mark.parametrize(("size", "told"), [(20, False), (21, True)])
def test_large_blocks(size: int, told: bool) -> None:
    """Over 20 plots in a block are told; 20 are not."""
    large = trial(treatments=25, blocks={"count": 5, "plots": size})
    assert ("soil is seldom even" in notes(large)) is told


def test_a_rule_that_pins_replication() -> None:
    """Arlen and Clover never meet in six bays, so each has three plots although four were allowed."""
    assert "no choice in the number of plots of Arlen (3) and Clover (3)" in notes(trial_with())


@pytest.mark.parametrize(("gap", "told"), [(0.0099, False), (0.0101, True), (None, False)])
def test_a_wide_gap(gap: float | None, told: bool) -> None:
    """A gap above 1 % is told."""
    assert ("gap between plan and bound" in notes(trial(), gap)) is told
