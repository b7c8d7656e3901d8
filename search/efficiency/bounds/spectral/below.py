"""Does a polynomial stay below the cost of an eigenvalue? Decided exactly, by halving intervals.

An eigenvalue `e = 1 − x` of a plan costs `1/e` (all pairs) or `−log e` (overall). On an interval around c
a polynomial is at least `h(c)` less each further power at its worst; where that is above 0, so is h.
"""

from __future__ import annotations

from collections.abc import Sequence
from enum import Enum
from fractions import Fraction
from functools import lru_cache
from math import comb

import numpy as np
from numpy.typing import NDArray

Floats = NDArray[np.float64]
BITS = 160
MOST_INTERVALS = 4000
MOST_LOGARITHM = 6.0
"""Further up the logarithm is not followed: near x = 1 the series of one interval falls short of it."""
LAST_PLACE = 1 - 1e-6
TERMS = 24
"""Terms of the series of −log that are used on one interval."""


class Cost(Enum):
    """What an eigenvalue costs."""

    INVERSE = "inverse"
    LOGARITHM = "logarithm"

    def __call__(self, x: Floats) -> Floats:
        """Its cost as floats."""
        if self is Cost.INVERSE:
            return np.asarray(1 / (1 - x))
        return np.asarray(np.minimum(-np.log1p(-x), MOST_LOGARITHM))

    @property
    def at_zero(self) -> int:
        """The cost where x = 0."""
        return 1 if self is Cost.INVERSE else 0


Piece = tuple[Fraction, Fraction, Fraction]
"""From, to, and what is added to the cost between them."""


def stays_below(p: Sequence[Fraction], cost: Cost, pieces: Sequence[Piece]) -> bool:
    """Whether `p(x) ≤ cost(x) + extra` on every piece; False too where that cannot be decided."""
    return all(_on(p, cost, low, high, extra) for low, high, extra in pieces)


def _on(p: Sequence[Fraction], cost: Cost, low: Fraction, high: Fraction, extra: Fraction) -> bool:
    if cost is Cost.LOGARITHM:
        return all(
            _is_positive(_less(_series(a), p, a, extra), Fraction(0), b - a)
            for a, b in _logarithm_intervals(low, high)
        )
    # times 1 − x
    room = [extra - p[0], *(-c for c in p[1:])]
    h = [1 + room[0], *(after - c for c, after in zip(room, [*room[1:], Fraction(0)], strict=True))]
    return _is_positive(h, low, high)


def _logarithm_intervals(low: Fraction, high: Fraction) -> list[tuple[Fraction, Fraction]]:
    """Intervals that each take a quarter of what is left up to 1, the last one all of it."""
    intervals = []
    while high - low > Fraction(1, 64) and 1 - low > Fraction(1, 64):
        middle = low + Fraction(int((1 - low) * 256) or 1, 1024)
        if middle >= high:
            break
        intervals.append((low, middle))
        low = middle
    return [*intervals, (low, high)]


def _series(at: Fraction) -> list[Fraction]:
    """A polynomial of y that `−log(1 − at − y)` is not below for y ≥ 0."""
    rest = 1 - at
    return [_minus_log_below(at), *(1 / (n * rest**n) for n in range(1, TERMS + 1))]


@lru_cache(maxsize=256)
def _minus_log_below(x: Fraction) -> Fraction:
    """A rational not above −log(1 − x) for 0 ≤ x < 1, by `2 artanh(x/(2−x))`."""
    z = x / (2 - x)
    z = Fraction(z.numerator * 10**30 // z.denominator, 10**30)
    total, power = Fraction(0), z
    for n in range(1, 200, 2):
        total += power / n
        power = power * z * z
        power = Fraction(power.numerator * 10**40 // power.denominator, 10**40)
    return 2 * Fraction(total.numerator * 10**30 // total.denominator, 10**30)


def _less(series: list[Fraction], p: Sequence[Fraction], at: Fraction, extra: Fraction) -> list[Fraction]:
    moved = _moved(p, at)
    size = max(len(series), len(moved))
    h = [Fraction(0)] * size
    for n, c in enumerate(series):
        h[n] += c
    for n, c in enumerate(moved):
        h[n] -= c
    h[0] += extra
    return h


def _moved(p: Sequence[Fraction], at: Fraction) -> list[Fraction]:
    """p(at + y) as a polynomial of y."""
    return [
        sum((comb(n, m) * p[n] * at ** (n - m) for n in range(m, len(p))), Fraction(0)) for m in range(len(p))
    ]


def _is_positive(h: Sequence[Fraction], low: Fraction, high: Fraction) -> bool:
    """Whether h ≥ 0 from low to high: at the middle, less the worst of all that changes around it.

    In whole numbers of 2^−BITS; what they cut off is less than `loss`.
    """
    if low > high:
        return True
    fixed, loss = [_fixed(c) for c in h], 8 * len(h) ** 2
    waiting, looked_at = [(_fixed(low), _fixed(high) + 1)], 0
    while waiting:
        a, b = waiting.pop()
        looked_at += 1
        middle, half = (a + b) // 2, (b - a) // 2 + 1
        around = _around(fixed, middle)
        if around[0] < 0 or looked_at > MOST_INTERVALS:
            return False
        if not _stays_positive(around, half, loss):
            waiting += [(a, middle), (middle, b)]
    return True


def _fixed(c: Fraction) -> int:
    return (c.numerator << BITS) // c.denominator


def _around(fixed: Sequence[int], middle: int) -> list[int]:
    """The coefficients of h(middle + y)."""
    around = list(fixed)
    for first in range(len(around) - 1):
        for n in range(len(around) - 2, first - 1, -1):
            around[n] += around[n + 1] * middle >> BITS
    return around


def _stays_positive(around: list[int], half: int, loss: int) -> bool:
    """Whether h stays above 0 within `half` of the middle, by its constant or by a square in it."""
    power, worst = half, 0
    beyond = []
    for c in around[1:]:
        beyond.append(abs(c) * power >> BITS)
        power = power * half >> BITS
    worst = sum(beyond) + loss
    if around[0] >= worst:
        return True
    if len(around) < 3 or around[2] <= 0:
        return False
    # h2 y² + h1 y + h0 with what is left of h2 after the powers from the third on
    power, square = half, around[2] - loss
    for c in around[3:]:
        square -= (abs(c) * power >> BITS) + 1
        power = power * half >> BITS
    return square > 0 and 4 * square * (around[0] - loss) >= around[1] ** 2 + loss * abs(around[1])


def low_points(p: Floats, cost: Cost, piece: Piece) -> list[tuple[float, float]]:
    """Places where the cost comes closest to p on a piece, and by how much it stays above, in floats.

    They are the ends and the zeros of `1 − (1−x)² p'` (of `1 − (1−x) p'` for the logarithm).
    """
    low, high, extra = piece
    slope = np.polynomial.polynomial.polyder(p)
    for _ in range(2 if cost is Cost.INVERSE else 1):
        slope = np.polynomial.polynomial.polymul(slope, [1.0, -1.0])
    slope[0] -= 1.0
    roots = np.polynomial.polynomial.polyroots(slope)
    inner = roots.real[np.abs(roots.imag) < 1e-6]
    last = min(float(high), LAST_PLACE)
    x = np.unique([float(low), last, *inner[(inner > float(low)) & (inner < last)]])
    room = cost(x) + float(extra) - np.polynomial.polynomial.polyval(x, p)
    return list(zip(x.tolist(), room.tolist(), strict=True))
