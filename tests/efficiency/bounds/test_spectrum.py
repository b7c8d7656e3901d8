"""The best eigenvalues for a trace and a second moment, against many that share them."""

from __future__ import annotations

from fractions import Fraction
from math import ceil, prod

import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from search.efficiency.bounds.spectrum import Spectrum, even_spectrum, extreme_spectrum

values = st.lists(st.fractions(Fraction(1, 20), 6, max_denominator=20), min_size=1, max_size=7)


def _inverses(spectrum: Spectrum) -> Fraction:
    return sum((times / x for x, times in spectrum), Fraction(0))


def _product(spectrum: Spectrum) -> Fraction:
    return prod((x**times for x, times in spectrum), start=Fraction(1))


@settings(max_examples=200, deadline=None)
@given(values, st.integers(0, 3), st.fractions(0, 1, max_denominator=8))
def test_no_numbers_beat_the_extreme_spectrum(x: list[Fraction], room: int, slack: Fraction) -> None:
    """Whatever the eigenvalues: no smaller Σ1/x and no larger Πx than the spectrum for their moments."""
    cap = ceil(max(x)) + room
    squares = sum(v * v for v in x) * (1 - slack)
    extreme = extreme_spectrum(len(x), sum(x, Fraction(0)), squares, cap)
    assert sum(times for _, times in extreme) == len(x)
    assert _inverses(extreme) <= sum(1 / v for v in x)
    assert _product(extreme) >= prod(x)


@settings(max_examples=200, deadline=None)
@given(values, st.integers(1, 4), st.integers(1, 6))
def test_known_eigenvalues_may_be_taken_out(x: list[Fraction], q: int, r: int) -> None:
    """With q eigenvalues known to be r, the greatest, the spectrum of the rest is still best."""
    x = [min(v, Fraction(r)) for v in x]
    everything = x + [Fraction(r)] * q
    trace, squares = sum(everything, Fraction(0)), sum(v * v for v in everything)
    extreme = extreme_spectrum(len(everything), trace, squares, r, known=(q, r))
    assert _inverses(extreme) <= sum(1 / v for v in everything)
    assert _product(extreme) >= prod(everything)


@given(
    st.integers(2, 9),
    st.integers(0, 3),
    st.fractions(Fraction(1, 9), 2, max_denominator=9),
    st.fractions(0, 1, max_denominator=9),
)
def test_the_extreme_spectrum_is_attained(m: int, at_cap: int, small: Fraction, place: Fraction) -> None:
    """Some at the cap, one in between, the rest equal: found again exactly (equal-variable theorem)."""
    cap = 3
    at_cap = min(at_cap, m - 2)
    middle = small + place * (cap - small)
    x = [Fraction(cap)] * at_cap + [middle] + [small] * (m - at_cap - 1)
    extreme = extreme_spectrum(m, sum(x, Fraction(0)), sum(v * v for v in x), cap)
    assert float(_inverses(extreme)) == pytest.approx(float(sum(1 / v for v in x)), rel=1e-12)
    assert float(_product(extreme)) == pytest.approx(float(prod(x)), rel=1e-12)


def test_moments_that_clash_give_the_even_spectrum() -> None:
    """A second moment that no positive numbers have proves nothing that is safe to print but the trace."""
    assert extreme_spectrum(3, Fraction(3), Fraction(100), 50) == even_spectrum(3, Fraction(3))
    assert extreme_spectrum(3, Fraction(3), Fraction(2), 50) == [(50, 0), (1, 3)]
    assert extreme_spectrum(1, Fraction(3), Fraction(100), 50) == [(50, 0), (3, 1)]
