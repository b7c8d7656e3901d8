"""What the blocks tell about treatments: the information matrix in whole numbers."""

from __future__ import annotations

from dataclasses import dataclass
from math import lcm

import numpy as np
from numpy.typing import NDArray

from search.proof.integers import Whole, exact_product
from search.trial.records import Contents


@dataclass(frozen=True, slots=True, eq=False)
class Information:
    """The information matrix C = R − N K⁻¹ N' of block contents.

    Parameters
    ----------
    counts : (t, b) N, plots of each treatment in each block
    scaled : (t, t) C times `scale`, whole numbers
    scale : least common multiple of the block sizes
    components : parts of the plan that no block joins; 1 for a connected plan
    """

    counts: NDArray[np.int64]
    scaled: Whole
    scale: int
    components: int

    @property
    def t(self) -> int:
        """Number of treatments."""
        return len(self.scaled)

    @property
    def replication(self) -> list[int]:
        """Plots of each treatment."""
        return [int(x) for x in self.counts.sum(axis=1)]

    @property
    def trace_scaled(self) -> int:
        """tr C times the scale."""
        return int(self.scaled.trace())

    @property
    def completely_symmetric(self) -> bool:
        """Whether all pairs of treatments are compared alike."""
        diagonal = self.scaled.diagonal()
        beside = self.scaled[~np.eye(self.t, dtype=bool)]
        return bool((diagonal == diagonal[0]).all() and (beside == beside[0]).all())


def information(contents: Contents, t: int) -> Information:
    """The information matrix of block contents.

    Parameters
    ----------
    contents : for each block the numbers of its treatments
    t : number of treatments, at least 2
    """
    counts = np.zeros((t, len(contents)), dtype=np.int64)
    for j, block in enumerate(contents):
        for i in block:
            counts[i, j] += 1
    scale = lcm(*(len(block) for block in contents))
    weighted = counts.astype(object) * np.array([scale // len(block) for block in contents], object)
    scaled = -exact_product(weighted, counts.T)
    scaled[np.diag_indices(t)] += counts.sum(axis=1).astype(object) * scale
    return Information(counts, scaled, scale, _components(contents, t))


def _components(contents: Contents, t: int) -> int:
    """Sets of treatments joined by blocks, by merging the sets that each block touches."""
    leader = list(range(t))

    def led_by(i: int) -> int:
        while leader[i] != i:
            leader[i] = leader[leader[i]]
            i = leader[i]
        return i

    for block in contents:
        for i in block[1:]:
            leader[led_by(i)] = led_by(block[0])
    return sum(leader[i] == i for i in range(t))
