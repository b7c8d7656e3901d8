"""Clashing lines: they clash, every one of them is needed, and every change offered leaves a plan."""

from __future__ import annotations

import math
import time
from collections.abc import Sequence
from dataclasses import replace
from typing import Any

import pytest
from hypothesis import assume, given, settings
from hypothesis import strategies as st

from search.foundation.errors import Impossible
from search.runs.explaining import explained
from search.solvers.clash import TOGETHER, Questions, Verdict, find_clashes, smallest_clash
from search.solvers.relaxing import changes
from search.trial.lines import demands, only
from search.trial.reading import trial_from_document
from search.trial.records import Said, Trial
from tests.drawn import all_plans, small_trials
from tests.rivals import SORTS, impossible


def questions(seconds: float = 20.0) -> Questions:
    """Answers for so long."""
    return Questions(time.monotonic() + seconds)


def has_plan(trial: Trial) -> bool:
    """Whether trying every plan finds one that obeys the trial."""
    return any(True for _ in all_plans(trial, most=6_000))


@given(st.integers(1, 40), st.data())
def test_divide_and_conquer_finds_a_smallest_set(n: int, data: st.DataObject) -> None:
    """Whatever the clashing sets are, one of them is found, in the number of questions of Junker (2004)."""
    lines = [Said("keep_out", (i,), f"line {i}", i + 1) for i in range(n)]
    drawn = data.draw(st.lists(st.sets(st.integers(0, n - 1), min_size=1), min_size=1, max_size=3))
    clashes = [frozenset(numbers) for numbers in drawn]
    asked = []

    def clash(kept: Sequence[Said]) -> bool:
        asked.append(len(kept))
        numbers = {said.items[0] for said in kept}
        return any(numbers >= wanted for wanted in clashes)

    found = smallest_clash(lines, clash)
    numbers = frozenset(said.items[0] for said in found)
    assert clash(found)
    assert not any(clash([other for other in found if other != said]) for said in found)
    c = len(numbers)
    assert len(asked) - 1 - c <= 2 * c * (1 + math.ceil(math.log2(max(2, n / c)))) + 2 * c


@settings(max_examples=40, deadline=None)
@given(small_trials(most_treatments=4, most_plots=8))
def test_a_clash_is_confirmed_by_trying_every_plan(trial: Trial) -> None:
    """On tiny impossible trials no plan obeys the clashing lines, and each line left out gives one."""
    try:
        assume(not has_plan(trial))
        ask = questions()
        found = find_clashes(trial, ask)
        for clash in found:
            assert not has_plan(only(trial, clash.lines))
            assert clash.is_smallest
            for said in clash.lines:
                assert has_plan(only(trial, [other for other in clash.lines if other != said]))
        lines = [said for clash in found for said in clash.lines]
        assert len(lines) == len(set(lines))
        for clash in found:
            changes(trial, clash, [other for other in found if other is not clash], ask)
        for changed, verdict in _answers(ask):
            assert (verdict is Verdict.POSSIBLE) == has_plan(replace(trial, **changed))
    except OverflowError:
        assume(False)


def _answers(ask: Questions) -> list[tuple[dict[str, Any], Verdict]]:
    """Some of the changed trials that were asked about in full, with the answers."""
    full = [(key, verdict) for key, verdict in ask.answers.items() if not key[-1]]
    return [({"rules": key[0], "treatments": key[1], "blocks": key[2]}, verdict) for key, verdict in full[:8]]


@pytest.mark.parametrize("seed", range(len(SORTS)))
def test_the_planted_clash_is_found_among_a_hundred_rules(seed: int) -> None:
    """60 treatments, about 120 lines: the planted lines and no other, in less than 10 s of one processor."""
    drawn = impossible(seed)
    trial = trial_from_document(drawn.document)
    assert len(demands(trial)) > 100
    started = time.process_time()
    (clash,) = find_clashes(trial, questions())
    offered = changes(trial, clash, (), questions())
    assert time.process_time() - started < 10
    assert clash.is_smallest
    assert offered
    found = {said.key for said in clash.lines}
    if drawn.keys:
        assert found == drawn.keys
    else:  # 45 lines of 5 plots and 3 plots for the others ask for more than 240
        assert len(found) == 46


@pytest.mark.slow
@pytest.mark.parametrize("seed", range(5, 40))
def test_more_planted_clashes(seed: int) -> None:
    """The same for more draws."""
    test_the_planted_clash_is_found_among_a_hundred_rules(seed)


def document(**more: Any) -> dict[str, Any]:
    """Five treatments in five blocks of three."""
    return {"trial": "x", "treatments": list("ABCDE"), "blocks": {"count": 5, "plots": 3}, **more}


def told(trial_document: dict[str, Any]) -> Impossible:
    """The explanation of an impossible trial."""
    trial = trial_from_document(trial_document)
    return explained(trial, Impossible(["?"], "?"), seconds=10)


def test_two_clashes_are_told_at_once() -> None:
    """Two contradictions that have no line in common are both told, each with its own changes."""
    rules = {
        "must_hold": {"block 1": ["A"], "block 2": ["B"]},
        "keep_out": {"A": ["block 1"], "B": ["block 2"]},
    }
    clashes = told(document(rules=rules)).clashes
    assert {frozenset(key for key, _, _ in clash.lines) for clash in clashes} == {
        frozenset({"rules.must_hold.block 1[1]", "rules.keep_out.A[1]"}),
        frozenset({"rules.must_hold.block 2[1]", "rules.keep_out.B[1]"}),
    }
    assert all(len(clash.changes) == 2 for clash in clashes)


def test_the_smallest_change_comes_first() -> None:
    """A number that is one too large is offered before the rule that it clashes with."""
    clash = told(
        document(
            treatments={"A": {"plots": 4}, "B": {"plots": 2}, "C": {}, "D": {}, "E": {}},
            plots_each=[1, 5],
            rules={"never_share_block": [["A", "B"]]},
        )
    ).clashes[0]
    assert clash.changes[0].endswith("plots: [3, 4]")
    assert any(change.endswith("leave this pair out") for change in clash.changes)


def test_more_treatments_than_plots_blames_no_rule() -> None:
    """Where the blocks cannot hold the treatments at all, no line is told as the culprit."""
    (clash,) = told(document(blocks={"count": 1, "plots": 3}, rules={"keep_out": {"A": ["block 1"]}})).clashes
    assert clash.lines == ()
    assert {key for key, _, _ in clash.among} == {"treatments", "blocks"}


def test_a_clash_that_no_count_shows_is_found_by_the_solver() -> None:
    """Six treatments twice each in four blocks of three, no pair twice, are the edges of a tetrahedron.

    Each edge then misses exactly one other, its opposite. Where A, B and C must all meet D, E and F, the
    missed partners lie within two threes, which cannot be paired off; every count agrees all the same.
    """
    cross = [{"pair": [one, other], "blocks": 1} for one in "ABC" for other in "DEF"]
    rules = {"meet_at_most": 1, "meet_at_least": cross}
    trial = trial_from_document(
        document(treatments=list("ABCDEF"), blocks={"count": 4, "plots": 3}, plots_each=2, rules=rules)
    )
    ask = questions()
    assert ask.ask(trial, by_counting=True) is Verdict.UNKNOWN
    assert ask.ask(trial) is Verdict.IMPOSSIBLE
    (clash,) = find_clashes(trial, ask)
    assert clash.is_smallest
    assert (clash.cause, clash.shown_by) == (TOGETHER, "the rule solver, with two seeds")
    assert {said.sort for said in clash.lines} >= {"meet_at_least"}
    assert changes(trial, clash, (), ask)


def test_out_of_time_it_does_not_call_a_clash_smallest() -> None:
    """With no time at all the lines still clash, but nobody says that each is needed."""
    trial = trial_from_document(impossible(1).document)
    (clash,) = find_clashes(trial, questions(seconds=0))
    assert not clash.is_smallest
    assert Questions(time.monotonic() + 20).ask(only(trial, clash.lines)) is Verdict.IMPOSSIBLE
