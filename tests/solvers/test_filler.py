"""Filler in the search: a treatment on one plot tells nothing, so the kernel needs to know none of it."""

from __future__ import annotations

from dataclasses import replace

import numpy as np
import pytest
from hypothesis import assume, given, settings
from hypothesis import strategies as st

from search.efficiency import evaluator
from search.efficiency.evaluator import information_matrix, pair_variances
from search.foundation.errors import Impossible
from search.foundation.stopping import Limits
from search.runs.conductor import find
from search.solvers.board import objective
from search.solvers.filler import emptied, filled, least_spare, spare_of, with_filler
from search.trial.reading import trial_from_document
from search.trial.records import Contents, Trial
from search.trial.tables import tables
from tests.drawn import small_trials
from tests.solvers.problems import filled_problem


def test_filler_changes_no_variance() -> None:
    """A path A-B, B-C and a block with B and two plots of filler: v(A, B) = 2, v(A, C) = 4, as without it."""
    contents: Contents = ((0, 1), (1, 2), (1, 3, 4))
    with_them = pair_variances(contents, 5)
    assert with_them is not None
    # Two plots of one block differ with variance 2, and variances add up along a path.
    assert with_them[0, 1] == pytest.approx(2)
    assert with_them[0, 2] == pytest.approx(4)
    without = pair_variances(emptied(contents, 3), 3)
    assert without == pytest.approx(with_them[:3, :3])


@settings(max_examples=60, deadline=None)
@given(small_trials())
def test_the_search_and_the_evaluator_value_a_plan_alike(trial: Trial) -> None:
    """With filler on the empty plots the objective is that of the plan itself, for every aim."""
    try:
        problem, contents = filled_problem(trial)
    except Impossible:
        assume(False)
    plan = emptied(contents, trial.t)
    assert objective(problem, contents) == pytest.approx(evaluator.objective(plan, trial), rel=1e-9)
    assert [len(block) for block in contents] == [block.plots for block in trial.blocks]
    assert spare_of(problem.tables, contents) == (0,) * (1 + len(trial.rules.replicates))


@settings(max_examples=60, deadline=None)
@given(st.integers(3, 6), st.integers(0, 10**6))
def test_a_plot_more_never_takes_information_away(t: int, seed: int) -> None:
    """C grows in the order of matrices with every plot that is added, whatever block it goes to."""
    random = np.random.default_rng(seed)
    contents = [random.integers(0, t, size=random.integers(1, 6)).tolist() for _ in range(3)]
    more = [list(block) for block in contents]
    more[int(random.integers(3))].append(int(random.integers(t)))
    before, after = (information_matrix(tuple(map(tuple, x)), t) for x in (contents, more))
    assert np.linalg.eigvalsh(after - before).min() > -1e-12


def test_filler_goes_where_it_may() -> None:
    """Each replicate has its own filler, on its blocks that may be emptier, once each."""
    trial = trial_from_document(
        {
            "trial": "two",
            "treatments": 4,
            "blocks": {"a": 2, "b": {"at_most": 3}, "c": {"at_most": 3}, "d": {"at_most": 3}},
            "rules": {"replicates": {"first": ["a", "b"], "second": ["c", "d"]}},
        }
    )
    rules = tables(trial)
    spare = least_spare(rules, 8)
    assert spare == (0, 1, 2)
    wide = with_filler(rules, spare)
    assert wide.exact
    assert wide.high[4:].tolist() == [[0, 1, 0, 0], [0, 0, 1, 1], [0, 0, 1, 1]]
    assert wide.share[4:].tolist() == [[1, 0], [0, 1], [0, 1]]
    assert filled(rules, ((0, 1), (2, 3), (0, 1), (2, 3))) == ((0, 1), (2, 3, 4), (0, 1, 5), (2, 3, 6))


def test_a_kept_plan_with_other_filler_is_compared_all_the_same() -> None:
    """A kept plan that leaves a plot more empty cannot start the search, and no worse plan comes back."""
    trial = trial_from_document(
        {
            "trial": "kept",
            "treatments": 4,
            "plots_each": [1, 3],
            "blocks": {"a": {"at_most": 3}, "b": {"at_most": 3}, "c": 3},
        }
    )
    kept = ((0, 1), (1, 2), (0, 2, 3))
    found = find(trial, limits=Limits(moves=20_000), seed=1, workers=1, kept=kept)
    assert sum(map(len, found.contents)) == 9
    assert found.score.aim > evaluator.score(trial, kept).aim
    assert replace(found, contents=kept).score.connected
