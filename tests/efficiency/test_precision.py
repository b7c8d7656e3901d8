"""Standard errors and detectable differences against stated values and a general library."""

from __future__ import annotations

from dataclasses import replace
from math import sqrt

import pytest
from statsmodels.stats.power import TTestPower

from search.efficiency.evaluator import pair_variances, score
from search.efficiency.precision import (
    break_even,
    detectable_multiple,
    expected,
    expected_for_aim,
    least_significant_multiple,
    power,
)
from search.trial.reading import trial_from_document
from search.trial.records import Precision
from tests.efficiency.plans import FANO, equal_trial


def test_multiples_at_twelve_degrees_of_freedom() -> None:
    """3.05 standard errors at 5% and 80%, 3.54 at 90%, 2.18 to be significant (tables; from memory)."""
    assert detectable_multiple(12) == pytest.approx(3.05, abs=0.005)
    assert detectable_multiple(12, power_percent=90) == pytest.approx(3.54, abs=0.005)
    assert least_significant_multiple(12) == pytest.approx(2.18, abs=0.005)


@pytest.mark.parametrize("df", [1, 5, 12, 60])
@pytest.mark.parametrize("multiple", [0.0, 1.0, 3.0])
def test_power_is_that_of_a_two_sided_t_test(df: int, multiple: float) -> None:
    """The power of the one-sample test with df + 1 observations (statsmodels)."""
    known = TTestPower().power(multiple / sqrt(df + 1), df + 1, 0.05, alternative="two-sided")
    assert power(multiple, df) == pytest.approx(known, rel=1e-6)


def test_the_detectable_difference_has_the_power_asked_for() -> None:
    """Solving for the multiple and asking for its power are inverse to each other."""
    for df, level, wanted in ((3, 5, 80), (40, 1, 95), (8, 10, 50)):
        assert 100 * power(detectable_multiple(df, level, wanted), df, level) == pytest.approx(wanted)


def test_what_cannot_be_asked_is_refused() -> None:
    """No degrees of freedom, or a power at or below the level; the boundary works."""
    assert detectable_multiple(1, 5, 5.1) > 0
    with pytest.raises(ValueError, match="degrees of freedom"):
        detectable_multiple(0)
    for wanted in (5, 100):
        with pytest.raises(ValueError, match="power"):
            detectable_multiple(10, 5, wanted)


def test_expectations_in_the_unit_of_the_trial() -> None:
    """Balanced (7, 7, 3): v = 6/7, so a coefficient of variation of 10% at mean 8 gives 0.8 √(6/7)."""
    trial = replace(
        equal_trial(7, 7, 3),
        precision=Precision(cv_percent=10, mean=8.0, unit="t/ha", difference=2.0),
    )
    told = expected(trial, score(trial, FANO))
    assert told is not None
    error = 0.8 * sqrt(6 / 7)
    assert (told.unit, told.residual_df) == ("t/ha", 8)
    assert told.average_pair.standard_error == pytest.approx(error)
    assert told.worst_pair.standard_error == pytest.approx(error)
    assert told.average_pair.least_significant == pytest.approx(error * least_significant_multiple(8))
    assert told.average_pair.detectable == pytest.approx(error * detectable_multiple(8))
    assert told.average_pair.power_percent == pytest.approx(100 * power(2 / error, 8))


def test_expectations_in_percent_without_a_mean() -> None:
    """Without a mean everything is in percent of it."""
    trial = replace(equal_trial(7, 7, 3), precision=Precision(cv_percent=10))
    told = expected(trial, score(trial, FANO))
    assert told is not None
    assert told.unit == "% of the mean"
    assert told.average_pair.standard_error == pytest.approx(10 * sqrt(6 / 7))
    assert told.average_pair.power_percent is None


def test_nothing_is_expected_without_a_variation_or_a_connected_plan() -> None:
    """No coefficient of variation, no variances, or no degrees of freedom: nothing to say."""
    trial = equal_trial(7, 7, 3)
    plan = score(trial, FANO)
    assert expected(trial, plan) is None
    trial = replace(trial, precision=Precision(cv_percent=9))
    assert expected(trial, replace(plan, average_pair_variance=None)) is None
    assert expected(trial, replace(plan, residual_df=0)) is None


def test_break_even_is_the_loss_to_blocks() -> None:
    """E = 7/9: blocks must cut the plot variance by more than 2/9, and cost six degrees of freedom."""
    trial = equal_trial(7, 7, 3)
    told = break_even(trial, score(trial, FANO))
    assert told.variance_cut_percent == pytest.approx(100 * 2 / 9)
    assert (told.residual_df, told.residual_df_without_blocks) == (8, 14)


def test_an_aim_of_its_own_has_an_error_of_its_own() -> None:
    """Against the control the mean variance of the aim counts, not that of all pairs."""
    document = {
        "trial": "x",
        "treatments": {name: {"control": name == "A"} for name in "ABCD"},
        "plots_each": [2, 6],
        "blocks": {"count": 4, "plots": 3},
        "aim": "against control",
        "precision": {"cv_percent": 10, "mean": 5},
    }
    trial = trial_from_document(document)
    contents = ((0, 1, 2), (0, 1, 3), (0, 2, 3), (0, 1, 2))
    found = score(trial, contents)
    aimed = expected_for_aim(trial, found.aim, found.residual_df)
    assert aimed is not None
    variances = pair_variances(contents, 4)
    assert variances is not None
    mean = float(variances[0, 1:].mean())
    assert aimed.standard_error == pytest.approx(0.5 * mean**0.5)
    alike = trial_from_document({**document, "aim": "all pairs"})
    assert expected_for_aim(alike, found.aim, found.residual_df) is None
