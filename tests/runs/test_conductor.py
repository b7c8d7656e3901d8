"""One run from a trial to a plan, rules and aims mixed."""

from __future__ import annotations

from dataclasses import replace

import pytest
from hypothesis import assume, given, settings

from search.efficiency.comparing import gap_percent, merit
from search.efficiency.evaluator import score
from search.efficiency.records import Bound
from search.foundation.errors import Impossible
from search.foundation.stopping import Ended, Limits, Observer, Stop
from search.runs.conductor import checked, find
from search.runs.plan import Plan, Standing
from search.trial.checker import broken_rules
from search.trial.reading import trial_from_document
from search.trial.records import Trial
from tests.drawn import all_plans, small_trials, tiny_trial


def searched(trial: Trial, moves: int = 60_000, **more: object) -> Plan:
    """A plan after so many moves."""
    return find(trial, limits=Limits(moves=moves), seed=1, workers=1, **more)  # type: ignore[arg-type]


@settings(max_examples=120, deadline=None, derandomize=True)
@given(small_trials())
def test_the_search_finds_the_best_there_is(trial: Trial) -> None:
    """On tiny trials the plan is as good as the best of all plans, within its bound, and obeys every rule.

    Where plots may stay filler, as the best of those with as few of them as can be.
    """
    try:
        plans = list(all_plans(trial, most=4000))
    except OverflowError:
        assume(False)
    if not plans:
        with pytest.raises(Impossible):
            searched(trial)
        return
    found = searched(trial)
    aim = trial.aim.kind
    assert broken_rules(trial, found.contents) == ()
    scores = {contents: score(trial, contents) for contents in plans}
    best = max(scores.values(), key=lambda one: merit(aim, one.aim, one.aim_variance))
    assert found.bound is None or gap_percent(aim, best.aim, found.bound.value) >= -1e-7
    full = max(sum(map(len, contents)) for contents in plans)
    assert sum(map(len, found.contents)) == full
    fullest = [one for contents, one in scores.items() if sum(map(len, contents)) == full]
    best = max(fullest, key=lambda one: merit(aim, one.aim, one.aim_variance))
    if aim.counts_meetings and not best.connected:
        return  # meetings are searched among connected plans
    assert found.score.aim == pytest.approx(best.aim, abs=1e-9)
    if aim.counts_meetings:
        assert found.score.average_pair_variance == pytest.approx(best.average_pair_variance, abs=1e-9)


def rules_of_all_sorts() -> Trial:
    """Unequal blocks, ranges, and several rules at once."""
    return trial_from_document(
        {
            "trial": "mixed",
            "treatments": {f"T{i:02d}": {} for i in range(1, 11)} | {"C": {"plots": [4, 6], "control": True}},
            "plots_each": [2, 4],
            "blocks": {"a": 7, "b": 7, "c": 6, "d": 6, "e": 5, "f": 5},
            "rules": {
                "never_share_block": [["T01", "T02"], ["T03", "T04", "T05"]],
                "keep_out": {"T06": ["a", "c"]},
                "must_hold": {"every block": ["C"]},
                "meet_at_least": [{"pair": ["T07", "T08"], "blocks": 1}],
                "meet_at_most": [{"pair": ["T09", "T10"], "blocks": 2}],
            },
        }
    )


@pytest.mark.parametrize("aim", ["all pairs", "overall", "against control"])
def test_any_number_of_workers_gives_the_same_plan(aim: str) -> None:
    """With a limit in moves, 1, 2 and 3 workers end at the same contents."""
    document_aim = replace(rules_of_all_sorts().aim, kind=type(rules_of_all_sorts().aim.kind)(aim))
    trial = replace(rules_of_all_sorts(), aim=document_aim)
    plans = [find(trial, limits=Limits(moves=60_000), seed=5, workers=workers) for workers in (1, 2, 3)]
    assert plans[0].contents == plans[1].contents == plans[2].contents
    assert len({plan.moves for plan in plans}) == 1
    assert plans[0].ended_by is Ended.MOVES


def test_a_kept_plan_is_never_made_worse() -> None:
    """Handed the result of a long search, a short one returns one that is at least as good."""
    trial = rules_of_all_sorts()
    long = searched(trial, moves=200_000)
    short = searched(trial, moves=100, kept=long.contents)
    assert short.score.aim >= long.score.aim - 1e-12


def test_a_kept_plan_that_breaks_a_rule_is_not_used() -> None:
    """A store that somebody wrote into cannot talk the search out of the rules."""
    trial = tiny_trial(rules={"must_hold": {"block 1": ["A", "B"]}})
    found = searched(trial, kept=((0, 2), (0, 1), (1, 2)))
    assert broken_rules(trial, found.contents) == ()


def test_an_interrupt_keeps_the_best_so_far() -> None:
    """Somebody who asks for an end gets a plan, and is told why it ended."""
    stop = Stop(Limits(seconds=60))

    class Impatient(Observer):
        def progress(self, efficiency: float, moves: int, seconds: float) -> None:
            stop.interrupt()

    found = find(rules_of_all_sorts(), limits=stop.limits, seed=1, workers=2, observer=Impatient(), stop=stop)
    assert found.ended_by is Ended.INTERRUPTED
    assert found.score.connected


def test_a_plan_above_its_bound_is_never_handed_out() -> None:
    """The worst bug there could be ends the run, and hands out nothing."""
    found = searched(tiny_trial())
    assert found.standing is Standing.BALANCED
    assert found.bound is not None
    low = Bound(found.bound.aim, found.bound.exact / 2, "wrong", {})
    with pytest.raises(RuntimeError, match="below an achieved plan"):
        checked(replace(found, bound=low))


def test_a_trial_that_cannot_be_connected_is_planned_all_the_same() -> None:
    """Six treatments in three pairs fall apart: efficiency 0, standing feasible."""
    trial = trial_from_document({"trial": "x", "treatments": 6, "blocks": {"count": 3, "plots": 2}})
    found = searched(trial)
    assert found.standing is Standing.FEASIBLE
    assert found.score.aim == 0
    assert found.score.average_pair_variance is None


def test_a_balanced_design_is_no_reason_to_stop_for_other_aims() -> None:
    """Against a control a balanced plan is not best: the search goes on, and the word is not used."""
    document = {
        "trial": "x",
        "treatments": {name: {"control": name == "A"} for name in "ABCDEFG"},
        "plots_each": [2, 6],
        "blocks": {"count": 7, "plots": 3},
        "aim": "against control",
    }
    found = searched(trial_from_document(document), moves=50_000)
    assert found.standing is not Standing.BALANCED
    plots = [sum(0 in block for block in found.contents)]
    assert plots[0] > 3


def test_a_small_case_is_proven_by_exhaustion() -> None:
    """The bounds leave a per cent for (9, 18, 2); all 16 graphs leave nothing, whoever works."""
    trial = trial_from_document({"trial": "nine", "treatments": 9, "blocks": {"count": 18, "plots": 2}})
    found = [find(trial, limits=Limits(moves=400_000), seed=1, workers=workers) for workers in (1, 2)]
    assert found[0].contents == found[1].contents
    assert found[0].standing is Standing.PROVEN_OPTIMAL
    bound = found[0].bound
    assert bound is not None
    assert bound.argument == "exhaustion"
    assert bound.certificate["multipliers"]["graphs"] == 16
    assert bound.otherwise is not None
    assert bound.otherwise.value > bound.value
    assert found[0].score.aim == pytest.approx(0.511140236, abs=1e-9)
