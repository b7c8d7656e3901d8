"""The even share."""

from __future__ import annotations

import pytest

from search.trial.even import even_ranges

FREE = (1, None)


@pytest.mark.parametrize(
    ("own", "plots", "shares"),
    [
        ([FREE] * 4, 12, [(3, 3)] * 4),
        ([FREE] * 4, 14, [(3, 4)] * 4),
        ([(6, 6), *[FREE] * 7], 30, [(6, 6), *[(3, 4)] * 7]),
        ([(1, 2), *[FREE] * 3], 14, [(2, 2), *[(4, 4)] * 3]),
        ([(8, 9), *[FREE] * 3], 14, [(8, 8), *[(2, 2)] * 3]),
        ([FREE] * 5, 3, [(1, 1)] * 5),
    ],
)
def test_one_share_serves_all(
    own: list[tuple[int, int | None]], plots: int, shares: list[tuple[int, int]]
) -> None:
    """Every treatment gets ⌊x⌋ or ⌈x⌉ plots of one x, clamped to its own limits (worked by hand)."""
    assert list(even_ranges(own, plots)) == shares
