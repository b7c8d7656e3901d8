"""Replications without blocks, against trying every replication."""

from __future__ import annotations

from fractions import Fraction
from math import prod

import pytest
from hypothesis import assume, given, settings

from search.proof import aims, reference
from search.proof.records import Refuted
from search.trial.reading import trial_from_document
from search.trial.records import AimKind, Trial
from tests.drawn import small_trials, tiny_trial
from tests.proof.plans import replications, weight_matrix


@given(small_trials())
@settings(deadline=None)
def test_references_are_the_best_of_all_replications(trial: Trial) -> None:
    """Least mean variance, greatest determinant and least worst pair are those of an exhaustive search."""
    every = replications(trial)
    if not every:
        return
    if trial.aim.kind is not AimKind.OVERALL:
        weights = aims.weights(trial)
        best = min(sum((w / x for w, x in zip(weights, r, strict=True)), Fraction(0)) for r in every)
        assert reference.least_mean_variance(trial, weights) == best
    assert reference.best_determinant(trial) == Fraction(max(map(prod, every)) * trial.t, trial.n)
    worst = min(sum(Fraction(1, x) for x in sorted(r)[:2]) for r in every)
    assert reference.least_worst_pair(trial) == worst


@given(small_trials())
@settings(deadline=None)
def test_weights_are_the_diagonal_of_the_aim(trial: Trial) -> None:
    """The weights are the diagonal of W, summed comparison by comparison."""
    assume(trial.aim.kind is not AimKind.OVERALL)
    plain = weight_matrix(trial).diagonal()
    assert [float(w) for w in aims.weights(trial)] == pytest.approx(list(plain))


def test_control_gets_more_plots_without_blocks() -> None:
    """Against one control of 5 treatments on 16 plots the best replication is 5 and 3, 3, 3, 2 (by hand)."""
    names = {"C": {"control": True, "plots": [1, 9]}} | {x: {"plots": [1, 9]} for x in "vwxy"}
    trial = trial_from_document(
        {"trial": "c", "treatments": names, "blocks": {"count": 4, "plots": 4}, "aim": "against control"}
    )
    found = reference.least_mean_variance(trial, aims.weights(trial))
    assert found == Fraction(1, 5) + Fraction(3, 4) * Fraction(1, 3) + Fraction(1, 4) * Fraction(1, 2)


def test_refuses_ranges_that_do_not_add_up() -> None:
    """Stated ranges that cannot use every plot have no reference; one that can does."""
    trial = tiny_trial(plots_each=3)
    with pytest.raises(Refuted, match="cannot sum"):
        reference.least_mean_variance(trial, aims.weights(trial))
    with pytest.raises(Refuted, match="cannot sum"):
        reference.least_worst_pair(tiny_trial(plots_each=1))
    assert reference.least_worst_pair(tiny_trial(plots_each=2)) == 1
