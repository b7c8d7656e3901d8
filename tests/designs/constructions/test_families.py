"""Flats, relatives, sums, Hadamard matrices and embedding."""

from __future__ import annotations

import pytest

from search.designs.building import directly
from search.designs.checking import block_faults, replicate_faults
from search.designs.conditions import Balanced, conditions
from search.designs.constructions.common import Built, Construction
from search.designs.constructions.embedding import embedding
from search.designs.constructions.flats import flats
from search.designs.constructions.hadamard import doubling, extension
from search.designs.constructions.relatives import complement, derived, nested, residual, subsets
from search.designs.constructions.sums import sums

CASES: list[tuple[Construction, int, int, int]] = [
    (subsets, 6, 3, 20),
    (subsets, 5, 4, 10),
    (complement, 7, 4, 7),
    (complement, 13, 9, 13),
    (flats, 13, 4, 13),
    (flats, 40, 13, 40),
    (flats, 15, 3, 35),
    (flats, 16, 4, 20),
    (flats, 27, 9, 39),
    (flats, 81, 9, 90),
    (residual, 10, 4, 15),
    (residual, 6, 3, 10),
    (derived, 9, 4, 18),
    (derived, 6, 3, 10),
    (nested, 13, 3, 52),
    (sums, 7, 3, 21),
    (extension, 8, 4, 14),
    (extension, 12, 6, 22),
    (doubling, 15, 7, 15),
    (doubling, 39, 19, 39),
]


@pytest.mark.parametrize(("construct", "t", "k", "b"), CASES)
def test_each_construction_gives_its_design(construct: Construction, t: int, k: int, b: int) -> None:
    """Its blocks are balanced by count, and replicates hold every point once."""
    sizes = _sizes(t, b, k)
    built = construct(sizes, directly)
    assert built is not None
    assert block_faults(built.blocks, sizes) == ()
    assert replicate_faults(built.blocks, built.replicates, t) == ()


@pytest.mark.parametrize(
    "construct", [complement, flats, residual, derived, nested, sums, extension, doubling]
)
def test_a_construction_that_does_not_apply_says_nothing(construct: Construction) -> None:
    """(10, 3, 2) is no flat, no sum, no relative of a symmetric design at hand."""
    assert construct(_sizes(10, 30, 3), lambda sizes: None) is None


def test_embedding_completes_a_quasi_residual_design() -> None:
    """(25, 9, 3) from (16, 6, 3), a construction that a prototype found first."""
    sizes = _sizes(25, 25, 9)
    built = embedding(sizes, directly)
    assert built is not None
    assert block_faults(built.blocks, sizes) == ()


def test_relatives_build_nothing_from_nothing() -> None:
    """Without the design that they are made of, they give none."""

    def none(sizes: Balanced) -> Built | None:
        return None

    assert residual(_sizes(10, 15, 4), none) is None
    assert complement(_sizes(7, 7, 4), none) is None


def _sizes(t: int, b: int, k: int) -> Balanced:
    sizes = conditions(t, b, k).allowed
    assert sizes is not None
    return sizes
