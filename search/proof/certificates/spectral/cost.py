"""What an eigenvalue of a plan costs, and whether a polynomial stays below it.

With x = ρ/(rk), ρ an eigenvalue of NN', C has the eigenvalue r(1 − x). It costs 1/(1 − x) where the average
variance counts and −log(1 − x) where all pairs together do.
"""

from __future__ import annotations

from collections.abc import Iterator, Sequence
from fractions import Fraction
from math import comb

from search.proof.certificates.spectral.bernstein import never_negative

TERMS = 26
STEP = Fraction(1, 4)
LAST = 18
"""Intervals of the logarithm, each a quarter of what is left up to 1; the last is all of it."""


def inverse_stays_above(p: Sequence[Fraction], low: Fraction, high: Fraction, extra: Fraction) -> bool:
    """Whether 1/(1 − x) + extra ≥ p(x) from low to high: both sides times 1 − x."""
    difference = [(extra if n == 0 else 0) - c for n, c in enumerate(p)] + [Fraction(0)]
    times = [c - (difference[n - 1] if n else 0) for n, c in enumerate(difference)]
    times[0] += 1
    return never_negative(times, low, high)


def logarithm_stays_above(p: Sequence[Fraction], low: Fraction, high: Fraction, extra: Fraction) -> bool:
    """Whether −log(1 − x) + extra ≥ p(x) from low to high, interval by interval.

    From a on, with x = a + (1−a) y, −log(1 − x) = −log(1 − a) + Σ y^n/n, and no term is below 0.
    """
    for number, start, end in _intervals():
        first, last = max(low, start), min(high, end)
        if first > last:
            continue
        series = [number * quarter_logarithm() + extra, *(Fraction(1, n) for n in range(1, TERMS + 1))]
        moved = _in_local_terms(p, start)
        size = max(len(series), len(moved))
        difference = [
            (series[n] if n < len(series) else 0) - (moved[n] if n < len(moved) else 0) for n in range(size)
        ]
        rest = 1 - start
        if not never_negative(
            [Fraction(c) for c in difference], (first - start) / rest, (last - start) / rest
        ):
            return False
    return True


def quarter_logarithm() -> Fraction:
    """A number not above −log(3/4)."""
    return sum((STEP**n / n for n in range(1, 31)), Fraction(0))


def _intervals() -> Iterator[tuple[int, Fraction, Fraction]]:
    rest = Fraction(1)
    for number in range(LAST):
        after = rest * (1 - STEP)
        yield number, 1 - rest, Fraction(1) if number == LAST - 1 else 1 - after
        rest = after


def _in_local_terms(p: Sequence[Fraction], start: Fraction) -> list[Fraction]:
    rest = 1 - start
    return [
        sum((comb(n, m) * p[n] * start ** (n - m) for n in range(m, len(p))), Fraction(0)) * rest**m
        for m in range(len(p))
    ]
