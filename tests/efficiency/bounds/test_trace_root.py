"""The trace root against eigenvalues."""

from __future__ import annotations

from dataclasses import replace
from fractions import Fraction

import numpy as np
import pytest
from hypothesis import given, settings

from search.efficiency.aims import weights
from search.efficiency.bounds import trace_root
from search.efficiency.bounds.problem import problem
from search.efficiency.reference import reference_variance
from search.trial.limits import limits
from search.trial.records import Aim, AimKind, Contents, Contrast, Trial
from tests.efficiency.plans import AGAINST_CONTROL, equal_trial, planted


def _by_eigenvalues(trial: Trial) -> float:
    matrix = weights(trial)
    assert matrix is not None
    values = np.linalg.eigvalsh(matrix)
    root = np.sqrt(values[values > 1e-12]).sum()
    return float(reference_variance(trial)) / (root**2 / (trial.n - trial.b))


@pytest.mark.parametrize("t", [2, 3, 5, 12])
def test_against_controls_the_closed_form_is_the_root(t: int) -> None:
    """Eigenvalues q, t + q and t of the graph of comparisons, for every number of controls."""
    for q in range(1, t + 1):
        trial = equal_trial(t, 2 * t, 2, AGAINST_CONTROL, controls=q)
        given_ = problem(trial, limits(trial))
        assert given_ is not None
        bound = trace_root.find(given_)
        assert bound is not None
        assert bound.value == pytest.approx(_by_eigenvalues(trial), rel=1e-12)


@settings(max_examples=60, deadline=None)
@given(planted())
def test_for_contrasts_the_certified_root_is_close(drawn: tuple[Trial, Contents]) -> None:
    """Never above the true root, and within a millionth of it; also for dependent contrasts."""
    trial = drawn[0]
    pairs = [(0, 1), (1, 2), (0, 2)]
    contrasts = tuple(
        Contrast(f"{i}-{j}", Fraction(weight), ((i, Fraction(1)), (j, Fraction(-1))))
        for weight, (i, j) in enumerate(pairs, start=1)
    )
    if trial.aim.kind is not AimKind.CONTRASTS:
        trial = replace(trial, aim=Aim(AimKind.CONTRASTS, contrasts))
    if trial.rules.twice_in_block:
        return
    given_ = problem(trial, limits(trial))
    if given_ is None:
        return
    bound = trace_root.find(given_)
    assert bound is not None
    exact = _by_eigenvalues(trial)
    assert exact * (1 - 1e-12) <= bound.value <= exact * (1 + 1e-6)


def test_it_applies_where_contrasts_count_unequally() -> None:
    """Not to aims that treat all pairs alike, and not to more contrasts than can be checked exactly."""
    trial = equal_trial(5, 5, 2)
    assert not trace_root.applies(trial)
    contrast = Contrast("x", Fraction(1), ((0, Fraction(1)), (1, Fraction(-1))))
    for number, expected in ((40, True), (41, False)):
        aim = Aim(AimKind.CONTRASTS, (contrast,) * number)
        assert trace_root.applies(replace(trial, aim=aim)) is expected
