"""The verdict on balanced designs."""

from __future__ import annotations

from fractions import Fraction

import pytest

from search.designs.checking import faults
from search.designs.existence import exists
from search.designs.records import Existence
from search.foundation.errors import BadInput
from tests.designs.test_conditions import TABLED


@pytest.mark.parametrize("row", TABLED)
def test_tabled_designs_are_built(row: tuple[int, int, int, int, int]) -> None:
    """Fisher & Yates, Cochran & Cox 1957 (sets from memory): all are built, with E = λt/(rk) (Yates 1936)."""
    t, k, r, b, meetings = row
    verdict = exists(t, k, blocks=b)
    assert verdict.existence is Existence.EXISTS
    assert verdict.design is not None
    assert faults(verdict.design) == ()
    assert verdict.sizes is not None
    assert (verdict.sizes.r, verdict.sizes.meetings) == (r, meetings)
    assert verdict.sizes.efficiency == Fraction(meetings * t, r * k)


@pytest.mark.parametrize(("t", "k"), [(7, 4), (13, 9), (16, 10), (11, 6), (25, 16), (9, 8), (5, 2), (12, 2)])
def test_large_and_tiny_blocks(t: int, k: int) -> None:
    """Complements of designs, blocks of all but one treatment, and pairs, are built too."""
    verdict = exists(t, k)
    assert verdict.design is not None
    assert faults(verdict.design) == ()


def test_the_number_of_blocks_follows_from_either() -> None:
    """With b, with λ, and with neither, the same design is meant."""
    assert exists(10, 3).sizes == exists(10, 3, blocks=30).sizes == exists(10, 3, meetings=2).sizes


def test_counts_that_clash_are_impossible() -> None:
    """A λ or b that the counts forbid is impossible, with the count that fails."""
    assert exists(10, 4, meetings=1).existence is Existence.IMPOSSIBLE
    assert "45 meetings" in exists(10, 4, meetings=1).reason
    assert "cannot be shared equally" in exists(8, 4, blocks=8).reason
    assert "Fisher" in exists(16, 6, blocks=8).reason


def test_a_search_that_finds_nothing_is_unknown() -> None:
    """(51, 6, 1) is believed open: neither built nor refused."""
    verdict = exists(51, 6, meetings=1)
    assert verdict.existence is Existence.UNKNOWN
    assert verdict.design is None


def test_complete_blocks_exist() -> None:
    """Blocks of all the treatments are balanced as they stand."""
    verdict = exists(6, 6, blocks=4)
    assert verdict.existence is Existence.EXISTS
    assert verdict.sizes is not None
    assert verdict.sizes.efficiency == 1


@pytest.mark.parametrize(
    ("t", "k", "blocks", "meetings", "words"),
    [
        (2, 2, None, None, "2 treatments"),
        (5, 6, None, None, "blocks of 6"),
        (5, 1, None, None, "blocks of 1"),
        (1001, 4, None, None, "1001 treatments"),
        (999, 400, None, None, "plots are more"),
        (7, 3, 7, 1, "not both"),
        (7, 3, 0, None, "0 blocks"),
        (7, 3, None, -1, "-1 meetings"),
    ],
)
def test_unusable_numbers_get_one_clear_message(
    t: int, k: int, blocks: int | None, meetings: int | None, words: str
) -> None:
    """Each is refused in words that name it."""
    with pytest.raises(BadInput, match=words):
        exists(t, k, blocks=blocks, meetings=meetings)


@pytest.mark.parametrize(("t", "k"), [(3, 2), (3, 3), (1000, 999)])
def test_the_smallest_and_largest_numbers_are_taken(t: int, k: int) -> None:
    """Just inside the limits there is a verdict."""
    if t == 1000:
        with pytest.raises(BadInput, match="999000 plots"):
            exists(t, k)
    else:
        assert exists(t, k).existence is Existence.EXISTS
