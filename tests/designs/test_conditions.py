"""The counting conditions of balanced designs."""

from __future__ import annotations

from fractions import Fraction

import pytest

from search.designs.conditions import conditions, multiples, nearby, smallest

# Fisher & Yates, Statistical Tables; Cochran & Cox 1957, ch. 11: (t, k, r, b, λ), sets from memory.
TABLED = [
    (7, 3, 3, 7, 1), (9, 3, 4, 12, 1), (13, 4, 4, 13, 1), (6, 3, 5, 10, 2), (16, 4, 5, 20, 1),
    (11, 5, 5, 11, 2), (21, 5, 5, 21, 1), (13, 3, 6, 26, 1), (10, 4, 6, 15, 2), (25, 5, 6, 30, 1),
    (16, 6, 6, 16, 2), (31, 6, 6, 31, 1), (15, 3, 7, 35, 1), (8, 4, 7, 14, 3), (15, 7, 7, 15, 3),
    (9, 4, 8, 18, 3), (25, 4, 8, 50, 1), (49, 7, 8, 56, 1), (57, 8, 8, 57, 1), (10, 3, 9, 30, 2),
    (19, 3, 9, 57, 1), (28, 4, 9, 63, 1), (10, 5, 9, 18, 4), (16, 6, 9, 24, 3), (28, 7, 9, 36, 2),
    (64, 8, 9, 72, 1), (19, 9, 9, 19, 4), (25, 9, 9, 25, 3), (37, 9, 9, 37, 2), (73, 9, 9, 73, 1),
    (21, 3, 10, 70, 1), (41, 5, 10, 82, 1), (21, 7, 10, 30, 3), (31, 10, 10, 31, 3), (81, 9, 10, 90, 1),
    (91, 10, 10, 91, 1),
]  # fmt: skip


@pytest.mark.parametrize("row", TABLED)
def test_tabled_sets_meet_the_conditions(row: tuple[int, int, int, int, int]) -> None:
    """Every tabled set is allowed, with its own r and λ and E = λt/(rk) (Yates 1936)."""
    t, k, r, b, meetings = row
    design = conditions(t, b, k).allowed
    assert design is not None
    assert (design.r, design.meetings) == (r, meetings)
    assert design.efficiency == Fraction(meetings * t, r * k)


def test_worked_values() -> None:
    """Common practice: 9 in 12 threes, 5 in 5 fours, and a taster's limit of three samples for ten."""
    nine, five = conditions(9, 12, 3).allowed, conditions(5, 5, 4).allowed
    assert nine is not None
    assert five is not None
    assert (nine.r, nine.meetings) == (4, 1)
    assert (five.r, five.meetings) == (4, 3)
    ten = smallest(10, 3)
    assert (ten.b, ten.r, ten.meetings) == (30, 9, 2)


@pytest.mark.parametrize(
    ("t", "b", "k", "reason"),
    [
        (9, 8, 4, "shared equally among 9 treatments"),
        (8, 8, 4, "shared equally among 7"),
        (16, 8, 6, "Fisher"),
        (5, 3, 5, "not incomplete"),
        (5, 3, 1, "not incomplete"),
    ],
)
def test_a_refusal_says_why(t: int, b: int, k: int, reason: str) -> None:
    """Plots, pairs, Fisher's inequality and complete blocks are told apart."""
    verdict = conditions(t, b, k)
    assert verdict.allowed is None
    assert reason in verdict.reason


def test_multiples_miss_nothing() -> None:
    """Walking over multiples finds what trying every number of blocks finds."""
    for t in range(3, 14):
        for k in range(2, t):
            first = [design.b for _, design in zip(range(2), multiples(t, k), strict=False)]
            tried = [b for b in range(1, first[-1] + 1) if conditions(t, b, k).allowed is not None]
            assert tried == first


def test_near_sizes_are_near() -> None:
    """One treatment or one plot more or fewer, and not many more plots than planned."""
    for design in nearby(13, 4, 50):
        assert abs(design.t - 13) <= 1
        assert abs(design.k - 4) <= 1
        assert design.plots <= 75
