"""Plots that stay filler, for a search that knows none: each is a treatment of its own on one plot.

A treatment that stands on a single plot tells nothing about any other: in the graph of treatments and blocks
it is a leaf. So a plan with filler has the variances between real treatments that the same plan has with such
treatments on its empty plots, and exchanging one of them for a real treatment moves an empty plot to another
block. Their number stays what it is. The pseudo-determinant is another one, since it counts all differences;
`search.solvers.board.objective` leaves the filler out of it.
"""

from __future__ import annotations

from dataclasses import replace

import numpy as np

from search.trial.records import Contents
from search.trial.tables import Tables

Spare = tuple[int, ...]
"""Plots that stay filler outside replicates, then in each replicate."""


def spare_of(tables: Tables, contents: Contents) -> Spare:
    """The plots that a plan leaves empty."""
    empty = tables.sizes - [len(block) for block in contents]
    return tuple(int(empty[tables.group == g].sum()) for g in range(-1, tables.share.shape[1]))


def least_spare(tables: Tables, planted: int) -> Spare:
    """The plots that stay filler where so many are planted, the most that counting allows."""
    replicates = range(tables.share.shape[1])
    inside = [int(tables.sizes[tables.group == g].sum() - tables.share[:, g].sum()) for g in replicates]
    return (int(tables.sizes.sum()) - planted - sum(inside), *inside)


def with_filler(tables: Tables, spare: Spare) -> Tables:
    """The rules with a treatment for each plot that stays filler; every block is exact.

    Parameters
    ----------
    tables : rules of a trial whose blocks may stay partly empty
    spare : how many plots stay filler, and in which replicates
    """
    many = sum(spare)
    place = np.repeat(np.arange(-1, len(spare) - 1), spare)
    admitted = (tables.fewest < tables.sizes) & (tables.group == place[:, None])
    b, replicates = tables.b, np.arange(len(spare) - 1)

    def rows(own: np.ndarray, value: int) -> np.ndarray:
        """A table over pairs of treatments, of one value wherever filler is one of them."""
        wide = np.full((tables.t + many, tables.t + many), value, dtype=own.dtype)
        wide[: tables.t, : tables.t] = own
        return wide

    once = np.ones(many, dtype=np.int64)
    return replace(
        tables,
        fewest=tables.sizes,
        low=np.vstack([tables.low, np.zeros((many, b), dtype=np.int64)]),
        high=np.vstack([tables.high, admitted.astype(np.int64)]),
        least=np.concatenate([tables.least, once]),
        most=np.concatenate([tables.most, once]),
        apart=rows(tables.apart, 0),
        meet_least=rows(tables.meet_least, 0),
        meet_most=rows(tables.meet_most, b),
        share=np.vstack([tables.share, (place[:, None] == replicates).astype(np.int64)]),
    )


def filled(tables: Tables, contents: Contents) -> Contents:
    """A plan with the filler of `with_filler` on its empty plots."""
    first = tables.t + np.concatenate([[0], np.cumsum(spare_of(tables, contents))])
    following = first.tolist()
    blocks = []
    for j, block in enumerate(contents):
        at = int(tables.group[j]) + 1
        end = following[at] + int(tables.sizes[j]) - len(block)
        blocks.append((*block, *range(following[at], end)))
        following[at] = end
    return tuple(blocks)


def emptied(contents: Contents, t: int) -> Contents:
    """A plan without its filler: of all treatments the first t."""
    return tuple(tuple(i for i in block if i < t) for block in contents)
