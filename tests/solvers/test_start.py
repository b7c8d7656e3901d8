"""A first plan: always within the rules, and "impossible" only where there is none."""

from __future__ import annotations

import time
from dataclasses import replace

import pytest
from hypothesis import assume, given, settings

from search.foundation.errors import Impossible
from search.solvers.compiled import warm_up
from search.solvers.feasibility import decide
from search.solvers.start import feasible_start
from search.trial.checker import broken_rules
from search.trial.limits import limits
from search.trial.reading import trial_from_document
from search.trial.records import Trial
from search.trial.tables import tables
from tests.drawn import all_plans, small_trials
from tests.ruled import hundred


@settings(max_examples=150, deadline=None)
@given(small_trials())
def test_the_verdict_agrees_with_trying_every_plan(trial: Trial) -> None:
    """A plan is found exactly where one exists, by builder or solver, with no more filler than it needs."""
    try:
        most = max((sum(map(len, plan)) for plan in all_plans(trial)), default=0)
    except OverflowError:
        assume(False)
    try:
        implied = limits(trial)
        rules = replace(tables(trial), least=implied.least, most=implied.most)
        contents, _ = feasible_start(trial, rules, implied, seed=1, seconds=20)
        solved = decide(rules, implied, seed=1, seconds=20)
    except Impossible:
        assert not most
        return
    assert broken_rules(trial, contents) == ()
    assert broken_rules(trial, solved) == ()
    assert sum(map(len, contents)) == sum(map(len, solved)) == most


def test_a_hundred_treatments_with_rules_start_at_once() -> None:
    """The greedy builder serves a large resolvable trial with treatments that never meet."""
    blocks = [f"block {j}" for j in range(1, 61)]
    document = {
        "trial": "large",
        "treatments": 100,
        "blocks": {"count": 60, "plots": 10},
        "rules": {
            "replicates": {f"r{g}": blocks[10 * g : 10 * g + 10] for g in range(6)},
            "never_share_block": [["T001", "T002"], ["T003", "T004", "T007"]],
        },
    }
    trial = trial_from_document(document)
    implied = limits(trial)
    contents, where_from = feasible_start(trial, tables(trial), implied, seed=1, seconds=20)
    assert where_from == "greedy start"
    assert broken_rules(trial, contents) == ()


@pytest.mark.parametrize("seed", range(20))
def test_a_hundred_treatments_with_fifty_rules_start_within_two_seconds(seed: int) -> None:
    """Where the builder gets stuck its plan is mended: seconds of the processor, kernels loaded."""
    trial = hundred(seed)
    implied = limits(trial)
    rules = replace(tables(trial), least=implied.least, most=implied.most)
    warm_up()
    began = time.thread_time()
    contents, where_from = feasible_start(trial, rules, implied, seed=1, seconds=20)
    assert time.thread_time() - began < 2
    assert where_from in ("greedy start", "greedy start, mended")
    assert broken_rules(trial, contents) == ()


def test_the_solver_finds_a_projective_plane() -> None:
    """Thirteen treatments in fours, no pair twice: the plane of order 3 (Fisher and Yates, Table XVII)."""
    document = {
        "trial": "plane",
        "treatments": 13,
        "blocks": {"count": 13, "plots": 4},
        "rules": {"meet_at_most": 1},
    }
    trial = trial_from_document(document)
    implied = limits(trial)
    contents, _ = feasible_start(trial, tables(trial), implied, seed=1, seconds=20)
    assert broken_rules(trial, contents) == ()
