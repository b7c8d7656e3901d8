"""The even share: how many plots each treatment gets where the file does not say."""

from __future__ import annotations

from collections.abc import Sequence
from fractions import Fraction
from math import ceil, floor

Limits = tuple[int, int | None]
"""Least and most plots; None where nothing limits them from above."""


def even_ranges(own: Sequence[Limits], plots: int) -> tuple[tuple[int, int], ...]:
    """The range ⌊x⌋ to ⌈x⌉ of every treatment, x clamped to the treatment's own limits.

    One x serves all: the one for which the clamped shares sum to the number of plots. Where no x does,
    the nearest end is taken, and the counting checks will tell that the plots do not add up.

    Parameters
    ----------
    own : for each treatment its own limits
    plots : plots to share out
    """

    def clamped(x: Fraction, limits: Limits) -> Fraction:
        least, most = limits
        x = max(x, Fraction(least))
        return x if most is None else min(x, Fraction(most))

    ends = {Fraction(end) for limits in own for end in limits if end is not None} | {Fraction(1)}
    corners = sorted(ends | {Fraction(max(plots, 1))})
    totals = [sum(clamped(x, limits) for limits in own) for x in corners]
    x = corners[-1] if totals[-1] < plots else corners[0]
    for low, high, below, above in zip(corners, corners[1:], totals, totals[1:], strict=False):
        if below <= plots <= above:
            x = low if above == below else low + (plots - below) * (high - low) / (above - below)
            break
    shares = [clamped(x, limits) for limits in own]
    return tuple((floor(share), ceil(share)) for share in shares)
