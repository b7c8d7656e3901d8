"""Is it a balanced design? Counted from the blocks alone, by code that no construction uses."""

from __future__ import annotations

from itertools import combinations

import numpy as np

from search.designs.conditions import Balanced
from search.designs.records import Blocks, Design


def faults(design: Design) -> tuple[str, ...]:
    """Everything that keeps a design from being what it claims to be; empty for a sound one."""
    return (
        *block_faults(design.blocks, design.sizes),
        *replicate_faults(design.blocks, design.replicates, design.sizes.t),
    )


def block_faults(blocks: Blocks, sizes: Balanced) -> tuple[str, ...]:
    """What keeps blocks from being balanced with these parameters, by counting every pair."""
    t = sizes.t
    if len(blocks) != sizes.b:
        return (f"{len(blocks)} blocks, not {sizes.b}",)
    together = np.zeros((t, t), dtype=np.int64)
    for block in blocks:
        if len(set(block)) != sizes.k or len(block) != sizes.k or not all(0 <= x < t for x in block):
            return (f"block {block} does not hold {sizes.k} different points",)
        for x, y in combinations(block, 2):
            together[x, y] += 1
            together[y, x] += 1
    wrong = np.argwhere(np.triu(together != sizes.meetings, 1))
    if len(wrong):
        x, y = wrong[0]
        return (f"points {x} and {y} share {together[x, y]} blocks, not {sizes.meetings}",)
    return ()


def replicate_faults(blocks: Blocks, replicates: tuple[tuple[int, ...], ...], t: int) -> tuple[str, ...]:
    """What keeps replicates from holding every point once and every block once."""
    if not replicates:
        return ()
    if sorted(j for replicate in replicates for j in replicate) != list(range(len(blocks))):
        return ("the replicates do not hold every block once",)
    for replicate in replicates:
        if sorted(x for j in replicate for x in blocks[j]) != list(range(t)):
            return (f"replicate {replicate} does not hold every point once",)
    return ()
