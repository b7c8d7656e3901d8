"""Even filling against trying every filling."""

from __future__ import annotations

from itertools import product

import numpy as np
from hypothesis import given
from hypothesis import strategies as st

from search.efficiency.filling import least_square_sum


@given(st.lists(st.tuples(st.integers(0, 3), st.integers(-1, 3)), max_size=5), st.integers(-1, 16))
def test_no_filling_has_a_smaller_sum_of_squares(ranges: list[tuple[int, int]], total: int) -> None:
    """The least Σx² over all whole numbers in their ranges, and None where the sum cannot be had."""
    low = np.array([x for x, _ in ranges], dtype=np.int64)
    high = np.array([x + more for x, more in ranges], dtype=np.int64)
    squares = [
        sum(x * x for x in values)
        for values in product(*(range(x, x + more + 1) for x, more in ranges))
        if sum(values) == total
    ]
    assert least_square_sum(low, high, total) == (min(squares) if squares else None)
