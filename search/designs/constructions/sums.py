"""Two designs for the same treatments and block size side by side: their λ add up."""

from __future__ import annotations

from search.designs.conditions import Balanced, with_meetings
from search.designs.constructions.common import Build, Built


def sums(sizes: Balanced, build: Build) -> Built | None:
    """The first split of λ whose two parts can be built; replicates are kept where both have them."""
    for less in range(1, sizes.meetings // 2 + 1):
        first_sizes = with_meetings(sizes.t, sizes.k, less)
        second_sizes = with_meetings(sizes.t, sizes.k, sizes.meetings - less)
        if first_sizes is None or second_sizes is None:
            continue
        first = build(first_sizes)
        second = build(second_sizes) if first else None
        if first and second:
            return together(first, second)
    return None


def together(first: Built, second: Built) -> Built:
    """The blocks of both."""
    replicates: tuple[tuple[int, ...], ...] = ()
    if first.replicates and second.replicates:
        shift = len(first.blocks)
        replicates = first.replicates + tuple(tuple(j + shift for j in x) for x in second.replicates)
    return Built(first.blocks + second.blocks, f"sum of: {first.how}; and: {second.how}", replicates)
