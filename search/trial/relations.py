"""A trial stripped of names: marks of its treatments and blocks, and how they stand to each other.

Two rules that say the same leave the same relations; names, map, cautions and settings leave none.
Who plays the same part as whom (`roles`) and the canonical numbering (`canonical`) rest on this.
"""

from __future__ import annotations

from dataclasses import dataclass
from fractions import Fraction

import numpy as np

from search.trial.records import AimKind, Trial
from search.trial.tables import Bools, Ints, Tables, tables


@dataclass(frozen=True, slots=True, eq=False)
class Relations:
    """Everything that the trial's rules and its aim say, by numbers alone.

    Parameters
    ----------
    ranges : for each treatment the least and most plots stated
    controls : for each treatment whether it is a control and the aim asks who is
    sizes : (b,) plots of each block
    emptier : (b,) True where some of them may stay filler
    group : (b,) number of the block's replicate, -1 outside
    pairs : (t, t) fewest and most meetings and whether the pair is apart, in one number
    cells : (t, b) fewest and most plots in the block and the plots in its replicate, in one number
    blocks_random : block variance over plot variance, None where blocks are fixed
    shares : weight of each contrast of the aim over the sum of all weights
    coefficients : for each contrast the coefficient of each treatment
    """

    ranges: tuple[tuple[int, int], ...]
    controls: tuple[bool, ...]
    sizes: Ints
    emptier: Bools
    group: Ints
    pairs: Ints
    cells: Ints
    blocks_random: Fraction | None
    shares: tuple[Fraction, ...]
    coefficients: tuple[tuple[Fraction, ...], ...]

    @property
    def t(self) -> int:
        """Number of treatments."""
        return len(self.ranges)

    @property
    def b(self) -> int:
        """Number of blocks."""
        return len(self.sizes)


MEETINGS_BASE = 1 << 20
CELLS_BASE = 1 << 20
"""Counts stay below these, so that three of them share one number without mixing."""


def relations(trial: Trial) -> Relations:
    """The relations of a trial."""
    rules = tables(trial)
    asks_controls = trial.aim.kind is AimKind.AGAINST_CONTROL
    contrasts = trial.aim.contrasts if trial.aim.kind is AimKind.CONTRASTS else ()
    total = sum((contrast.weight for contrast in contrasts), Fraction(0))
    return Relations(
        ranges=tuple((x.least, x.most) for x in trial.treatments),
        controls=tuple(x.control and asks_controls for x in trial.treatments),
        sizes=rules.sizes,
        emptier=rules.fewest < rules.sizes,
        group=rules.group,
        pairs=_pairs(rules),
        cells=_cells(rules),
        blocks_random=trial.blocks_random,
        shares=tuple(contrast.weight / total for contrast in contrasts),
        coefficients=tuple(_row(contrast.of, trial.t) for contrast in contrasts),
    )


def _pairs(rules: Tables) -> Ints:
    most = np.minimum(rules.meet_most, rules.b)
    packed = (rules.meet_least * MEETINGS_BASE + most) * 2 + rules.apart
    np.fill_diagonal(packed, 0)
    return packed


def _cells(rules: Tables) -> Ints:
    inside = rules.group >= 0
    share = np.zeros_like(rules.high)
    share[:, inside] = rules.share[:, rules.group[inside]]
    return (rules.low * CELLS_BASE + rules.high) * CELLS_BASE + share


def unpacked_pair(code: int) -> tuple[int, int, int]:
    """Fewest meetings, most meetings, and 1 for a pair that is apart."""
    meetings, apart = divmod(code, 2)
    return *divmod(meetings, MEETINGS_BASE), apart


def unpacked_cell(code: int) -> tuple[int, int, int]:
    """Fewest and most plots in the block, and the plots in its replicate (0 outside)."""
    counts, share = divmod(code, CELLS_BASE)
    return *divmod(counts, CELLS_BASE), share


def _row(of: tuple[tuple[int, Fraction], ...], t: int) -> tuple[Fraction, ...]:
    row = [Fraction(0)] * t
    for i, coefficient in of:
        row[i] += coefficient
    return tuple(row)
