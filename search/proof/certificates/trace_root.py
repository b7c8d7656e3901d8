"""Kind "trace root": tr(WC⁺) tr C ≥ (tr W^½)², for aims that weigh comparisons unlike."""

from __future__ import annotations

from fractions import Fraction
from math import lcm

import numpy as np

from search.foundation.exact import root_above, root_below
from search.proof.certificates.case import Case
from search.proof.certificates.claims import Claim, claim_of_variance
from search.proof.certificates.multipliers import known, symmetric_matrix
from search.proof.integers import is_positive_semidefinite
from search.proof.parts import Part, listed, ratio
from search.proof.records import Refuted
from search.trial.records import AimKind, Contrast

AIMS = (AimKind.AGAINST_CONTROL, AimKind.CONTRASTS)
MOST_CONTRASTS = 40
FINE = 10**120
"""Matrices whose common denominator is larger are rounded to one part in this, on the safe side."""

Matrix = list[list[Fraction]]


def derive(case: Case, multipliers: Part) -> Claim:
    """tr(WC⁺) ≥ (tr W^½)²/tr C, by the inequality of Cauchy and Schwarz for W^½C^+½ and C^½."""
    against_control = case.aim is AimKind.AGAINST_CONTROL
    root = _root_for_controls(case, multipliers) if against_control else _root(case, multipliers)
    trace = case.greatest_trace
    if root <= 0 or trace <= 0:
        raise Refuted("the certificate proves no more than that variances are above 0")
    return claim_of_variance(case, root**2 / trace)


def _root_for_controls(case: Case, multipliers: Part) -> Fraction:
    """tr W^½ from below.

    q(t−1)·W is the Laplacian of the graph that joins every control to every treatment, controls among
    themselves twice; its eigenvalues are q (t−q−1 times), t+q (q−1 times) and t.
    """
    known(multipliers, ())
    t, q = case.trial.t, len(case.trial.controls)
    if q == t:
        return (t - 1) * root_below(Fraction(2, t - 1))
    eigenvalues = ((q, t - q - 1), (t + q, q - 1), (t, 1))
    return sum((times * root_below(Fraction(x, q * (t - 1))) for x, times in eigenvalues), Fraction(0))


def _root(case: Case, multipliers: Part) -> Fraction:
    """tr W^½ from below, by a matrix Y of the certificate.

    With d_l ≤ √(w_l/Σw), W ≽ Σ d_l² c_l c_l', which has the eigenvalues of the Gram matrix of the d_l c_l.
    Where Gram + εI − Y² is positive semidefinite, tr Gram^½ ≥ tr Y − q √ε (square roots keep the order).
    """
    known(multipliers, ("roots", "matrix", "epsilon"))
    contrasts = case.trial.aim.contrasts
    q = len(contrasts)
    if q > MOST_CONTRASTS:
        raise Refuted(f"this kind of certificate is for {MOST_CONTRASTS} contrasts at most")
    where = multipliers.at("roots")
    roots = [ratio(where, x) for x in listed(where, multipliers.value("roots"))]
    matrix = symmetric_matrix(multipliers, "matrix", q)
    epsilon = multipliers.ratio("epsilon")
    total = sum((contrast.weight for contrast in contrasts), Fraction(0))
    if len(roots) != q or epsilon < 0:
        raise Refuted(f"{multipliers.where} must have a root for each contrast and epsilon from 0 on")
    if any(d < 0 or d * d > c.weight / total for d, c in zip(roots, contrasts, strict=True)):
        raise Refuted(f"{where} must not pass the roots of the weights")
    difference = [
        [
            roots[a] * roots[b] * _inner(contrasts[a], contrasts[b])
            + (epsilon if a == b else 0)
            - sum((x * y for x, y in zip(matrix[a], matrix[b], strict=True)), Fraction(0))
            for b in range(q)
        ]
        for a in range(q)
    ]
    if not _is_positive_semidefinite(difference):
        raise Refuted(f"{multipliers.at('matrix')} squared is not below the contrasts' own matrix")
    return sum((matrix[a][a] for a in range(q)), Fraction(0)) - q * root_above(epsilon)


def _inner(one: Contrast, other: Contrast) -> Fraction:
    coefficients = dict(other.of)
    return sum((a * coefficients.get(i, Fraction(0)) for i, a in one.of), Fraction(0))


def _is_positive_semidefinite(matrix: Matrix) -> bool:
    """Exactly where the denominators are small; else for a matrix that is smaller by a hair."""
    scale, hair = 1, 0
    for row in matrix:
        for x in row:
            scale = lcm(scale, x.denominator) if scale <= FINE else scale
    if scale > FINE:
        # Rounding moves no entry by more than 1/FINE, hence no eigenvalue by more than q/FINE.
        scale, hair = FINE, len(matrix)
    whole = np.array([[int(x * scale // 1) for x in row] for row in matrix], dtype=object)
    whole[np.diag_indices(len(matrix))] -= hair
    return is_positive_semidefinite(whole)
