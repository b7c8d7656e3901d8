"""Blocks that may stay partly empty: how many plots are planted, and when counting settles it."""

from __future__ import annotations

from typing import Any

import pytest
from hypothesis import assume, given, settings

from search.foundation.errors import Impossible
from search.trial.canonical import canonical
from search.trial.checker import broken_rules
from search.trial.limits import limits
from search.trial.reading import read_trial, trial_from_document
from search.trial.records import Trial
from search.trial.settled import settled
from search.trial.writing import trial_document
from tests.drawn import all_plans, small_trials
from tests.trial.test_schema import CONFIGS

NAMES = ["A", "B", "C", "D", "E", "F"]


def trial_with(blocks: Any, **more: Any) -> Trial:
    """Six treatments in these blocks."""
    return trial_from_document({"trial": "land", "treatments": NAMES, "blocks": blocks, **more})


@settings(max_examples=150, deadline=None)
@given(small_trials())
def test_a_settled_trial_admits_the_same_plans(trial: Trial) -> None:
    """Where counting settles the blocks, the trial and the exact one admit the same plans."""
    try:
        exact, _ = settled(trial, limits(trial))
        plans, same = set(all_plans(trial, 3000)), set(all_plans(exact, 3000))
    except (Impossible, OverflowError):
        assume(False)
    assert plans == same
    assert exact.n == trial.n
    assert exact is trial or not exact.may_be_emptier


def test_one_bay_with_room_is_settled_by_counting() -> None:
    """Six treatments of two plots, 4 + 4 + 6 plots of land: the last bay holds 12 − 8 = 4, two are filler."""
    trial = trial_with({"a": 4, "b": 4, "c": {"at_most": 6}}, plots_each=2)
    implied = limits(trial)
    assert (trial.land, trial.n) == (14, 12)
    assert implied.planted == (12, 12)
    assert implied.fewest.tolist() == implied.fullest.tolist() == [4, 4, 4]
    assert "at most 12 of 14 plots can be planted; the rest is filler" in implied.told
    exact, _ = settled(trial, implied)
    assert [block.plots for block in exact.blocks] == [4, 4, 4]


def test_two_bays_with_room_are_not_settled() -> None:
    """The two plots of filler may lie in either of two bays of six, as long as each block has four to six."""
    trial = trial_with({"a": 2, "b": {"at_most": 6}, "c": {"at_most": 6}}, plots_each=2)
    implied = limits(trial)
    assert (implied.fewest.tolist(), implied.fullest.tolist()) == ([2, 4, 4], [2, 6, 6])
    assert settled(trial, implied)[0] is trial


def test_the_even_share_is_that_of_the_plots_that_can_be_planted() -> None:
    """Six treatments cannot fill a bay of nine; filler takes at most one plot from each treatment."""
    trial = trial_with({"a": {"at_most": 9}, "b": {"at_most": 9}})
    assert {(x.least, x.most) for x in trial.treatments} == {(1, 2)}
    assert limits(trial).planted[1] == 12
    exact = trial_with({"a": 5, "b": 5, "c": 5})
    assert {(x.least, x.most) for x in exact.treatments} == {(2, 3)}


def test_every_block_of_a_number_may_stay_partly_empty() -> None:
    """The short form says it of all of them, and a block needs at least one plot."""
    trial = trial_with({"count": 3, "plots": {"at_most": 5}})
    assert [(block.plots, block.may_be_emptier) for block in trial.blocks] == [(5, True)] * 3
    assert not broken_rules(trial, ((0, 1, 2), (3, 4, 5, 0), (1, 2, 3, 4, 5)))
    assert broken_rules(trial, ((), (0, 1, 2, 3, 4), (1, 2, 3, 4, 5)))[0] == (
        "block 1 has 0 plots planted, not 1 to 5"
    )


def test_a_map_names_the_bays_that_may_stay_partly_empty() -> None:
    """Beside a map only those need naming; the document of the trial says it again, and reads back alike."""
    ground = {"rows": "aaaabb\nccccbb\n", "names": {"c": "low"}}
    trial = trial_from_document(
        {"trial": "map", "treatments": 4, "ground": ground, "blocks": {"low": {"at_most": 4}}}
    )
    assert [(x.name, x.plots, x.may_be_emptier) for x in trial.blocks] == [
        ("a", 4, False),
        ("b", 4, False),
        ("low", 4, True),
    ]
    assert trial_document(trial)["blocks"] == {"low": {"at_most": 4}}
    assert trial_from_document(trial_document(trial)) == trial


def test_a_replicate_counts_its_filler() -> None:
    """A replicate of 4 + at most 4 plots for six treatments leaves two empty, whatever the other does."""
    rules = {"replicates": {"north": ["a", "b"], "south": ["c", "d"]}}
    blocks = {"a": 4, "b": {"at_most": 4}, "c": {"at_most": 5}, "d": {"at_most": 5}}
    implied = limits(trial_with(blocks, rules=rules))
    assert implied.planted == (12, 12)
    assert (implied.fewest.tolist(), implied.fullest.tolist()) == ([4, 2, 1, 1], [4, 2, 5, 5])
    with pytest.raises(Impossible, match="replicate north has 3 plots"):
        limits(trial_with({**blocks, "a": 3, "b": {"at_most": 3}}, rules={"replicates": {"north": ["a"]}}))


DIGESTS = {
    "odd_bays": "3eec186c15c577eef26b87241ef11f826613ea009449dbf155a5f072069c7811",
    "first_trial": "b3ad6e993cb075bfef6bc70bd5bf718ee753e9881a4c5cee94091abf0b2b3567",
    "resolvable": "3fca3074b7f53b3fe57bdd7d76f0a19e0a34bd780fefd28fcd8d1be422b94334",
}


@pytest.mark.parametrize("name", DIGESTS)
def test_trials_without_these_keys_keep_their_digests(name: str) -> None:
    """Digests as they were before blocks could stay partly empty: what stores hold is found again."""
    assert canonical(read_trial(CONFIGS / f"{name}.yaml")).digest == DIGESTS[name]


def test_filler_and_planted_plots_are_part_of_the_problem() -> None:
    """Which block may be emptier counts, and how often a treatment is in its soil; which plot does not."""

    def digest(blocks: dict[str, Any], planted: dict[str, str]) -> str:
        rules = {"planted": planted} if planted else {}
        return canonical(trial_with(blocks, plots_each=[1, 3], rules=rules)).digest

    exact, emptier = {"a": 4, "b": 5}, {"a": 4, "b": {"at_most": 5}}
    assert digest(exact, {}) != digest(emptier, {})
    assert digest(exact, {"101": "A"}) == digest(exact, {"103": "B"}) != digest(exact, {})
    assert digest(exact, {"101": "A"}) != digest(exact, {"201": "A"})
    held = trial_with(exact, plots_each=[1, 3], rules={"must_hold": {"a": ["A"]}})
    assert digest(exact, {"101": "A"}) == canonical(held).digest
