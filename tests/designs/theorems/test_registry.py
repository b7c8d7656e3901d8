"""The registry of impossibility theorems."""

from __future__ import annotations

import pytest

from search.designs.conditions import conditions
from search.designs.theorems import obstruction

REFUSED = [
    (15, 5, 21, "Hall and Connor"), (21, 6, 28, "Hall and Connor"), (22, 7, 22, "Schützenberger"),
    (29, 8, 29, "Bruck"), (36, 6, 42, "Hall and Connor"), (36, 8, 45, "Hall and Connor"),
    (43, 7, 43, "Bruck"), (46, 10, 46, "Schützenberger"), (46, 6, 69, "Houghten"),
    (22, 8, 33, "Bilous"), (100, 10, 110, "Lam"),
]  # fmt: skip
"""(t, k, b) and the theorem: sets that published theorems rule out, and the affine plane of order 10."""

UNRESOLVABLE = [(6, 3, 10), (10, 5, 18), (21, 7, 30), (28, 7, 36), (15, 5, 21), (36, 6, 42)]
"""(t, k, b): r ≤ 10, excluded by Bose 1942, or because there is no design at all."""


@pytest.mark.parametrize(("t", "k", "b", "source"), REFUSED)
def test_impossible_sets_are_refused_with_their_source(t: int, k: int, b: int, source: str) -> None:
    """Each one meets the counting conditions and names the paper that rules it out."""
    sizes = conditions(t, b, k).allowed
    assert sizes is not None
    assert source in obstruction(sizes)


@pytest.mark.parametrize(("t", "k", "b"), UNRESOLVABLE)
def test_replicates_that_cannot_be_are_refused(t: int, k: int, b: int) -> None:
    """Asked for in replicates they are impossible."""
    sizes = conditions(t, b, k).allowed
    assert sizes is not None
    assert obstruction(sizes, resolvable=True)


def test_bose_says_which_condition_fails() -> None:
    """k must divide t, b reach t + r − 1, and with equality k²/t be whole; otherwise nothing is said."""
    for (t, k, b), reason in {
        (7, 3, 7): "cannot be made of blocks of 3",
        (10, 5, 18): "25/10",
        (6, 3, 10): "9/6",
    }.items():
        sizes = conditions(t, b, k).allowed
        assert sizes is not None
        assert reason in obstruction(sizes, resolvable=True)
        assert not obstruction(sizes)
    twenty = conditions(6, 20, 3).allowed
    assert twenty is not None
    assert not obstruction(twenty, resolvable=True)
