"""Finite fields."""

from __future__ import annotations

from itertools import product

import pytest

from search.designs.galois import field, prime_power


@pytest.mark.parametrize("q", [2, 3, 4, 5, 8, 9, 16, 25, 27])
def test_the_tables_are_those_of_a_field(q: int) -> None:
    """Sums and products are commutative, each has its inverse, and one distributes over the other."""
    gf = field(q)
    everything = range(q)
    for x, y in product(everything, repeat=2):
        assert gf.plus(x, y) == gf.plus(y, x)
        assert gf.times(x, y) == gf.times(y, x)
    for x in everything:
        assert sorted(gf.plus(x, y) for y in everything) == list(everything)
        if x:
            assert sorted(gf.times(x, y) for y in everything) == list(everything)
    some = range(0, q, 1 + q // 9)
    for x, y, z in product(some, repeat=3):
        assert gf.times(x, gf.plus(y, z)) == gf.plus(gf.times(x, y), gf.times(x, z))


def test_prime_powers_are_told_from_other_numbers() -> None:
    """A prime power comes as its prime and exponent; 1, 6 and 100 are none."""
    assert [prime_power(q) for q in (2, 8, 81, 97)] == [(2, 1), (2, 3), (3, 4), (97, 1)]
    assert [prime_power(q) for q in (0, 1, 6, 100)] == [None] * 4


def test_no_field_has_six_elements() -> None:
    """Asking for one is refused."""
    with pytest.raises(ValueError, match="not a prime power"):
        field(6)
