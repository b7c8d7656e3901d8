"""Designs made from one other: complement, residual, derived, all subsets, one design inside another."""

from __future__ import annotations

from itertools import combinations
from math import comb

from search.designs.conditions import Balanced, conditions, with_meetings
from search.designs.constructions.common import Build, Built, renumbered


def subsets(sizes: Balanced, build: Build) -> Built | None:
    """All subsets of k treatments, as often as the number of blocks asks for."""
    many, left = divmod(sizes.b, comb(sizes.t, sizes.k))
    if left:
        return None
    times = "" if many == 1 else f", {many} times"
    return Built(tuple(combinations(range(sizes.t), sizes.k)) * many, f"all sets of {sizes.k}{times}")


def complement(sizes: Balanced, build: Build) -> Built | None:
    """For blocks of more than half the treatments: the complements of smaller blocks."""
    if 2 * sizes.k <= sizes.t or sizes.t - sizes.k < 2:
        return None
    smaller = conditions(sizes.t, sizes.b, sizes.t - sizes.k).allowed
    part = build(smaller) if smaller else None
    if part is None:
        return None
    points = set(range(sizes.t))
    blocks = tuple(tuple(sorted(points.difference(block))) for block in part.blocks)
    return Built(blocks, f"complement of: {part.how}")


def residual(sizes: Balanced, build: Build) -> Built | None:
    """A symmetric design without a block and its points (Bose 1939)."""
    if sizes.r != sizes.k + sizes.meetings:
        return None
    parent = _symmetric(sizes.t + sizes.r, sizes.r, build)
    if parent is None:
        return None
    gone, *rest = parent.blocks
    blocks = renumbered(rest, set(range(sizes.t + sizes.r)).difference(gone))
    return Built(blocks, f"residual of: {parent.how}")


def derived(sizes: Balanced, build: Build) -> Built | None:
    """The intersections of a block of a symmetric design with all the others (Bose 1939)."""
    if sizes.meetings != sizes.k - 1:
        return None
    parent = _symmetric(sizes.b + 1, sizes.t, build)
    if parent is None:
        return None
    kept, *rest = parent.blocks
    return Built(renumbered(rest, kept), f"derived from: {parent.how}")


def _symmetric(t: int, k: int, build: Build) -> Built | None:
    sizes = conditions(t, t, k).allowed
    return build(sizes) if sizes else None


def nested(sizes: Balanced, build: Build) -> Built | None:
    """Every block of a design with larger blocks is replaced by a design on its points.

    λ is the product of the two; the count of pairs shows it.
    """
    for larger in range(sizes.k + 1, sizes.t):
        for meetings in range(1, sizes.meetings):
            if sizes.meetings % meetings:
                continue
            outer_sizes = with_meetings(sizes.t, larger, meetings)
            inner_sizes = with_meetings(larger, sizes.k, sizes.meetings // meetings)
            if outer_sizes is None or inner_sizes is None:
                continue
            inner = build(inner_sizes)
            outer = build(outer_sizes) if inner else None
            if inner and outer:
                blocks = tuple(tuple(big[i] for i in small) for big in outer.blocks for small in inner.blocks)
                return Built(blocks, f"in each block of: {outer.how}; stands: {inner.how}")
    return None
