"""The weights of every aim, in floats and exactly."""

from __future__ import annotations

from fractions import Fraction

import numpy as np
import pytest
from hypothesis import given, settings

from search.efficiency.aims import SENTENCES, exact_diagonal, is_trace, weights
from search.trial.records import Aim, AimKind, Contents, Trial
from tests.efficiency.plans import AGAINST_CONTROL, OVERALL, equal_trial, planted


def test_every_aim_has_one_sentence() -> None:
    """The help says what each aim is for."""
    assert set(SENTENCES) == set(AimKind)
    assert all(text.endswith(".") for text in SENTENCES.values())


@settings(max_examples=80, deadline=None)
@given(planted())
def test_the_weights_are_those_of_variances(drawn: tuple[Trial, Contents]) -> None:
    """W is symmetric, not negative, blind to the mean, and has the exact diagonal."""
    trial, _ = drawn
    matrix = weights(trial)
    if matrix is None:
        assert not is_trace(trial)
        return
    assert is_trace(trial)
    assert matrix == pytest.approx(matrix.T)
    assert matrix.sum(axis=1) == pytest.approx(np.zeros(trial.t), abs=1e-12)
    assert np.linalg.eigvalsh(matrix).min() > -1e-12
    assert np.diag(matrix) == pytest.approx([float(w) for w in exact_diagonal(trial)])


@pytest.mark.parametrize(("t", "q"), [(2, 1), (5, 1), (5, 2), (6, 4), (4, 4)])
def test_against_controls_is_the_average_of_averages(t: int, q: int) -> None:
    """The mean over controls of the mean over all other treatments, other controls among them."""
    matrix = weights(equal_trial(t, t, 2, AGAINST_CONTROL, controls=q))
    rng = np.random.default_rng(1)
    root = rng.normal(size=(t, t))
    covariance = root @ root.T
    own = np.diag(covariance)
    variances = own[:, None] + own - 2 * covariance
    expected = np.mean([np.mean([variances[c, j] for j in range(t) if j != c]) for c in range(q)])
    assert np.trace(matrix @ covariance) == pytest.approx(expected)


def test_all_pairs_is_the_average_pair_variance() -> None:
    """W = 2(I − J/t)/(t−1), so its diagonal is 2/t."""
    trial = equal_trial(4, 4, 3)
    assert exact_diagonal(trial) == (Fraction(1, 2),) * 4


def test_overall_has_no_weights() -> None:
    """The determinant is no trace; asking for its diagonal is a mistake in the program."""
    trial = equal_trial(4, 4, 3, OVERALL)
    assert weights(trial) is None
    with pytest.raises(ValueError, match="no weights"):
        exact_diagonal(trial)


def test_even_meetings_break_ties_by_all_pairs_and_the_worst_pair_has_no_weights() -> None:
    """Even meetings share W with all pairs; the worst pair is a maximum, no mean."""
    even, worst = (equal_trial(4, 4, 3, Aim(kind)) for kind in (AimKind.EVEN_MEETINGS, AimKind.WORST_PAIR))
    np.testing.assert_array_equal(weights(even), weights(equal_trial(4, 4, 3)))
    assert weights(worst) is None
    assert not is_trace(worst)
