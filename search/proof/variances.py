"""Variances of treatment differences, exact for plans of usual size and enclosed for large ones."""

from __future__ import annotations

from dataclasses import dataclass
from fractions import Fraction
from math import prod

import numpy as np
from numpy.typing import NDArray

from search.foundation.exact import root_above
from search.proof.information import Information
from search.proof.integers import Whole, adjugate, exact_product
from search.proof.intervals import Interval
from search.proof.records import Refuted

EXACT_UP_TO = 100
"""Treatments up to which variances are computed exactly; beyond, they are enclosed."""
ENCLOSED_UP_TO = 1500
"""Treatments up to which enclosures fit into the memory of a small machine."""
FINE_BITS = 60
"""Whole-number copies of floats keep so many bits."""
NARROW, WIDEST = Fraction(1, 10**12), Fraction(1, 10**10)
"""Enclosures are refined until they are narrow, and no use beyond the widest."""
MOST_REFINEMENTS = 3


@dataclass(frozen=True, slots=True, eq=False)
class Variances:
    """Variances of all comparisons within one plan, in units of the plot variance.

    A comparison c (weights that sum to 0) has a variance within [least, most] × c'Gc/under.

    Parameters
    ----------
    matrix : (t, t) G, whole numbers
    under : what G is divided by
    least, most : factors of the enclosure; both 1 where the variances are exact
    determinant : product of the non-zero eigenvalues of C
    """

    matrix: Whole
    under: int
    least: Fraction
    most: Fraction
    determinant: Interval

    @property
    def exact(self) -> bool:
        """Whether the variances are exact, not only enclosed."""
        return self.least == self.most

    def enclosing(self, quadratic: Fraction | int) -> Interval:
        """The variance whose value c'Gc, or a sum of such with weights ≥ 0, is given."""
        value = Fraction(quadratic) / self.under
        return Interval(value * self.least, value * self.most)


def variances(plan: Information) -> Variances:
    """The variances of a connected plan."""
    if plan.t > ENCLOSED_UP_TO:
        raise Refuted(f"plans of more than {ENCLOSED_UP_TO:,} treatments are beyond this proof")
    return exactly(plan) if plan.t <= EXACT_UP_TO else enclosed(plan)


def exactly(plan: Information) -> Variances:
    """Exact variances.

    With the last treatment as the zero of the scale, what is left of C is invertible, and by the
    matrix tree theorem t times its determinant is the product of the non-zero eigenvalues of C.
    """
    t = plan.t
    adjoint, determinant = adjugate(plan.scaled[:-1, :-1])
    matrix = np.zeros((t, t), dtype=object)
    matrix[:-1, :-1] = adjoint * plan.scale
    whole = Fraction(t * determinant, plan.scale ** (t - 1))
    one = Fraction(1)
    return Variances(matrix, determinant, one, one, Interval.exactly(whole))


def enclosed(plan: Information) -> Variances:
    """Rigorous enclosures of the variances, about 13 digits wide.

    M = scale·C + c·J is positive definite. Floats give a lower triangular T with T M T' near I; T is
    then taken as whole numbers over a power of two and E = T M T' − I computed without rounding.
    With η ≥ ‖E‖ the inverse of M lies between T'T/(1+η) and T'T/(1−η) as quadratic forms, and so
    does every variance. With s ≥ Σ|eigenvalues of E|, det(I+E) lies between 1−s and 1/(1−s).
    """
    t = plan.t
    # J is c·t times a projection: one eigenvalue of M is c·t, the others are scale times those of C.
    ballast = max(1, plan.trace_scaled // (t * t))
    form = plan.scaled + ballast
    try:
        factor = np.tril(np.linalg.inv(np.linalg.cholesky(form.astype(np.float64))))
    except (np.linalg.LinAlgError, OverflowError) as error:
        raise Refuted("the plan is too ill-conditioned to be enclosed") from error
    triangle, bits = _fixed(factor)
    unit = 1 << (2 * bits)
    off = _off_identity(triangle, form, unit)
    for _ in range(MOST_REFINEMENTS):
        spread = _size(off, unit) * root_above(Fraction(t))
        if spread < NARROW:
            break
        # With E = L + L' for a lower triangular L, (I − L) T leaves an error of the order of E².
        half = np.tril(off, -1).astype(np.float64) + np.diag(off.diagonal().astype(np.float64) / 2)
        step, shift = _fixed(np.ldexp(half, -2 * bits))
        triangle = triangle - (exact_product(step, triangle) >> shift)
        off = _off_identity(triangle, form, unit)
    eta = _size(off, unit)
    spread = eta * root_above(Fraction(t))
    if spread >= WIDEST:
        raise Refuted("the plan is too ill-conditioned to be enclosed to ten digits")

    pivots = Fraction(prod(int(x) for x in triangle.diagonal()), 1 << (bits * t))
    whole = 1 / (pivots * pivots * ballast * t * plan.scale ** (t - 1))
    return Variances(
        matrix=exact_product(triangle.T, triangle) * plan.scale,
        under=unit,
        least=1 / (1 + eta),
        most=1 / (1 - eta),
        determinant=Interval(whole * (1 - spread), whole / (1 - spread)),
    )


def _fixed(factor: NDArray[np.float64]) -> tuple[Whole, int]:
    """Floats as whole numbers over a power of two, and the power."""
    bits = FINE_BITS - int(np.frexp(np.abs(factor).max())[1])
    return np.rint(np.ldexp(factor, bits)).astype(np.int64).astype(object), bits


def _off_identity(triangle: Whole, form: Whole, unit: int) -> Whole:
    """T M T' − I, times the unit."""
    off = exact_product(exact_product(triangle, form), triangle.T)
    off[np.diag_indices(len(off))] -= unit
    return off


def _size(off: Whole, unit: int) -> Fraction:
    """A number that the norm of E does not pass: the root of its sum of squares."""
    return root_above(Fraction(int((off * off).sum()), unit**2))
