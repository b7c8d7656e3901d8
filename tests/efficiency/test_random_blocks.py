"""Random blocks: what block totals tell is counted, as generalised least squares counts it."""

from __future__ import annotations

from fractions import Fraction

import numpy as np
import pytest
import statsmodels.api as sm
from hypothesis import given
from hypothesis import strategies as st

from search.efficiency.evaluator import information_matrix, pair_variances, score
from search.proof.information import information
from search.trial.reading import trial_from_document
from search.trial.records import Contents

RATIOS = st.fractions(Fraction(1, 12), 20, max_denominator=12)
FANO: Contents = ((0, 1, 2), (0, 3, 4), (0, 5, 6), (1, 3, 5), (1, 4, 6), (2, 3, 6), (2, 4, 5))


@st.composite
def plans(draw: st.DrawFn) -> tuple[int, Contents]:
    """Any block contents, repeats and all, that leave out no treatment."""
    t = draw(st.integers(2, 5))
    blocks = draw(st.lists(st.lists(st.integers(0, t - 1), min_size=1, max_size=5), min_size=1, max_size=4))
    return t, (*(tuple(sorted(block)) for block in blocks), tuple(range(t)))


def spread(contents: Contents, ratio: Fraction) -> tuple[np.ndarray, list[int]]:
    """Covariances of the plots in units of the plot variance, and the treatment of each plot."""
    homes = [j for j, block in enumerate(contents) for _ in block]
    same = np.equal.outer(homes, homes).astype(float)
    return np.eye(len(homes)) + float(ratio) * same, [i for block in contents for i in block]


@given(plans(), RATIOS)
def test_variances_are_those_of_generalised_least_squares(
    plan: tuple[int, Contents], ratio: Fraction
) -> None:
    """The covariances of estimates by statsmodels' GLS (a general library) on the plots themselves."""
    t, contents = plan
    covariance, planted = spread(contents, ratio)
    design = np.eye(t)[planted]
    estimates = sm.GLS(np.zeros(len(planted)), design, sigma=covariance).fit().normalized_cov_params
    own = np.diag(estimates)
    expected = own[:, None] + own[None, :] - 2 * estimates
    found = pair_variances(contents, t, ratio)
    assert found is not None
    np.testing.assert_allclose(found, expected, atol=1e-9)


@given(plans(), RATIOS)
def test_the_checker_has_the_same_matrix_in_whole_numbers(
    plan: tuple[int, Contents], ratio: Fraction
) -> None:
    """Finder and checker derive C(γ) from different formulas."""
    t, contents = plan
    exact = information(contents, t, ratio)
    shown = exact.scaled.astype(float) / exact.scale
    np.testing.assert_allclose(information_matrix(contents, t, ratio), shown, atol=1e-9)


def test_between_fixed_blocks_and_none() -> None:
    """γ → ∞ gives C, γ → 0 the information without blocks (both closed forms)."""
    contents = ((0, 1, 2), (0, 3), (1, 2, 3))
    fixed = information_matrix(contents, 4)
    np.testing.assert_allclose(information_matrix(contents, 4, Fraction(10**9)), fixed, atol=1e-7)
    r = np.array([2.0, 2, 2, 2])
    np.testing.assert_allclose(
        information_matrix(contents, 4, Fraction(1, 10**9)), np.diag(r) - np.outer(r, r) / 8, atol=1e-7
    )


@pytest.mark.parametrize("ratio", ["1/2", 1, 4])
def test_a_balanced_design_recovers_what_its_closed_form_says(ratio: str | int) -> None:
    """Efficiency E + (1 − E)/(1 + γk) of a balanced design, E = λt/(rk) (Yates 1940: recovery of inter-block
    information; from memory)."""
    document = {"trial": "seven", "treatments": 7, "blocks": {"count": 7, "plots": 3}, "blocks_random": ratio}
    found = score(trial_from_document(document), FANO)
    e = 7 / 9
    assert found.aim == pytest.approx(e + (1 - e) / (1 + 3 * float(Fraction(ratio))), rel=1e-12)
    assert found.balanced


def test_parts_that_share_no_block_are_compared_all_the_same() -> None:
    """Two blocks of two: only their totals tell A from C."""
    document = {"trial": "parts", "treatments": ["A", "B", "C", "D"], "blocks": {"count": 2, "plots": 2}}
    contents = ((0, 1), (2, 3))
    assert score(trial_from_document(document), contents).aim == 0
    found = score(trial_from_document({**document, "blocks_random": 1}), contents)
    assert not found.connected
    # Var(A − C) = 2 (1 + γ) from the plots themselves; Var(A − B) = 2
    assert found.largest_pair_variance == pytest.approx(4)
    assert found.average_pair_variance == pytest.approx((2 * 2 + 4 * 4) / 6)
