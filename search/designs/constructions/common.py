"""What every construction takes and hands back."""

from __future__ import annotations

from collections.abc import Callable, Iterable
from dataclasses import dataclass

from search.designs.conditions import Balanced
from search.designs.records import Blocks


@dataclass(frozen=True, slots=True)
class Built:
    """Blocks, how they were built, and their replicates where the construction knows some."""

    blocks: Blocks
    how: str
    replicates: tuple[tuple[int, ...], ...] = ()


Build = Callable[[Balanced], Built | None]
"""Builds smaller designs for a construction that is made of them."""

Construction = Callable[[Balanced, Build], Built | None]
"""Blocks of a design with these parameters, or None where this construction does not give one."""


def renumbered(blocks: Iterable[Iterable[int]], points: Iterable[int]) -> Blocks:
    """Blocks restricted to some points, which are numbered from 0 in rising order."""
    number = {point: i for i, point in enumerate(sorted(points))}
    return tuple(tuple(sorted(number[x] for x in block if x in number)) for block in blocks)
