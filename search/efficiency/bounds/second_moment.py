"""From a second moment of the eigenvalues to a bound; what both second-moment programs share.

Where nothing stands twice in a block, `tr C = n − b` for every plan. Each program finds a number that
`tr C²` of no plan is below; the best eigenvalues with that trace and second moment give the bound.

Where blocks are random, all of k plots, and all treatments have r plots, `C(γ) = (1−φ) r + φ C` on contrasts
with `φ = γk/(1+γk)`: the best eigenvalues of C give those of C(γ), for the inverse and the logarithm of
`(1−φ) r + φ x` fall under the same theorem.
"""

from __future__ import annotations

from collections.abc import Mapping
from fractions import Fraction
from math import lcm
from typing import Any

import numpy as np
from numpy.typing import NDArray

from search.efficiency.bounds.problem import Problem, bound_on_spectrum
from search.efficiency.bounds.spectrum import extreme_spectrum
from search.efficiency.records import Bound
from search.trial.records import Trial
from search.trial.tables import Ints

MOST_COLUMNS = 20_000
"""A program that would need more columns is not tried."""


def applies(trial: Trial) -> bool:
    """Whether nothing stands twice in a block and the aim depends on the eigenvalues of C alone."""
    alike = trial.blocks_random is None or (
        len({block.plots for block in trial.blocks}) == 1
        and len({plots for x in trial.treatments for plots in (x.least, x.most)}) == 1
    )
    return trial.aim.kind.depends_on_eigenvalues and not trial.rules.twice_in_block and alike


def bound_from(given: Problem, argument: str, squares: Fraction, multipliers: Mapping[str, Any]) -> Bound:
    """The bound that `tr C² ≥ squares` gives."""
    spectrum = extreme_spectrum(given.m, given.trace, squares, given.cap, known_eigenvalues(given))
    if given.trial.blocks_random is not None:
        kept, r = _lost_within_blocks(given.trial), given.trial.treatments[0].least
        spectrum = [((1 - kept) * r + kept * x, times) for x, times in spectrum]
    return bound_on_spectrum(given, argument, spectrum, multipliers)


def _lost_within_blocks(trial: Trial) -> Fraction:
    """φ: the part of what blocks take that random blocks still take."""
    ratio = (trial.blocks_random or 0) * Fraction(trial.blocks[0].plots)
    return ratio / (1 + ratio)


def known_eigenvalues(given: Problem) -> tuple[int, int]:
    """(q, r) where q eigenvalues equal the common replication r of every plan.

    `N'z = 0` makes `Cz = rz`. The columns of N span no more than b dimensions, and g − 1 fewer
    where all blocks lie in g replicates, since those of each replicate have the same sum.
    """
    least, most = given.limits.least, given.limits.most
    r = int(least[0])
    if (least != r).any() or (most != r).any():
        return 0, r
    replicates = len(given.trial.rules.replicates)
    fewer = replicates - 1 if replicates and (given.rules.group >= 0).all() else 0
    return max(0, given.trial.t - given.trial.b + fewer), r


class Grid:
    """Whole-number arithmetic for sums of products of `1/k`, `1/k'` and rounded prices.

    Parameters
    ----------
    sizes : the block sizes

    Attributes
    ----------
    unit : least common multiple of the sizes: `unit / k` is whole
    fine : prices are rounded to multiples of 1/fine, about 10⁹ and where it can be a multiple of
        `unit²`, since the best prices mostly are multiples of `1/unit²`
    scale : everything times this is whole
    """

    def __init__(self, sizes: Ints) -> None:
        self.unit = lcm(*sizes.tolist())
        square = self.unit**2
        self.fine = 10**9 // square * square or 10**9
        self.scale = lcm(self.fine, square)

    def price(self, value: float) -> Fraction:
        """The nearest multiple of 1/fine."""
        return Fraction(round(value * self.fine), self.fine)

    def whole(self, value: Fraction) -> int:
        """A value on the grid, times the scale."""
        return int(value * self.scale)

    def array(self, values: Ints, largest: int) -> NDArray[Any]:
        """The values in a type that holds results up to `largest` times the scale exactly."""
        return values.astype(np.int64 if largest * self.scale < 2**61 else object)
