"""What is said of a trial before any search is true."""

from __future__ import annotations

from math import isclose, sqrt
from pathlib import Path
from typing import Any

import pytest
from hypothesis import assume, given, settings
from scipy.sparse.csgraph import connected_components

from search.efficiency.comparing import gap_percent
from search.efficiency.evaluator import score
from search.runs.inspection import balance, inspect
from search.trial.reading import read_trial, trial_from_document
from search.trial.records import Trial
from search.trial.tables import incidence
from tests.drawn import all_plans, small_trials, tiny_trial

CONFIGS = Path(__file__).parents[2] / "configs"


@settings(max_examples=50, deadline=None)
@given(small_trials(most_treatments=4, most_plots=8))
def test_verdict_pairs_and_connection_agree_with_every_plan(trial: Trial) -> None:
    """Tried against all plans: possible or not, pairs that never meet, "no plan can compare them"."""
    try:
        plans = list(all_plans(trial, most=4_000))
    except OverflowError:
        assume(False)
    found = inspect(trial, seconds=5)
    assert found.status == ("possible" if plans else "impossible")
    told = " ".join(found.warnings)
    for plan in plans:
        stands = incidence(plan, trial.t) > 0
        shared = stands.astype(int) @ stands.T.astype(int)
        assert not any(shared[i, j] for i, j in found.never_meeting)
        if "can compare" in told or "cannot connect" in told:
            assert connected_components(shared, directed=False)[0] > 1


@settings(max_examples=30, deadline=None)
@given(small_trials(most_treatments=4, most_plots=8))
def test_no_plan_betters_what_is_promised_at_best(trial: Trial) -> None:
    """The efficiency told as the best possible is at least that of every plan."""
    try:
        plans = list(all_plans(trial, most=500))
    except OverflowError:
        assume(False)
    assume(plans)
    hoped = inspect(trial, seconds=5).prospects
    assert hoped is not None
    if hoped.bound is not None and trial.aim.kind.value != "overall":
        for plan in plans:
            assert gap_percent(trial.aim.kind, score(trial, plan).aim, hoped.bound) >= -1e-7


def test_the_triangle_is_told_to_the_last_digit() -> None:
    """Three treatments in three blocks of two: E = 3/4, v = 4/3, one residual degree of freedom."""
    found = inspect(tiny_trial(precision={"cv_percent": 10, "mean": 5.0, "unit": "t/ha"}), seconds=5)
    hoped = found.prospects
    assert hoped is not None
    assert (found.residual_df, hoped.first, hoped.unit) == (1, 0.75, "t/ha")
    assert hoped.bound == 0.75
    assert hoped.at_best is not None
    assert hoped.with_first is not None
    assert isclose(hoped.at_best, hoped.with_first)
    # At 1 df and 5 % the critical value of Student's t is 12.706 (common tables); the power asked for comes
    # on top of it, and the standard error is s √v = 0.5 √(4/3).
    assert hoped.at_best > 12.706 * 0.5 * sqrt(4 / 3)


def with_rules(**rules: Any) -> dict[str, Any]:
    """Six treatments in six blocks of four."""
    return {"trial": "x", "treatments": list("ABCDEF"), "blocks": {"count": 6, "plots": 4}, "rules": rules}


CAUTIONS: dict[str, tuple[dict[str, Any], str, dict[str, Any]]] = {
    "few degrees of freedom": (
        {"trial": "x", "treatments": 4, "blocks": {"count": 4, "plots": 3}},
        "5 residual degrees of freedom",
        {"trial": "x", "treatments": 4, "blocks": {"count": 8, "plots": 3}},
    ),
    "too few plots to connect": (
        {"trial": "x", "treatments": 8, "blocks": {"count": 4, "plots": 2}},
        "8 plots cannot connect 8 treatments in 4 blocks: at least 11",
        {"trial": "x", "treatments": 8, "blocks": {"count": 4, "plots": 3}},
    ),
    "groups that never meet": (
        with_rules(
            keep_out={
                **{name: ["block 4", "block 5", "block 6"] for name in "AB"},
                **{name: ["block 1", "block 2", "block 3"] for name in "CDEF"},
            },
            twice_in_block=True,
        ),
        "2 groups of treatments from ever meeting, so no plan can compare them: A, B",
        with_rules(
            keep_out={
                **{name: ["block 4", "block 5", "block 6"] for name in "AB"},
                **{name: ["block 1", "block 2"] for name in "CDEF"},
            },
            twice_in_block=True,
        ),
    ),
    "large bays": (
        {"trial": "x", "treatments": 30, "blocks": {"count": 4, "plots": 21}},
        "blocks of over 20 plots",
        {"trial": "x", "treatments": 30, "blocks": {"count": 4, "plots": 20}},
    ),
    "pinned replication": (
        {**with_rules(never_share_block=[["A", "B"]]), "plots_each": [3, 5]},
        "no choice in the number of plots of A (3), B (3)",
        {**with_rules(never_share_block=[["A", "B"]]), "plots_each": [2, 5]},
    ),
    "one plot": (
        {**with_rules(), "treatments": {**{name: {} for name in "ABCDE"}, "F": {"plots": 1}}},
        "one plot only: F",
        {**with_rules(), "treatments": {**{name: {} for name in "ABCDE"}, "F": {"plots": 2}}},
    ),
    "a weak control": (
        {
            **with_rules(),
            "treatments": {**{name: {} for name in "ABCDE"}, "F": {"plots": 3, "control": True}},
            "aim": "against control",
        },
        "control with fewer plots than others, though all are compared with it: F",
        {
            **with_rules(),
            "treatments": {**{name: {} for name in "ABCDE"}, "F": {"plots": 4, "control": True}},
            "aim": "against control",
        },
    ),
}


@pytest.mark.parametrize("case", CAUTIONS)
def test_a_caution_is_told_where_it_holds_and_not_beside(case: str) -> None:
    """Each caution of the design is told before the search, and not for its boundary case."""
    document, words, boundary = CAUTIONS[case]
    assert any(words in warning for warning in inspect(trial_from_document(document), seconds=5).warnings)
    beside = inspect(trial_from_document(boundary), seconds=5).warnings
    assert not any(words.split(":")[0] in warning for warning in beside)


def test_the_impossible_example_says_what_to_relax() -> None:
    """The shipped impossible trial names its two lines and a change that serves."""
    found = inspect(read_trial(CONFIGS / "impossible.yaml"), seconds=10)
    (clash,) = found.clashes
    assert {line for _, line, _ in clash.lines} >= {7, 9}
    assert any("plots_each: [1, 8]" in change for change in clash.changes)


def test_a_balanced_size_is_told_with_its_numbers() -> None:
    """Nine treatments in twelve threes: r = 4, λ = 1, E = 3/4 (Yates 1936)."""
    trial = trial_from_document({"trial": "x", "treatments": 9, "blocks": {"count": 12, "plots": 3}})
    sentence, design = balance(trial)
    assert design is not None
    assert (design.r, design.meetings, float(design.efficiency)) == (4, 1, 0.75)
    assert "4 plots, each pair in one block" in sentence


def test_rules_can_bar_a_balanced_size() -> None:
    """In a balanced design every pair meets, so one that never may rules it out."""
    document = {"trial": "x", "treatments": 9, "blocks": {"count": 12, "plots": 3}}
    for rules, words in (
        ({"never_share_block": [["T1", "T2"]]}, "every pair meets"),
        ({"meet_at_least": [{"pair": ["T1", "T2"], "blocks": 2}]}, "fewer than a rule asks for"),
        ({"meet_at_most": 0}, "more than a rule allows"),
    ):
        names = {"treatments": [f"T{i}" for i in range(1, 10)]}
        sentence, design = balance(trial_from_document({**document, **names, "rules": rules}))
        assert design is None
        assert words in sentence


def test_the_next_balanced_size_is_named() -> None:
    """Ten treatments in threes: the fewest are 30 blocks, r = 9, λ = 2 (by the two counts)."""
    trial = trial_from_document({"trial": "x", "treatments": 10, "blocks": {"count": 10, "plots": 3}})
    found = inspect(trial, seconds=10)
    assert found.fewest is not None
    assert (found.fewest.b, found.fewest.r, found.fewest.meetings) == (30, 9, 2)


def test_an_impossible_trial_is_told_with_its_cause() -> None:
    """Five that never meet want twenty plots; eight blocks have room for eight."""
    names = ["A", "B", "C", "D", "E", "F", "G", "H"]
    trial = trial_from_document(
        {
            "trial": "x",
            "treatments": names,
            "plots_each": 4,
            "blocks": {"count": 8, "plots": 4},
            "rules": {"never_share_block": [names[:5]]},
        }
    )
    found = inspect(trial, seconds=10)
    assert found.status == "impossible"
    assert found.shown_by == "clique"
    assert "at least 20 plots" in found.causes[0]


def test_too_few_plots_to_connect_are_told() -> None:
    """Six treatments in four pairs cannot hang together: eight plots, nine are needed."""
    trial = trial_from_document({"trial": "x", "treatments": 6, "blocks": {"count": 4, "plots": 2}})
    found = inspect(trial, seconds=10)
    assert any("at least 9 are needed" in warning for warning in found.warnings)
