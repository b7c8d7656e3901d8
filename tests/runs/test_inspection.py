"""What is said of a trial before any search."""

from __future__ import annotations

from search.runs.inspection import balance, inspect
from search.trial.reading import trial_from_document


def test_a_balanced_size_is_told_with_its_numbers() -> None:
    """Nine treatments in twelve threes: r = 4, λ = 1, E = 3/4 (Yates 1936)."""
    trial = trial_from_document({"trial": "x", "treatments": 9, "blocks": {"count": 12, "plots": 3}})
    sentence, design = balance(trial)
    assert design is not None
    assert (design.r, design.meetings, float(design.efficiency)) == (4, 1, 0.75)
    assert "4 plots, each pair in 1 block" in sentence


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
    """Ten treatments in threes: the fewest are 30 blocks, r = 9, λ = 2 (common practice: a taster's limit)."""
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
