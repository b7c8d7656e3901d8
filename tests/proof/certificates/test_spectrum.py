"""The best spectrum that moments allow."""

from __future__ import annotations

from fractions import Fraction
from math import prod

from hypothesis import given, settings
from hypothesis import strategies as st

from search.proof.certificates.case import case_of, greatest_trace
from search.proof.certificates.spectrum import extreme_spectrum, second_moment_spectrum
from search.trial.reading import trial_from_document
from search.trial.tables import tables
from tests.drawn import tiny_trial

values = st.fractions(min_value=Fraction(1, 20), max_value=1, max_denominator=20)


@given(st.lists(st.one_of(values, st.just(Fraction(1))), min_size=1, max_size=7), st.data())
@settings(max_examples=200, deadline=None)
def test_no_spectrum_is_better(spectrum: list[Fraction], data: st.DataObject) -> None:
    """Any spectrum has a larger Σ 1/x and a smaller Π x than the extreme one of its own moments."""
    cap = data.draw(st.sampled_from([max(spectrum), Fraction(1), Fraction(3, 2)]))
    squares = sum(x * x for x in spectrum) * data.draw(st.sampled_from([1, Fraction(9, 10)]))
    best = extreme_spectrum(len(spectrum), sum(spectrum, Fraction(0)), squares, cap)
    assert best.sum_of_inverses <= sum(1 / x for x in spectrum)
    assert best.product >= prod(spectrum)


def test_one_large_and_the_rest_equal_is_its_own_bound() -> None:
    """The moments of 1, ½, ½, ½ give back exactly that spectrum: Σ 1/x = 7, Π x = 1/8."""
    best = extreme_spectrum(4, Fraction(5, 2), Fraction(7, 4), Fraction(2))
    assert best.sum_of_inverses == 7
    assert best.product == Fraction(1, 8)


def test_values_at_the_cap_are_taken_one_by_one() -> None:
    """The moments of 1, 1, ½, ½ with nothing above 1 give back exactly that spectrum."""
    best = extreme_spectrum(4, Fraction(3), Fraction(5, 2), Fraction(1))
    assert 6 - Fraction(1, 10**20) < best.sum_of_inverses <= 6


def test_moments_that_nothing_has() -> None:
    """Where no spectrum has the moments the bound is that of equal values, never worse than the truth."""
    assert extreme_spectrum(2, Fraction(1), Fraction(5), Fraction(9)).sum_of_inverses == 4
    assert extreme_spectrum(3, Fraction(9), Fraction(30), Fraction(1)).sum_of_inverses == 1


def test_dimensions_without_loss_are_taken_out() -> None:
    """Six treatments in two replicates of two blocks of three: rank N ≤ 3, so three eigenvalues are r = 2.

    The trace n − b = 8 leaves 1 for each of the other two: Σ 1/x = 3/2 + 2, which the plan ABC/DEF,
    ABD/CEF does not reach and no plan passes.
    """
    blocks = {"a": 3, "b": 3, "c": 3, "d": 3}
    trial = trial_from_document(
        {
            "trial": "two replicates",
            "treatments": 6,
            "blocks": blocks,
            "rules": {"replicates": {"I": ["a", "b"], "II": ["c", "d"]}},
        }
    )
    best = second_moment_spectrum(case_of(trial), Fraction(0))
    assert best.sum_of_inverses == Fraction(3, 2) + 2


def test_trace_by_hand() -> None:
    """tr C = n − b where nothing stands twice; a block of five plots for three holds 2, 2, 1 at best."""
    assert greatest_trace(tables(tiny_trial())) == 3
    twice = trial_from_document(
        {"trial": "twice", "treatments": 3, "blocks": {"one": 5}, "rules": {"twice_in_block": True}}
    )
    assert greatest_trace(tables(twice)) == 5 - Fraction(9, 5)
