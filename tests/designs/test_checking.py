"""The checker of designs."""

from __future__ import annotations

from dataclasses import replace

from search.designs.checking import faults
from search.designs.conditions import conditions
from search.designs.records import Design

SEVEN = conditions(7, 7, 3).allowed
assert SEVEN is not None
PLANE = Design(SEVEN, tuple((i, (i + 1) % 7, (i + 3) % 7) for i in range(7)), "by hand")
NINE = conditions(9, 12, 3).allowed
assert NINE is not None
SQUARE = Design(
    NINE,
    ((0, 1, 2), (3, 4, 5), (6, 7, 8), (0, 3, 6), (1, 4, 7), (2, 5, 8),
     (0, 4, 8), (1, 5, 6), (2, 3, 7), (0, 5, 7), (1, 3, 8), (2, 4, 6)),
    "by hand",
    ((0, 1, 2), (3, 4, 5), (6, 7, 8), (9, 10, 11)),
)  # fmt: skip


def test_sound_designs_pass() -> None:
    """Two designs written by hand have no faults."""
    assert faults(PLANE) == ()
    assert faults(SQUARE) == ()


def test_each_fault_is_told() -> None:
    """A block too few, a point twice, a point that is none, a pair too often, a replicate with a hole."""
    blocks = PLANE.blocks
    assert "6 blocks" in faults(replace(PLANE, blocks=blocks[:-1]))[0]
    assert "different points" in faults(replace(PLANE, blocks=((0, 0, 1), *blocks[1:])))[0]
    assert "different points" in faults(replace(PLANE, blocks=((0, 1, 7), *blocks[1:])))[0]
    assert "share" in faults(replace(PLANE, blocks=(blocks[1], *blocks[1:])))[0]
    swapped = ((0, 1, 3), (2, 4, 5), *SQUARE.replicates[2:])
    assert "every point once" in faults(replace(SQUARE, replicates=swapped))[0]
    assert "every block once" in faults(replace(SQUARE, replicates=SQUARE.replicates[:3]))[0]
