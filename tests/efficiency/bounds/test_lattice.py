"""Whole-number vectors: alike ones and all within ranges."""

from __future__ import annotations

from itertools import product

import numpy as np
from hypothesis import given
from hypothesis import strategies as st

from search.efficiency.bounds.lattice import alike, lattice


@given(
    st.lists(st.tuples(st.integers(0, 3), st.integers(0, 3)), max_size=4),
    st.integers(0, 8),
    st.integers(0, 5),
)
def test_all_vectors_are_listed_once(ranges: list[tuple[int, int]], least: int, more: int) -> None:
    """Exactly the vectors within the ranges whose sum is within its own."""
    low = np.array([x for x, _ in ranges], dtype=np.int64)
    high = np.array([x + y for x, y in ranges], dtype=np.int64)
    expected = [
        values
        for values in product(*(range(x, x + y + 1) for x, y in ranges))
        if least <= sum(values) <= least + more
    ]
    found = lattice(low, high, least, least + more, 10_000)
    assert found is not None
    if ranges:
        assert sorted(map(tuple, found.tolist())) == expected
    capped = lattice(low, high, least, least + more, 5)
    assert (capped is None) == (bool(ranges) and len(expected) > 5)


@given(st.lists(st.tuples(*[st.integers(0, 2)] * 3), min_size=1, max_size=20))
def test_alike_vectors_have_one_label(vectors: list[tuple[int, ...]]) -> None:
    """Labels are equal exactly where the vectors are, and count from 0."""
    labels = alike(np.array(vectors)).tolist()
    for i, first in enumerate(vectors):
        for j, second in enumerate(vectors):
            assert (labels[i] == labels[j]) == (first == second)
    assert sorted(set(labels)) == list(range(len(set(vectors))))
