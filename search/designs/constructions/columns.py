"""Blocks with a given stabiliser, each known by how often its orbit covers each orbit of pairs.

Counts are packed into one whole number, a field of bits for each orbit of pairs, so that adding two
vectors is one addition and "nothing above λ" is one addition and one mask.
"""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import dataclass, field

import numpy as np

from search.designs.constructions.action import Action, Stabiliser


@dataclass(frozen=True, slots=True)
class Packing:
    """How counts are packed: `rows` fields, each wide enough to hold 3λ without touching the next."""

    rows: int
    most: int
    width: int = field(init=False)
    guards: int = field(init=False)
    slack: int = field(init=False)
    target: int = field(init=False)

    def __post_init__(self) -> None:
        width = (3 * self.most).bit_length() + 1
        ones = sum(1 << width * i for i in range(self.rows))
        object.__setattr__(self, "width", width)
        object.__setattr__(self, "guards", ones << width - 1)
        object.__setattr__(self, "slack", ones * ((1 << width - 1) - 1 - self.most))
        object.__setattr__(self, "target", ones * self.most)

    def over(self, packed: int) -> int:
        """Not 0 where some count is above the most that is allowed (counts up to 3λ are told apart)."""
        return (packed + self.slack) & self.guards

    def count(self, packed: int, row: int) -> int:
        """One count."""
        return packed >> self.width * row & (1 << self.width) - 1

    def masks(self) -> list[int]:
        """For each row the bits of its count."""
        return [((1 << self.width) - 1) << self.width * row for row in range(self.rows)]


@dataclass(frozen=True, slots=True)
class Column:
    """The orbit of one block.

    Parameters
    ----------
    counts : how often the orbit covers each orbit of pairs, packed
    blocks : how many blocks are counted: the order of the group over that of the stabiliser asked for
    block : one of them
    """

    counts: int
    blocks: int
    block: tuple[int, ...]


GENEROUS = 4


@dataclass(slots=True)
class Budget:
    """Work that may still be done, counted in steps so that an outcome does not depend on the clock."""

    steps: int
    used: int = 0

    @property
    def spent(self) -> bool:
        """Whether the work was cut short."""
        return self.used >= self.steps

    def spend(self, steps: int = 1) -> bool:
        """Take steps off; False when none are left."""
        self.used += steps
        return self.used < self.steps

    def share(self, among: int, *, at_least: int) -> Budget:
        """A share of what is left, a generous one as few use theirs up."""
        return Budget(max(GENEROUS * (self.steps - self.used) // among, at_least))


def columns(
    action: Action, stabiliser: Stabiliser, k: int, packing: Packing, budget: Budget
) -> Iterator[Column]:
    """Blocks of k points that are unions of orbits of a stabiliser and cover no pair more than λ times.

    The orbits of the stabiliser are taken in an order in which those that its normaliser joins stand
    together; the first one chosen may then be the first of its class, since the normaliser carries any
    other there. Every branch has its share of the work, so that what is found before the work runs out
    is spread over all of them.
    """
    many = action.order // stabiliser.order
    orbits = stabiliser.orbits
    inner, cross = _weights(action, stabiliser, many, packing)
    sizes = [len(orbit) for orbit in orbits]
    rest = [sum(sizes[i:]) for i in range(len(sizes) + 1)]

    def extend(
        chosen: tuple[int, ...], size: int, counts: int, candidates: list[tuple[int, int]], budget: Budget
    ) -> Iterator[Column]:
        heads = first if not chosen else range(len(candidates))
        for left, position in zip(range(len(heads), 0, -1), heads, strict=True):
            orbit, extra = candidates[position]
            if size + rest[orbit] < k or not budget.spend():
                return
            now, total = size + sizes[orbit], counts + extra
            taken = (*chosen, orbit)
            if now == k:
                yield Column(total, many, tuple(sorted(x for i in taken for x in orbits[i])))
                continue
            row = cross[orbit]
            further = [
                (other, sum_)
                for other, before in candidates[position + 1 :]
                if now + sizes[other] <= k
                and not packing.over(sum_ := before + row[other])
                and not packing.over(total + sum_)
            ]
            budget.spend(len(candidates) // 8)
            share = budget.share(left, at_least=20 * k)
            yield from extend(taken, now, total, further, share)
            budget.spend(share.used)

    usable = [(i, own) for i, own in enumerate(inner) if sizes[i] <= k and own >= 0]
    classes = [stabiliser.classes[i] for i, _ in usable]
    first = [p for p, joined in enumerate(classes) if p == 0 or joined != classes[p - 1]]
    yield from extend((), 0, 0, usable, budget)


def _weights(
    action: Action, stabiliser: Stabiliser, many: int, packing: Packing
) -> tuple[list[int], list[list[int]]]:
    """Packed counts within each orbit (-1: too many) and between each two (capped: they will be refused)."""
    rows, p = len(action.lengths), len(stabiliser.orbits)
    owner = np.zeros(len(action.labels), dtype=np.int64)
    for i, orbit in enumerate(stabiliser.orbits):
        owner[list(orbit)] = i
    x, y = np.triu_indices(len(owner), 1)
    one, other = np.minimum(owner[x], owner[y]), np.maximum(owner[x], owner[y])
    cells, counts = np.unique((one * p + other) * rows + action.labels[x, y], return_counts=True)
    shares = np.minimum(counts * many // action.lengths[cells % rows], packing.most + 1)
    table = [[0] * p for _ in range(p)]
    for cell, share in zip(cells.tolist(), shares.tolist(), strict=True):
        pair, row = divmod(cell, rows)
        table[pair // p][pair % p] += share << packing.width * row
    inner = [-1 if packing.over(table[i][i]) else table[i][i] for i in range(p)]
    return inner, table
