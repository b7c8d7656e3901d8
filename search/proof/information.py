"""What the blocks tell about treatments: the information matrix in whole numbers.

Where blocks are random, with γ = p/q their variance over that of plots, it is
`C(γ) = R − N diag(γ/(1+γk)) N' − s s'/Σs` with `s_i = Σ_B n_iB/(1+γk_B)`. With `m_B = q + p k_B` the weights
are p/m_B and q/m_B, so that over `L = lcm(m)` and `u = N (L/m)` it is `R − p N diag(1/m) N' − q u u'/(L Σu)`.
"""

from __future__ import annotations

from dataclasses import dataclass
from fractions import Fraction
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
    scaled : (t, t) C, or C(γ), times `scale`, whole numbers
    scale : what makes them whole; the least common multiple of the block sizes where blocks are fixed
    components : parts of the plan that no block joins; 1 for a connected plan
    random : whether blocks are random, so that differences between such parts can be estimated
    """

    counts: NDArray[np.int64]
    scaled: Whole
    scale: int
    components: int
    random: bool = False

    @property
    def estimable(self) -> bool:
        """Whether every difference of two treatments can be estimated."""
        return self.components == 1 or (self.random and min(self.replication) > 0)

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


def information(contents: Contents, t: int, blocks_random: Fraction | None = None) -> Information:
    """The information matrix of block contents.

    Parameters
    ----------
    contents : for each block the numbers of its treatments
    t : number of treatments, at least 2
    blocks_random : γ, block variance over plot variance; None where blocks are fixed
    """
    counts = np.zeros((t, len(contents)), dtype=np.int64)
    for j, block in enumerate(contents):
        for i in block:
            counts[i, j] += 1
    if blocks_random is not None:
        return _with_random_blocks(counts, blocks_random, _components(contents, t))
    scale = lcm(*(len(block) for block in contents))
    weighted = counts.astype(object) * np.array([scale // len(block) for block in contents], object)
    scaled = -exact_product(weighted, counts.T)
    scaled[np.diag_indices(t)] += counts.sum(axis=1).astype(object) * scale
    return Information(counts, scaled, scale, _components(contents, t))


def _with_random_blocks(counts: NDArray[np.int64], ratio: Fraction, components: int) -> Information:
    p, q = ratio.numerator, ratio.denominator
    sizes = [q + p * int(k) for k in counts.sum(axis=0)]
    unit = lcm(*sizes)
    wide = counts.astype(object)
    shares = np.array([unit // m for m in sizes], object)
    between = wide @ shares
    whole = int(between.sum())
    scaled = -p * whole * exact_product(wide * shares, wide.T) - q * np.outer(between, between)
    scaled[np.diag_indices(len(wide))] += wide.sum(axis=1) * (unit * whole)
    return Information(counts, scaled, unit * whole, components, random=True)


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
