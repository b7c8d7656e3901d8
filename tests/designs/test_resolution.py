"""Designs in complete replicates."""

from __future__ import annotations

import pytest

from search.designs.checking import faults
from search.designs.existence import exists
from search.designs.records import Existence

RESOLVED = [
    (9, 3, 1), (16, 4, 1), (25, 5, 1), (15, 3, 1), (8, 4, 3), (9, 3, 2), (49, 7, 1), (28, 4, 1), (64, 8, 1),
    (6, 3, 4), (21, 3, 1), (16, 4, 2), (81, 9, 1),
]  # fmt: skip
"""(t, k, λ): all resolvable sets with r ≤ 10."""

EXCLUDED = [(6, 3, 2), (10, 5, 4), (21, 7, 3), (28, 7, 2), (15, 5, 2), (36, 6, 1)]


@pytest.mark.parametrize(("t", "k", "meetings"), RESOLVED)
def test_resolvable_designs_are_built_with_their_replicates(t: int, k: int, meetings: int) -> None:
    """Each has r replicates that hold every treatment once, and every pair λ times."""
    verdict = exists(t, k, meetings=meetings, resolvable=True)
    assert verdict.design is not None
    assert faults(verdict.design) == ()
    assert len(verdict.design.replicates) == verdict.design.sizes.r


@pytest.mark.parametrize(("t", "k", "meetings"), EXCLUDED)
def test_excluded_ones_are_impossible(t: int, k: int, meetings: int) -> None:
    """Bose 1942, or no design at all."""
    verdict = exists(t, k, meetings=meetings, resolvable=True)
    assert verdict.existence is Existence.IMPOSSIBLE
    assert verdict.reason
