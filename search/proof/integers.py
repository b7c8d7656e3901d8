"""Whole-number matrices of any size: products, inverses and elimination without rounding."""

from __future__ import annotations

from typing import Any

import numpy as np
from numpy.typing import NDArray

Whole = NDArray[Any]
"""A matrix of Python integers (dtype object), or of int64 where the numbers are small."""

EXACT_BITS = 52
"""Floats hold every whole number of so many bits."""


def exact_product(left: Whole, right: Whole) -> Whole:
    """The product of two whole-number matrices, exactly, at the speed of floating point.

    Both are cut into layers of digits so narrow that no sum of their products passes 2^52; products
    of such layers are exact in floating point in whatever order they are added up.

    Parameters
    ----------
    left, right : matrices of whole numbers, of any size

    Returns
    -------
    the product, of Python integers
    """
    digits = (EXACT_BITS - left.shape[1].bit_length()) // 2
    total: dict[int, Whole] = {}
    for i, high in enumerate(_layers(left, digits)):
        for j, low in enumerate(_layers(right, digits)):
            product = (high @ low).astype(np.int64)
            total[i + j] = total[i + j] + product if i + j in total else product
    result = np.zeros((left.shape[0], right.shape[1]), dtype=object)
    for layer in sorted(total, reverse=True):
        result = (result << digits) + total[layer].astype(object)
    return result


def _layers(matrix: Whole, digits: int) -> list[NDArray[np.float64]]:
    """The matrix as Σ layer_i 2^(i·digits), every entry of a layer below 2^digits in size."""
    rest = matrix.astype(object)
    layers = []
    while int(np.abs(rest).max()) >> digits:
        layers.append((rest & ((1 << digits) - 1)).astype(np.float64))
        rest = rest >> digits
    return [*layers, rest.astype(np.float64)]


def adjugate(matrix: Whole) -> tuple[Whole, int]:
    """The adjugate and the determinant of a positive definite whole-number matrix.

    One unknown after the other is exchanged with its equation. Every number on the way is a minor of
    the matrix, so each division comes out even (Bareiss 1968; Edmonds 1967). No pivot is 0, since
    the leading minors of a positive definite matrix are all above 0.

    Parameters
    ----------
    matrix : (m, m) symmetric, positive definite

    Returns
    -------
    adjugate and determinant: the inverse is the first over the second
    """
    rest = matrix.astype(object)
    before = 1
    for k in range(len(rest)):
        row, column, pivot = rest[k].copy(), rest[:, k].copy(), rest[k, k]
        rest = (rest * pivot - np.multiply.outer(column, row)) // before
        rest[k], rest[:, k], rest[k, k] = row, -column, before
        before = pivot
    return rest, int(before)


def is_positive_semidefinite(matrix: Whole) -> bool:
    """Whether a symmetric whole-number matrix has no negative eigenvalue, by exact elimination."""
    rest = matrix.astype(object)
    before = 1
    while len(rest):
        pivot, row = rest[0, 0], rest[0, 1:]
        if pivot < 0 or (pivot == 0 and any(row)):
            return False
        rest = rest[1:, 1:]
        if pivot > 0:
            rest = (rest * pivot - np.multiply.outer(row, row)) // before
            before = pivot
    return True
