"""A trial built from the text of its problem asks for the same; a text that was tampered with is refused."""

from __future__ import annotations

import json
from random import Random
from typing import Any

import pytest
from hypothesis import given, settings

from search.efficiency.bounds import all_bounds
from search.efficiency.reference import reference_product, reference_variance
from search.foundation.errors import BadInput, Impossible
from search.trial.canonical import canonical
from search.trial.carrying import to_canonical
from search.trial.checker import broken_rules
from search.trial.limits import limits
from search.trial.reading import trial_from_document
from search.trial.rebuilding import rebuilt
from search.trial.records import AimKind, Trial
from search.trial.relations import relations
from tests.drawn import all_plans, small_trials, tiny_trial


@settings(max_examples=40, deadline=None)
@given(small_trials())
def test_the_rebuilt_trial_has_the_same_digest_and_demands(trial: Trial) -> None:
    """Digest, limits, reference and bounds are those of the trial that was once read."""
    numbering = canonical(trial)
    again = rebuilt(numbering.text, trial.aim.kind.value)
    assert canonical(again).digest == numbering.digest
    try:
        implied = limits(trial)
    except Impossible:
        with pytest.raises(Impossible):
            limits(again)
        return
    if trial.aim.kind is AimKind.OVERALL:
        assert reference_product(again) == reference_product(trial)
    else:
        assert reference_variance(again) == reference_variance(trial)
    carried = [int(implied.least[i]) for i in numbering.treatments]
    assert limits(again).least.tolist() == carried
    # their multipliers come from floats, which add up in another order, and some are sought in steps
    found = {bound.argument: bound.value for bound in all_bounds(trial, implied)}
    carried_bounds = {bound.argument: bound.value for bound in all_bounds(again, limits(again))}
    assert carried_bounds == pytest.approx(found, rel=2e-3)


@settings(max_examples=30, deadline=None)
@given(small_trials(most_treatments=4, most_plots=8))
def test_the_rebuilt_trial_admits_the_same_plans(trial: Trial) -> None:
    """Every plan of the trial, listed one by one, is a plan of the rebuilt one, and there are no others."""
    numbering = canonical(trial)
    again, carrier = rebuilt(numbering.text, trial.aim.kind.value), to_canonical(numbering)
    try:
        plans = list(all_plans(trial, most=2_000))
        others = list(all_plans(again, most=2_000))
    except OverflowError:
        return
    assert all(broken_rules(again, carrier.contents(plan)) == () for plan in plans)
    assert len(others) == len(plans)


def test_rules_of_every_kind_come_back() -> None:
    """Blocks that hold a treatment twice, shares of a replicate and limits of meetings are in the text."""
    for document in (
        {
            "treatments": 3,
            "blocks": {"a": 7, "b": 2},
            "rules": {"twice_in_block": True, "keep_out": {"T01": ["a"]}},
        },
        {
            "treatments": 4,
            "blocks": {"a": 3, "b": 2, "c": 2, "d": 3, "e": 3},
            "rules": {"replicates": {"x": ["a", "b"], "y": ["c", "d"]}, "per_replicate": {"T02": 2}},
            "plots_each": [2, 6],
        },
        {
            "treatments": 6,
            "blocks": {"count": 6, "plots": 3},
            "rules": {"meet_at_least": 1, "meet_at_most": 2},
        },
    ):
        if document.get("rules", {}).get("per_replicate"):  # type: ignore[union-attr]
            document["rules"]["twice_in_block"] = False  # type: ignore[index]
        trial = trial_from_document({"trial": "kinds", **document})
        numbering = canonical(trial)
        again = rebuilt(numbering.text, "all pairs")
        assert canonical(again).text == numbering.text
        assert again.rules.twice_in_block == trial.rules.twice_in_block
        assert relations(again).t == trial.t


def _spoiled(document: Any, rng: Random) -> Any:
    """The document with one value changed, somewhere."""
    keys = list(document) if isinstance(document, dict) else range(len(document))
    if not keys:
        return [0]
    key = rng.choice(list(keys))
    copy = dict(document) if isinstance(document, dict) else list(document)
    held = copy[key]
    if isinstance(held, dict | list) and rng.random() < 0.8:
        copy[key] = _spoiled(held, rng)
    else:
        copy[key] = rng.choice(
            [-1, 0, 1, 2, 3, 10**9, 10**30, 0.5, True, None, "1/0", "x", [], {}, [[0, 1, 2]]]
        )
    return copy


def test_a_text_that_was_changed_is_refused_or_is_another_problem() -> None:
    """Whatever is changed in a text: a clear refusal, or a trial whose text it is."""
    trial = trial_from_document(
        {
            "trial": "text",
            "treatments": {"A": {"control": True}, "B": {}, "C": {}, "D": {"plots": 2}},
            "blocks": {"x": 2, "y": 2, "z": 3, "w": 2},
            "rules": {"never_share_block": [["A", "B"]], "must_hold": {"z": ["C"]}},
            "aim": {"contrasts": {"one": {"of": {"A": 1, "D": -1}}}},
        }
    )
    head, body, _ = canonical(trial).text.split("\n")
    refused = 0
    for seed in range(400):
        spoiled = json.dumps(_spoiled(json.loads(body), Random(seed)), sort_keys=True, separators=(",", ":"))
        try:
            rebuilt(f"{head}\n{spoiled}\n", "contrasts")
        except BadInput:
            refused += 1
    assert refused > 300


@pytest.mark.parametrize(
    "text", ["", "evenfield problem 1", "evenfield problem 2\n{}\n", "evenfield problem 1\n" + "[" * 99999]
)
def test_other_texts_are_refused(text: str) -> None:
    """What is no text of a problem is refused with words."""
    with pytest.raises(BadInput, match="text of the problem"):
        rebuilt(text, "all pairs")


def test_a_text_says_which_aims_it_can_have() -> None:
    """A problem without contrasts is none for an aim that needs them, and unknown aims are refused."""
    text = canonical(tiny_trial()).text
    assert rebuilt(text, "overall").aim.kind is AimKind.OVERALL
    for aim in ("against control", "contrasts", "anything"):
        with pytest.raises(BadInput):
            rebuilt(text, aim)
