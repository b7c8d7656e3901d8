"""Exact minima over small whole-number vectors."""

from __future__ import annotations

from fractions import Fraction
from itertools import product

import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from search.proof.certificates import lattice
from search.proof.certificates.lattice import Coordinate, least_cost
from search.proof.records import Refuted

entries = st.builds(
    lambda value, cost, low, more: Coordinate(value, cost, low, low + more),
    st.fractions(min_value=0, max_value=1, max_denominator=6),
    st.fractions(min_value=-3, max_value=3, max_denominator=6),
    st.integers(0, 2),
    st.integers(0, 3),
)


@given(st.lists(entries, min_size=1, max_size=3), st.integers(1, 2), st.integers(0, 6), st.integers(0, 4))
@settings(deadline=None)
def test_agrees_with_trying_every_vector(
    coordinates: list[Coordinate], squared: int, fewest: int, more: int
) -> None:
    """The least cost is that of all vectors in range, and None where there is none."""
    costs = [
        squared * sum(e.value * x for e, x in zip(coordinates, vector, strict=True)) ** 2
        + sum(e.cost * x for e, x in zip(coordinates, vector, strict=True))
        for vector in product(*(range(e.low, e.high + 1) for e in coordinates))
        if fewest <= sum(vector) <= fewest + more
    ]
    assert least_cost(coordinates, squared, fewest, fewest + more) == min(costs, default=None)


def test_gives_up_in_words(monkeypatch: pytest.MonkeyPatch) -> None:
    """More sums than can be followed are refuted, not followed for hours."""
    monkeypatch.setattr(lattice, "MOST_STATES", 10)
    many = [Coordinate(Fraction(1, s), Fraction(0), 0, 1) for s in range(2, 9)]
    with pytest.raises(Refuted, match="too many block sizes"):
        least_cost(many, 1, 0, 7)
