"""How good the plans with given meetings are, exactly: one number, the greater the better."""

from __future__ import annotations

from fractions import Fraction

import numpy as np
from numpy.typing import NDArray

from search.efficiency.bounds.spectral.below import Cost

Meetings = NDArray[np.int64]
"""(v, v) NN' or N'N: lines through a member on the diagonal, lines that two members share beside it."""

MARGIN = 1e-8
"""Eigenvalues in floats are exact to about 1e-13 of the greatest; so near to the plan, fractions decide."""


def worth(meetings: Meetings, rk: int, more: int, cost: Cost) -> Fraction:
    """`−Σ 1/(1 − x)`, for the overall aim `Π (1 − x)`, over the t − 1 eigenvalues `rk·x`; −10¹² if cut off.

    `B = rk·I − NN' + J` has the eigenvalues rk(1 − x) and, for the ones, v.

    Parameters
    ----------
    meetings : of treatments or of blocks
    rk : row sums of `meetings`
    more : eigenvalues x = 0 that the other side shows and this one does not, below 0 where it shows more
    cost : which of the two
    """
    v = len(meetings)
    trace, product = _inverse_trace(rk * np.eye(v, dtype=np.int64) - meetings + 1)
    if product == 0:
        return CUT_OFF if cost is Cost.INVERSE else Fraction(0)
    if cost is Cost.LOGARITHM:
        return Fraction(product, v * rk ** (v - 1))
    return -(rk * (trace - Fraction(1, v)) + more)


CUT_OFF = Fraction(-(10**12))


def determinant(matrix: Meetings) -> int:
    """Exactly."""
    return _inverse_trace(matrix)[1]


def _inverse_trace(matrix: Meetings) -> tuple[Fraction, int]:
    """Trace of the inverse, and the determinant: quotients of coefficients of the characteristic polynomial.

    Faddeev and LeVerrier: every division comes out even.
    """
    size = len(matrix)
    whole = matrix.astype(object)
    unit = np.eye(size, dtype=int).astype(object)
    power, last, coefficient = unit, 1, 1
    for step in range(1, size + 1):
        product = whole.dot(power)
        last, coefficient = coefficient, -int(product.trace()) // step
        power = product + coefficient * unit
    if coefficient == 0:
        return Fraction(0), 0
    return Fraction(-last, coefficient), coefficient * (-1) ** size


def estimates(all_meetings: Meetings, rk: int, more: int, cost: Cost) -> NDArray[np.float64]:
    """The worth of each of many matrices as a float, exact to far less than `MARGIN` of it."""
    left = 1 - np.linalg.eigvalsh(all_meetings.astype(float))[:, :-1] / rk
    if cost is Cost.LOGARITHM:
        return np.asarray(np.maximum(left, 0.0).prod(axis=1))
    return np.asarray(-(1 / np.maximum(left, 1e-12)).sum(axis=1) - more)
