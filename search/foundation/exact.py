"""Exact numbers: square-root brackets, roots, and rationals that are safe to print and store."""

from __future__ import annotations

from fractions import Fraction
from math import isqrt

SCALE = 10**24
"""Brackets and rounded rationals are fine to one part in this."""


def root_below(x: Fraction, scale: int = SCALE) -> Fraction:
    """A rational at most √x, within 1/scale of it.

    Raises
    ------
    ValueError : x is negative
    """
    if x < 0:
        raise ValueError("no real square root")
    return Fraction(isqrt(x.numerator * scale * scale // x.denominator), scale)


def root_above(x: Fraction, scale: int = SCALE) -> Fraction:
    """A rational at least √x, within 1/scale of it."""
    low = root_below(x, scale)
    return low if low * low == x else low + Fraction(1, scale)


def rounded_up(x: Fraction, scale: int = 10**15) -> Fraction:
    """The least multiple of 1/scale that is not below x; x itself where its denominator is small."""
    if x.denominator <= scale:
        return x
    return Fraction(-((-x.numerator * scale) // x.denominator), scale)


def rounded_down(x: Fraction, scale: int = 10**15) -> Fraction:
    """The greatest multiple of 1/scale that is not above x; x itself where its denominator is small."""
    return -rounded_up(-x, scale)


def power_root_above(x: Fraction, power: int, scale: int = 10**15) -> Fraction:
    """A rational q ≥ 0 with q**power ≥ x ≥ 0, above the true root by little over 1/scale."""
    if x < 0 or power < 1:
        raise ValueError("only roots of numbers from 0 on")
    low, high = 0, scale
    while Fraction(high, scale) ** power < x:
        low, high = high, 2 * high
    while high - low > 1:
        middle = (low + high) // 2
        if Fraction(middle, scale) ** power < x:
            low = middle
        else:
            high = middle
    return Fraction(high, scale)


def near(x: float, denominator: int = 10**9) -> Fraction:
    """The float as a rational with a denominator of at most the one given."""
    return Fraction(x).limit_denominator(denominator)


def exponential_above(x: Fraction) -> Fraction:
    """A rational little above e^x for x ≤ 0, by 1/e^−x with the series cut off from below."""
    grain = 10**36
    size = Fraction(int(-x * grain), grain)
    total, term, n = Fraction(1), Fraction(1), 0
    while term > Fraction(1, 10**24) or n < size:
        n += 1
        term = Fraction(int(term * size / n * grain), grain)
        total += term
    return 1 / total
