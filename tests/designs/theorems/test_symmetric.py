"""The conditions on symmetric designs."""

from __future__ import annotations

from itertools import product

import pytest

from search.designs.conditions import conditions
from search.designs.theorems.symmetric import bruck_ryser_chowla, hilbert, schuetzenberger, unsolvable_at


@pytest.mark.parametrize(("t", "k"), [(22, 7), (46, 10), (34, 12), (92, 14), (106, 15)])
def test_an_even_number_of_treatments_asks_for_a_square(t: int, k: int) -> None:
    """k − λ = 5, 8, 8, 12 and 13 are not squares (Schützenberger 1949)."""
    sizes = conditions(t, t, k).allowed
    assert sizes is not None
    assert "Schützenberger" in schuetzenberger(sizes)
    assert not bruck_ryser_chowla(sizes)


@pytest.mark.parametrize(("t", "k"), [(43, 7), (29, 8), (211, 15)])
def test_bruck_ryser_and_chowla_refuse(t: int, k: int) -> None:
    """No plane of order 6 or 14 (Bruck & Ryser 1949), no (29, 8, 2) (Chowla & Ryser 1950)."""
    sizes = conditions(t, t, k).allowed
    assert sizes is not None
    assert "Bruck" in bruck_ryser_chowla(sizes)


@pytest.mark.parametrize(
    ("t", "k"),
    [(7, 3), (13, 4), (11, 5), (21, 5), (16, 6), (31, 6), (15, 7), (57, 8), (19, 9), (37, 9), (25, 9),
     (31, 10), (23, 11), (56, 11), (45, 12), (40, 13), (79, 13), (31, 15), (36, 15), (71, 15), (111, 11)],
)  # fmt: skip
def test_known_symmetric_designs_pass(t: int, k: int) -> None:
    """Designs that exist (Cochran & Cox 1957; from memory) pass; the plane of order 10 too,
    which only a computer ruled out."""
    sizes = conditions(t, t, k).allowed
    assert sizes is not None
    assert not schuetzenberger(sizes)
    assert not bruck_ryser_chowla(sizes)


def test_a_small_solution_means_solvable_everywhere() -> None:
    """z² = ax² + by² has a solution in small whole numbers exactly where no prime forbids one."""
    for a, b in product(range(1, 12), [x for x in range(-11, 12) if x]):
        small = any(
            round((a * x * x + b * y * y) ** 0.5) ** 2 == a * x * x + b * y * y
            for x, y in product(range(40), repeat=2)
            if (x or y) and a * x * x + b * y * y >= 0
        )
        assert small == (unsolvable_at(a, b) == 0), (a, b)


def test_hilbert_symbols_multiply_to_one() -> None:
    """Over all primes and the reals the product is 1 (reciprocity; Serre 1973, chapter III, theorem 3)."""
    for a, b in product([x for x in range(-15, 16) if x], repeat=2):
        real = -1 if a < 0 and b < 0 else 1
        total = real
        for p in (2, 3, 5, 7, 11, 13):
            total *= hilbert(a, b, p)
        assert total == 1, (a, b)
