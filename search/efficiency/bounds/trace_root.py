"""Trace root: how the information should be shared out between contrasts that count unequally.

Statement. `tr(W C⁺) ≥ (tr W^½)² / S` with S the greatest trace of C, or C(γ), that the rules allow.

Proof. Cauchy and Schwarz for `tr W^½ = tr(W^½ C^{+½} C^½)`, and `tr C ≤ S`.

Against q controls W is a graph Laplacian with eigenvalues q (t − q − 1 times), t + q (q − 1 times)
and t (once), over q (t − 1). For contrasts `W ≽ B B'` with columns `d_l c_l`, rational
`d_l² ≤ w_l / Σ w`; with the Gram matrix `B'B = M` and a rational symmetric Y with `M + ε I ≽ Y²`,
`tr M^½ ≥ tr Y − q √ε`, since the square root keeps the order of matrices (Löwner 1934; from memory).

Source. Kiefer 1974 (the equivalence theorem for linear criteria; from memory).
"""

from __future__ import annotations

from fractions import Fraction

import numpy as np

from search.efficiency.aims import contrast_rows, contrast_shares
from search.efficiency.bounds.problem import Problem, bound_on_variance, text
from search.efficiency.one_thread import one_thread
from search.efficiency.records import Bound
from search.foundation.exact import root_above, root_below
from search.trial.records import AimKind, Trial

NAME = "trace root"
SENTENCE = (
    "The information that blocks leave is limited, and the comparisons that the aim asks for need it"
    " in fixed shares."
)
MOST_CONTRASTS = 40
"""Beyond this the exact check of the Gram matrix takes too long."""

Rational = list[list[Fraction]]


def applies(trial: Trial) -> bool:
    """Whether the aim weighs contrasts unequally, and not too many of them."""
    if trial.aim.kind is AimKind.CONTRASTS:
        return len(trial.aim.contrasts) <= MOST_CONTRASTS
    return trial.aim.kind is AimKind.AGAINST_CONTROL


def find(given: Problem) -> Bound | None:
    """The bound: a closed form against controls, a certified matrix root for contrasts."""
    if given.trial.aim.kind is AimKind.AGAINST_CONTROL:
        return bound_on_variance(given, NAME, _root_against_controls(given) ** 2 / given.information, {})
    roots = [root_below(share, 10**12) for share in contrast_shares(given.trial)]
    gram = _gram(roots, contrast_rows(given.trial))
    for epsilon in (Fraction(0), Fraction(1, 10**16), Fraction(1, 10**14), Fraction(1, 10**11)):
        root = _matrix_root(gram, epsilon)
        if root is None:
            continue
        trace = sum((root[i][i] for i in range(len(root))), -len(root) * root_above(epsilon))
        if trace <= 0:
            return None
        multipliers = {
            "roots": [text(d) for d in roots],
            "matrix": [[text(y) for y in row] for row in root],
            "epsilon": text(epsilon),
        }
        return bound_on_variance(given, NAME, trace**2 / given.information, multipliers)
    return None


def _root_against_controls(given: Problem) -> Fraction:
    """`tr W^½` against q controls, from below; where all are controls the first and the last cancel."""
    t, q = given.trial.t, len(given.trial.controls)
    eigenvalues = ((q, t - q - 1), (t + q, q - 1), (t, 1))
    return sum((times * root_below(Fraction(x, q * (t - 1))) for x, times in eigenvalues), Fraction(0))


def _gram(roots: list[Fraction], rows: tuple[tuple[Fraction, ...], ...]) -> Rational:
    return [
        [
            d * e * sum((x * y for x, y in zip(c, other, strict=True) if x and y), Fraction(0))
            for e, other in zip(roots, rows, strict=True)
        ]
        for d, c in zip(roots, rows, strict=True)
    ]


def _matrix_root(gram: Rational, epsilon: Fraction) -> Rational | None:
    """A rational symmetric Y a little below `gram^½`, with `gram + ε I − Y²` surely not negative."""
    matrix = np.array([[float(x) for x in row] for row in gram])
    with one_thread():
        values, vectors = np.linalg.eigh(matrix)
        # a hair below the root, so that rounding cannot push it above
        root = (vectors * np.sqrt(np.maximum(values, 0)) * (1 - 1e-10)) @ vectors.T
    size = range(len(gram))
    y = [[Fraction(round(float(root[i, j]) * 10**15), 10**15) for j in size] for i in size]
    y = [[y[max(i, j)][min(i, j)] for j in size] for i in size]
    left = [
        [
            gram[i][j] + (epsilon if i == j else 0) - sum((y[i][k] * y[k][j] for k in size), Fraction(0))
            for j in size
        ]
        for i in size
    ]
    return y if _is_positive(left) else None


def _is_positive(matrix: Rational) -> bool:
    """Whether a rational symmetric matrix is positive semidefinite, by exact elimination."""
    rows = [list(row) for row in matrix]
    for p in range(len(rows)):
        pivot = rows[p][p]
        if pivot < 0 or (pivot == 0 and any(rows[p][p:])):
            return False
        if pivot == 0:
            continue
        for i in range(p + 1, len(rows)):
            factor = rows[i][p] / pivot
            if factor:
                for j in range(p, len(rows)):
                    rows[i][j] -= factor * rows[p][j]
    return True
