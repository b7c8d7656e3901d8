"""Exact numbers: brackets hold what they promise."""

from __future__ import annotations

from fractions import Fraction

import pytest
from hypothesis import given
from hypothesis import strategies as st

from search.foundation.exact import power_root_above, root_above, root_below, rounded_down, rounded_up

POSITIVE = st.fractions(min_value=0, max_value=10**9, max_denominator=10**6)


@given(POSITIVE)
def test_square_roots_are_bracketed(x: Fraction) -> None:
    """The square of the lower end is at most x, that of the upper end at least."""
    low, high = root_below(x), root_above(x)
    assert low * low <= x <= high * high
    assert high - low <= Fraction(1, 10**24)


@given(POSITIVE, st.integers(1, 12))
def test_other_roots_err_upwards(x: Fraction, power: int) -> None:
    """The rational returned is not below the root, and hardly above it."""
    root = power_root_above(x, power)
    assert root**power >= x
    step = Fraction(1, 10**15)
    assert root < step or (root - step) ** power <= x


@given(st.fractions())
def test_rounding_keeps_its_side(x: Fraction) -> None:
    """Rounded up is not below, rounded down not above, and both are near."""
    assert rounded_down(x) <= x <= rounded_up(x)
    assert rounded_up(x) - rounded_down(x) <= Fraction(1, 10**15)


def test_no_root_of_a_negative_number() -> None:
    """A negative number is refused; zero is not."""
    assert root_below(Fraction(0)) == 0
    with pytest.raises(ValueError, match="no real"):
        root_below(Fraction(-1, 7))
