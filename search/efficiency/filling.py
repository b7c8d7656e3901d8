"""Whole numbers of a fixed sum, each within its range, as even as they can be."""

from __future__ import annotations

import numpy as np

from search.trial.tables import Ints


def least_square_sum(low: Ints, high: Ints, total: int) -> int | None:
    """The least `Σ x²` of integers `low ≤ x ≤ high` with `Σ x = total`.

    All numbers are raised together like water: at level v each stands at v, kept within its own
    range, and what is left lifts some of those that can still rise to v + 1. Squares are convex, so
    no other filling is lower.

    Parameters
    ----------
    low, high : ranges, of any one shape; 0 or more
    total : the sum

    Returns
    -------
    least : the least sum of squares, or None where the ranges cannot give the sum
    """
    if low.size == 0:
        return 0 if total == 0 else None
    if (low > high).any() or not low.sum() <= total <= high.sum():
        return None
    below, above = int(low.min()), int(high.max())
    while below < above:
        middle = (below + above + 1) // 2
        if np.clip(middle, low, high).sum() <= total:
            below = middle
        else:
            above = middle - 1
    level = np.clip(below, low, high)
    left = total - int(level.sum())
    return int((level * level).sum()) + left * (2 * below + 1)
