"""Designs of Hadamard matrices: their order is doubled, or a point is added."""

from __future__ import annotations

import numpy as np
from numpy.typing import NDArray

from search.designs.conditions import Balanced, conditions
from search.designs.constructions.common import Build, Built


def extension(sizes: Balanced, build: Build) -> Built | None:
    """From (4n−1, 2n−1, n−1) to (4n, 2n, 2n−1): a new point in every block, and the complements.

    A block and its complement make a replicate. Source: Hadamard's three-designs (Todd 1933, A
    combinatorial problem, Journal of Mathematics and Physics 12, 321–333).
    """
    t, k = sizes.t, sizes.k
    if t % 4 or t != 2 * k or sizes.meetings != k - 1:
        return None
    part = _design(t - 1, build)
    if part is None:
        return None
    points = set(range(t))
    blocks = []
    for block in part.blocks:
        whole = (*block, t - 1)
        blocks += [whole, tuple(sorted(points.difference(whole)))]
    replicates = tuple((j, j + 1) for j in range(0, len(blocks), 2))
    return Built(tuple(blocks), f"extension by a point of: {part.how}", replicates)


def doubling(sizes: Balanced, build: Build) -> Built | None:
    """From (4n−1, 2n−1, n−1) to (8n−1, 4n−1, 2n−1): the matrix of twice the order (Sylvester 1867)."""
    t = sizes.t
    if t % 8 != 7 or sizes.b != t or sizes.k != (t - 1) // 2:
        return None
    part = _design((t - 1) // 2, build)
    if part is None:
        return None
    half = _matrix(part)
    whole = np.block([[half, half], [half, -half]])
    blocks = tuple(tuple(np.flatnonzero(row[1:] > 0).tolist()) for row in whole[1:])
    return Built(blocks, f"doubling of: {part.how}")


def _design(t: int, build: Build) -> Built | None:
    sizes = conditions(t, t, (t - 1) // 2).allowed
    return build(sizes) if sizes else None


def _matrix(design: Built) -> NDArray[np.int64]:
    """The Hadamard matrix with a first row and column of ones, the blocks as the ones of its other rows."""
    order = len(design.blocks) + 1
    matrix = -np.ones((order, order), dtype=np.int64)
    matrix[0] = matrix[:, 0] = 1
    for row, block in enumerate(design.blocks, start=1):
        matrix[row, [x + 1 for x in block]] = 1
    return matrix
