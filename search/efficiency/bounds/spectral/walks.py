"""Polynomials that count walks without turning back.

On the incidence graph, from point to point over lines: with A the meetings of points that lie on `lines`
lines of `points` points each, `F₁ = A`, `A F₁ = F₂ + (points−2) F₁ + lines (points−1) I` and
`A F_l = F_{l+1} + (points−2) F_l + (lines−1)(points−1) F_{l−1}`. All entries of `F_l` are whole numbers from
0 on (Biggs 1974, chapter 17 for graphs; from memory).
"""

from __future__ import annotations

from collections.abc import Sequence
from fractions import Fraction
from functools import lru_cache

Coefficients = Sequence[int | Fraction]
"""Of a polynomial, the constant first."""

FEWEST, MOST = 3, 8
"""Lengths of the walks that are counted by closed walks alone; shorter ones are counted pair by pair."""


@lru_cache(maxsize=4096)
def walk_polynomial(length: int, lines: int, points: int) -> tuple[int, ...]:
    """`F_length` as a polynomial in the eigenvalues of A."""
    before: tuple[int, ...] = (1,)
    now: tuple[int, ...] = (0, 1)
    for step in range(1, length):
        back = (lines if step == 1 else lines - 1) * (points - 1)
        after = [0, *now]
        for power, coefficient in enumerate(now):
            after[power] -= (points - 2) * coefficient
        for power, coefficient in enumerate(before):
            after[power] -= back * coefficient
        before, now = now, tuple(after)
    return now


def value(polynomial: Coefficients, at: int) -> Fraction:
    """The polynomial at a whole number."""
    total = Fraction(0)
    for coefficient in reversed(polynomial):
        total = total * at + coefficient
    return total


def shifted(polynomial: Coefficients, offset: int, slope: int) -> list[Fraction]:
    """The polynomial of `offset + slope·x` as one of x."""
    found = [Fraction(0)]
    for coefficient in reversed(polynomial):
        grown = [Fraction(0)] * (len(found) + 1)
        for power, c in enumerate(found):
            grown[power] += offset * c
            grown[power + 1] += slope * c
        grown[0] += coefficient
        found = grown
    return found


def added(*polynomials: list[Fraction]) -> list[Fraction]:
    """Their sum."""
    total = [Fraction(0)] * max(map(len, polynomials))
    for polynomial in polynomials:
        for power, coefficient in enumerate(polynomial):
            total[power] += coefficient
    return total
