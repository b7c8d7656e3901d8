"""Designs whose blocks fall into complete replicates."""

from __future__ import annotations

from search.designs.conditions import Balanced


def bose(sizes: Balanced) -> str:
    """k divides t; b ≥ t + r − 1; with equality two blocks of different replicates meet in k²/t points.

    Source: Bose 1942, A note on the resolvability of balanced incomplete block designs, Sankhyā 6,
    105–110.
    """
    t, b, k, r = sizes.t, sizes.b, sizes.k, sizes.r
    if t % k:
        return f"a replicate cannot be made of blocks of {k} when there are {t} treatments"
    if b < t + r - 1:
        return f"in complete replicates it needs t + r − 1 = {t + r - 1} blocks, and has {b} (Bose 1942)"
    if b == t + r - 1 and k * k % t:
        return (
            f"with b = t + r − 1 blocks of different replicates would meet in k²/t = {k * k}/{t} treatments, "
            "not a whole number (Bose 1942)"
        )
    return ""
