"""Designs with r = k + λ: the numbers of what is left of a symmetric one without a block and its points."""

from __future__ import annotations

from search.designs.conditions import Balanced, conditions
from search.designs.theorems.literature import published
from search.designs.theorems.symmetric import bruck_ryser_chowla, schuetzenberger


def hall_connor(sizes: Balanced) -> str:
    """With λ = 1 or 2 and r = k + λ the design extends to a symmetric one, so that must be possible too.

    Source: Hall & Connor 1954, An embedding theorem for balanced incomplete block designs, Canadian
    Journal of Mathematics 6, 35–41 (λ = 2; for λ = 1 it is the extension of an affine plane).
    """
    if sizes.meetings > 2 or sizes.r != sizes.k + sizes.meetings:
        return ""
    parent = conditions(sizes.t + sizes.r, sizes.b + 1, sizes.r).allowed
    if parent is None:
        return ""
    reason = schuetzenberger(parent) or bruck_ryser_chowla(parent) or published(parent)
    if not reason:
        return ""
    return (
        f"it would extend to {parent.t} treatments in {parent.b} blocks of {parent.k} "
        f"(Hall and Connor 1954), which is impossible: {reason}"
    )
