"""What was tried for hard sets that are not built here; a search that ended early decides nothing."""

from __future__ import annotations

from search.designs.conditions import Balanced

ATTEMPTS = {
    (71, 15, 3): (
        "tried: groups of order 14 to 168 on 10 copies of Z7 and a fixed point and on 8 copies of GF(8) and "
        "7 fixed points, some thirty of them with up to 100,000 steps for each stabiliser"
    ),
    (56, 12, 3): "tried: as the residual of (71, 15, 3)",
    (28, 10, 5): (
        "tried: 15 groups of order 14 to 84 on 4 copies of Z7, one of order 21 with 407,680 different orbits "
        "of blocks, and 322 groups of order 8 to 88 with up to 60,000 steps for each stabiliser"
    ),
}
"""(t, k, λ) to a note."""


def notes(sizes: Balanced) -> str:
    """What was tried, or an empty string."""
    return ATTEMPTS.get((sizes.t, sizes.k, sizes.meetings), "")
