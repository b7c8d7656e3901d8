"""Is a polynomial nowhere below 0 on an interval? Its Bernstein coefficients tell, half by half."""

from __future__ import annotations

from collections.abc import Sequence
from fractions import Fraction
from itertools import pairwise
from math import comb

from search.proof.records import Refuted

MOST_BOXES = 3000


def never_negative(polynomial: Sequence[Fraction], low: Fraction, high: Fraction) -> bool:
    """Whether `Σ c_n x^n ≥ 0` for low ≤ x ≤ high; refuses where that takes too many boxes."""
    waiting, boxes = [_bernstein(polynomial, low, high)], 0
    while waiting:
        coefficients = waiting.pop()
        boxes += 1
        if boxes > MOST_BOXES:
            raise Refuted("a polynomial of the certificate comes too close to what an eigenvalue costs")
        if min(coefficients) >= 0:
            continue
        if coefficients[0] < 0 or coefficients[-1] < 0:
            return False
        waiting += _halved(coefficients)
    return True


def _bernstein(polynomial: Sequence[Fraction], low: Fraction, high: Fraction) -> list[Fraction]:
    degree, width = len(polynomial) - 1, high - low
    local = [
        sum((comb(n, m) * c * low ** (n - m) for n, c in enumerate(polynomial) if n >= m), Fraction(0))
        * width**m
        for m in range(degree + 1)
    ]
    return [
        sum((Fraction(comb(i, m), comb(degree, m)) * local[m] for m in range(i + 1)), Fraction(0))
        for i in range(degree + 1)
    ]


def _halved(coefficients: list[Fraction]) -> tuple[list[Fraction], list[Fraction]]:
    """The coefficients on both halves (de Casteljau)."""
    left, right, row = [], [], coefficients
    while row:
        left.append(row[0])
        right.append(row[-1])
        row = [(a + b) / 2 for a, b in pairwise(row)]
    return left, right[::-1]
