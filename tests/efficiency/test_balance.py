"""Balance and near-balance, decided with whole numbers."""

from __future__ import annotations

from dataclasses import replace
from fractions import Fraction

import pytest
from hypothesis import assume, given, settings

from search.efficiency.balance import (
    greatest_trace,
    is_balanced,
    least_concurrence_squares,
    near_balance,
)
from search.efficiency.evaluator import information_matrix, pair_variances
from search.efficiency.records import NearBalance
from search.trial.records import Block, Contents, Rules, Treatment, Trial
from search.trial.tables import incidence, tables
from tests.drawn import all_plans, small_trials
from tests.efficiency.plans import FANO, affine_plane, equal_trial, trial_of


@pytest.mark.parametrize(
    ("contents", "t"),
    [
        (FANO, 7),
        (affine_plane(3), 9),
        (((0, 1, 2),) * 2, 3),
        # pairs and complete blocks together: unequal sizes, yet every pair is weighed alike
        (((0, 1), (0, 2), (1, 2), (0, 1, 2)), 3),
    ],
)
def test_balanced_plans_are_recognised(contents: Contents, t: int) -> None:
    """Equal concurrences, weighed by block size, and nothing lost to repeats."""
    assert is_balanced(trial_of(contents, t), contents)


def test_a_plan_that_is_nearly_balanced_is_not_balanced() -> None:
    """One exchange away from the projective plane nothing is balanced any more."""
    contents = ((0, 1, 2), (1, 3, 4), *FANO[2:])
    trial = trial_of(contents, 7)
    assert not is_balanced(trial, contents)
    assert near_balance(trial, contents) is NearBalance.UNKNOWN


def test_equal_variances_are_not_enough() -> None:
    """Two treatments a block, each twice: equal variances, but three could have stood there."""
    contents = ((0, 0, 1, 1), (0, 0, 2, 2), (1, 1, 2, 2))
    trial = trial_of(contents, 3, rules=Rules(twice_in_block=True))
    variances = pair_variances(contents, 3)
    assert variances is not None
    assert variances[0, 1] == pytest.approx(variances[1, 2])
    assert not is_balanced(trial, contents)


@settings(max_examples=50, deadline=None)
@given(small_trials(most_plots=10))
def test_no_plan_passes_the_greatest_trace_or_falls_below_the_least_squares(trial: Trial) -> None:
    """Both limits hold for every plan of small trials, all rules mixed."""
    try:
        plans = list(all_plans(trial, 600))
    except OverflowError:
        assume(False)
    assume(plans)
    rules = tables(trial)
    trace, least = greatest_trace(rules), least_concurrence_squares(rules)
    assert trace is not None
    for contents in plans:
        assert information_matrix(contents, trial.t).trace() <= float(trace) + 1e-9
        concurrence = incidence(contents, trial.t) @ incidence(contents, trial.t).T
        squares = sum(int(concurrence[i, j]) ** 2 for j in range(trial.t) for i in range(j))
        assert least is None or squares >= least


def test_the_greatest_trace_is_n_minus_b_without_repeats() -> None:
    """tr C = n − b for every plan where nothing stands twice."""
    assert greatest_trace(tables(equal_trial(7, 7, 3))) == 14


def test_large_blocks_must_repeat() -> None:
    """Five plots for two treatments: at best 3 and 2, Σn² = 13, so 5 − 13/5 is left."""
    trial = Trial(
        "two",
        (Treatment("A", 1, 4), Treatment("B", 1, 4)),
        (Block("one", 5),),
        rules=Rules(twice_in_block=True),
    )
    assert greatest_trace(tables(trial)) == Fraction(12, 5)


def test_a_block_that_cannot_be_filled_has_no_trace() -> None:
    """Three plots for two treatments, none twice."""
    trial = replace(equal_trial(2, 1, 2), blocks=(Block("one", 3),))
    assert greatest_trace(tables(trial)) is None


def test_regular_graph_designs_are_nearly_balanced() -> None:
    """Concurrences within 1 of each other, equal r and k: the least Σλ² there is."""
    contents = ((0, 1, 2), (0, 3, 4), (1, 3, 5), (2, 4, 5))
    trial = trial_of(contents, 6)
    assert near_balance(trial, contents) is NearBalance.YES


def test_nothing_is_said_of_near_balance_where_treatments_may_repeat() -> None:
    """The total of the concurrences is not fixed there."""
    contents = ((0, 1, 2),) * 2
    trial = trial_of(contents, 3, rules=Rules(twice_in_block=True))
    assert near_balance(trial, contents) is NearBalance.UNKNOWN
