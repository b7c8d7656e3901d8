"""The rules of a trial as arrays, in the form that checking, searching and bounding share."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from search.trial.records import Contents, Trial

Ints = NDArray[np.int64]
Bools = NDArray[np.bool_]


@dataclass(frozen=True, slots=True, eq=False)
class Tables:
    """Arrays over treatments (t), blocks (b) and replicates (g).

    Parameters
    ----------
    sizes : (b,) plots of each block
    low, high : (t, b) fewest and most plots of a treatment in a block: 0 and 0 where it is kept out,
        at least 1 where the block must hold it, at most 1 unless it may stand twice
    least, most : (t,) stated range of plots of each treatment
    apart : (t, t) True for pairs that never share a block
    meet_least, meet_most : (t, t) fewest and most blocks that a pair shares; b where nothing limits it
    group : (b,) number of the block's replicate, -1 outside
    share : (t, g) plots of a treatment in each replicate
    """

    sizes: Ints
    low: Ints
    high: Ints
    least: Ints
    most: Ints
    apart: Bools
    meet_least: Ints
    meet_most: Ints
    group: Ints
    share: Ints

    @property
    def t(self) -> int:
        """Number of treatments."""
        return len(self.least)

    @property
    def b(self) -> int:
        """Number of blocks."""
        return len(self.sizes)

    @property
    def n(self) -> int:
        """Number of plots."""
        return int(self.sizes.sum())

    @property
    def limits_meetings(self) -> bool:
        """Whether any pair's meetings are limited, apart from pairs that never share a block."""
        free = ~self.apart
        return bool(self.meet_least.any() or (self.meet_most[free] < self.b).any())


def tables(trial: Trial) -> Tables:
    """The rules of a trial as arrays."""
    t, b, rules = trial.t, trial.b, trial.rules
    sizes = np.array([block.plots for block in trial.blocks], dtype=np.int64)
    high = np.ones((t, b), dtype=np.int64)
    low = np.zeros((t, b), dtype=np.int64)
    if rules.twice_in_block:
        high *= sizes
        low += sizes // t
    for i, j in rules.must_hold:
        low[i, j] = max(1, low[i, j])
    held = set(rules.must_hold)
    for i, j in rules.keep_out:
        high[i, j] = 0
    for i, j in (*rules.keep_out, *rules.unforced):
        if (i, j) not in held:
            low[i, j] = 0

    apart = np.zeros((t, t), dtype=np.bool_)
    for together in rules.never_share_block:
        apart[np.ix_(together, together)] = True
    np.fill_diagonal(apart, False)
    meet_least = np.zeros((t, t), dtype=np.int64)
    meet_most = np.full((t, t), b, dtype=np.int64)
    for meeting in rules.meet_at_least:
        _limit(meet_least, meeting.pair, meeting.blocks, np.maximum)
    for meeting in rules.meet_at_most:
        _limit(meet_most, meeting.pair, meeting.blocks, np.minimum)
    meet_most[apart] = 0
    np.fill_diagonal(meet_least, 0)
    np.fill_diagonal(meet_most, b)

    group = np.full(b, -1, dtype=np.int64)
    share = np.ones((t, len(rules.replicates)), dtype=np.int64)
    for g, replicate in enumerate(rules.replicates):
        group[list(replicate.blocks)] = g
    for i, times in rules.per_replicate:
        share[i, :] = times
    return Tables(
        sizes=sizes,
        low=low,
        high=high,
        least=np.array([x.least for x in trial.treatments], dtype=np.int64),
        most=np.array([x.most for x in trial.treatments], dtype=np.int64),
        apart=apart,
        meet_least=meet_least,
        meet_most=meet_most,
        group=group,
        share=share,
    )


def _limit(table: Ints, pair: tuple[int, int] | None, blocks: int, tighter: np.ufunc) -> None:
    if pair is None:
        tighter(table, blocks, out=table)
    else:
        i, j = pair
        table[i, j] = table[j, i] = tighter(table[i, j], blocks)


def incidence(contents: Contents, t: int) -> Ints:
    """Plots of each treatment in each block, shape (t, b)."""
    matrix = np.zeros((t, len(contents)), dtype=np.int64)
    for j, block in enumerate(contents):
        np.add.at(matrix[:, j], list(block), 1)
    return matrix


def contents_of(matrix: Ints) -> Contents:
    """Block contents of an incidence matrix of shape (t, b)."""
    t = matrix.shape[0]
    return tuple(tuple(np.repeat(np.arange(t), column).tolist()) for column in matrix.T)


def turned(contents: Contents, many: int) -> Contents:
    """The plan with the two sides exchanged: for each of so many treatments the blocks that it stands in.

    Parameters
    ----------
    contents : block contents, or what this function made of some
    many : treatments, or then blocks
    """
    holding: list[list[int]] = [[] for _ in range(many)]
    for j, block in enumerate(contents):
        for i in block:
            holding[i].append(j)
    return tuple(tuple(blocks) for blocks in holding)
