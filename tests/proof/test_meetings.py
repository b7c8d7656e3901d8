"""How even meetings can be."""

from __future__ import annotations

from hypothesis import given, settings

from search.foundation.errors import Impossible
from search.proof.information import information
from search.proof.meetings import blocks_shared, least_sum_of_squares, sum_of_squares
from search.trial.limits import limits
from search.trial.records import Trial
from search.trial.tables import tables
from tests.drawn import all_plans, small_trials, tiny_trial
from tests.proof.plans import fano_contents, fano_trial


def bound(trial: Trial) -> int:
    """The bound on Σ λ² of a trial."""
    return least_sum_of_squares(tables(trial), limits(trial))


def test_balanced_plan_meets_its_bound() -> None:
    """In the seven lines of seven points all 21 pairs meet once: Σ λ² = 21, and no plan is below."""
    plan = information(fano_contents(), 7)
    assert blocks_shared(plan) == (1, 1)
    assert sum_of_squares(plan) == bound(fano_trial()) == 21


def test_pairs_that_never_meet_push_others_together() -> None:
    """Three treatments in three blocks of two meet once each; if A and B never do, the others meet twice."""
    assert bound(tiny_trial()) == 3
    ranges = {"treatments": {"A": {"plots": [1, 2]}, "B": {"plots": [1, 2]}, "C": {"plots": 3}}}
    assert bound(tiny_trial(rules={"never_share_block": [["A", "B"]]}, **ranges)) == 1 + 4


@given(small_trials())
@settings(max_examples=100, deadline=None)
def test_no_plan_is_below_the_bound(trial: Trial) -> None:
    """The bound on Σ λ² holds for every plan that the trial admits, all rules mixed."""
    try:
        least = bound(trial)
        plans = list(all_plans(trial, 2000))
    except (Impossible, OverflowError):
        return
    assert all(sum_of_squares(information(contents, trial.t)) >= least for contents in plans)
