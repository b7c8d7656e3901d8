"""Plans with equal blocks and replications, drawn at random, and what a matrix of meetings says of them."""

from __future__ import annotations

import random

import numpy as np

from search.trial.records import Contents
from search.trial.tables import Ints, incidence

SHAPES = (
    (4, 6, 2), (5, 5, 3), (5, 10, 2), (6, 4, 3), (6, 9, 2), (6, 10, 3), (7, 7, 3), (8, 4, 4), (8, 12, 4),
    (9, 9, 5), (10, 5, 4), (12, 6, 4), (12, 16, 3),
)  # fmt: skip
"""(t, b, k)"""
SETS = ((4, 2, 3), (6, 2, 3), (6, 3, 4), (8, 4, 3), (9, 3, 3), (12, 4, 4), (12, 3, 5), (6, 3, 7))
"""(t, k, replicates)"""


def random_plan(draw: random.Random, t: int, b: int, k: int) -> Contents:
    """Nothing twice in a block: shuffled plots, put right by exchanges."""
    while True:
        plots = [i for i in range(t) for _ in range(b * k // t)]
        draw.shuffle(plots)
        blocks = [plots[j * k : (j + 1) * k] for j in range(b)]
        for _ in range(4000):
            twice = [j for j in range(b) if len(set(blocks[j])) < k]
            if not twice:
                return tuple(tuple(sorted(block)) for block in blocks)
            j, other = draw.choice(twice), draw.randrange(b)
            p, q = draw.randrange(k), draw.randrange(k)
            blocks[j][p], blocks[other][q] = blocks[other][q], blocks[j][p]


def random_sets(draw: random.Random, t: int, k: int, replicates: int) -> Contents:
    """A resolvable plan."""
    blocks = []
    for _ in range(replicates):
        order = draw.sample(range(t), t)
        blocks += [tuple(sorted(order[j : j + k])) for j in range(0, t, k)]
    return tuple(blocks)


def eigenvalues(contents: Contents, t: int) -> np.ndarray:
    """The x = ρ/(rk) of a plan but for the trivial one, ρ the eigenvalues of NN'."""
    n = incidence(contents, t).astype(float)
    values = np.linalg.eigvalsh(n @ n.T)[:-1]
    return np.asarray(values / (n.sum(axis=1)[0] * n.sum(axis=0)[0]))


def excess(contents: Contents, t: int, blocks: bool, sets: int = 1) -> tuple[int, set[int]]:
    """Steps from even of the meetings of treatments or blocks, and the entries of M that are not 0 or 1."""
    n = incidence(contents, t)
    meets = n.T @ n if blocks else n @ n.T
    size = len(meets)
    may_meet = np.ones((size, size), dtype=bool)
    if sets > 1:
        group = np.arange(size) // (size // sets)
        may_meet = group[:, None] != group[None, :]
    np.fill_diagonal(may_meet, False)
    total = int(meets[0][may_meet[0]].sum())
    m: Ints = (meets - total // int(may_meet[0].sum()))[may_meet]
    return int((m * (m - 1)).sum()) // 4, set(m.tolist()) - {0, 1}
