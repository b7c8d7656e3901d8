"""A random walk among layouts that seldom lets neighbours clash, and a check that it forgot its start."""

from __future__ import annotations

from collections.abc import Iterable
from math import exp, log, sqrt
from random import Random

import numpy as np

from search.field.beside import Restriction
from search.field.urn import Standing, Urn

BLOCK_SHARE, LABEL_SHARE = 0.08, 0.04
"""Shares of the steps that exchange two whole blocks, and the names of two treatments."""
STIFFEST = 12.0


class Walk:
    """Exchanges of plots within blocks, of alike blocks, and of names that play the same part.

    What is in the soil already stays: only the other plots are exchanged or renamed.

    A step that makes `d` more clashes is taken with chance `exp(−stiffness d)` (Metropolis et al. 1953).
    Every layout of the urn can be reached, so the walk settles where each layout has a weight by its
    number of clashes alone: those without a clash are then all equally likely.
    """

    def __init__(self, urn: Urn, limit: Restriction, standing: Standing, random: np.random.Generator) -> None:
        self.urn, self.limit = urn, limit
        self.standing: list[int] = standing.tolist()
        self.foes = [frozenset(np.flatnonzero(row).tolist()) for row in limit.clashing]
        self.clashes = limit.clashes(standing)
        self.stiffness = min(STIFFEST, 3.0 + log(1 + self.clashes))
        self.random = Random(int(random.integers(2**63)))
        self.within = [plots for plots in urn.free if len(plots) > 1]
        self.sizes = [len(plots) for plots in self.within]
        self.alike = [members for members in urn.alike if len(members) > 1]
        # Names that nobody's rule tells apart clash with whoever stands beside them, whatever they are.
        named = limit.clashing.copy()
        np.fill_diagonal(named, False)
        self.parts = [members for members in urn.parts if len(members) > 1] if named.any() else []

    def sweep(self) -> None:
        """As many steps as there are plots."""
        if not (self.within or self.alike or self.parts):
            return
        blocks = self.random.choices(self.within, self.sizes, k=self.urn.n) if self.within else []
        for step in range(self.urn.n):
            chance = self.random.random()
            if self.alike and (chance < BLOCK_SHARE or not self.within):
                self._exchange_blocks()
            elif self.parts and (chance < BLOCK_SHARE + LABEL_SHARE or not self.within):
                self._exchange_names()
            elif self.within:
                p, q = self.random.sample(blocks[step], 2)
                self._try({p: self.standing[q], q: self.standing[p]})

    def _exchange_blocks(self) -> None:
        one, other = self.random.sample(self.random.choice(self.alike), 2)
        change = {}
        for p, q in zip(self.urn.free[one], self.urn.free[other], strict=True):
            change[p], change[q] = self.standing[q], self.standing[p]
        self._try(change)

    def _exchange_names(self) -> None:
        one, other = self.random.sample(self.random.choice(self.parts), 2)
        to = {one: other, other: one}
        fixed = self.urn.fixed
        self._try({p: to[i] for p, i in enumerate(self.standing) if i in to and p not in fixed})

    def _try(self, change: dict[int, int]) -> None:
        before = self._clashes_at(change)
        old = {p: self.standing[p] for p in change}
        for p, i in change.items():
            self.standing[p] = i
        more = self._clashes_at(change) - before
        if more <= 0 or self.random.random() < exp(-self.stiffness * more):
            self.clashes += more
            return
        for p, i in old.items():
            self.standing[p] = i

    def _clashes_at(self, plots: Iterable[int]) -> int:
        """Clashes that any of these plots has a part in, each pair once."""
        standing, foes, near = self.standing, self.foes, self.limit.near
        seen = set(plots)
        found = 0
        for p in seen:
            mine = foes[standing[p]]
            if mine:
                found += sum(standing[q] in mine and (q > p or q not in seen) for q in near[p])
        return found

    def layout(self) -> Standing:
        """The layout at which the walk stands."""
        return np.array(self.standing, dtype=np.int64)


def forgets(layouts: tuple[Standing, Standing], walks: tuple[Walk, Walk]) -> bool:
    """Whether walks agree with their own past no more than with each other.

    Two walks from independent draws share only what the rule forces upon every layout; a walk that still
    shares more with its own past has not forgotten where it began. Four standard deviations are allowed,
    plots counted as independent.

    Parameters
    ----------
    layouts : where each walk stood half way
    walks : the walks at their end
    """
    ends = [walk.layout() for walk in walks]
    own = sum(int((past == end).sum()) for past, end in zip(layouts, ends, strict=True)) / 2
    crossed = sum(int((layouts[one] == ends[1 - one]).sum()) for one in (0, 1)) / 2
    return own <= crossed + 4 * sqrt(max(crossed, 1.0))
