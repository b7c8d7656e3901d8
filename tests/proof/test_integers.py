"""Whole-number matrices without rounding."""

from __future__ import annotations

import random
from fractions import Fraction

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from search.proof.integers import adjugate, exact_product, is_positive_semidefinite


def whole(rows: list[list[int]]) -> np.ndarray:
    """A matrix of Python integers."""
    return np.array(rows, dtype=object)


def identity(size: int) -> np.ndarray:
    """The identity in Python integers."""
    return whole(np.eye(size, dtype=int).tolist())


def random_matrix(draw: random.Random, rows: int, columns: int, bits: int) -> np.ndarray:
    """Entries of up to so many bits, of both signs."""
    return whole([[draw.randint(-(1 << bits), 1 << bits) for _ in range(columns)] for _ in range(rows)])


@given(st.integers(0, 200), st.integers(0, 200), st.integers(1, 6), st.integers(0, 10**6))
@settings(deadline=None)
def test_product_by_layers_is_the_product(one: int, other: int, size: int, seed: int) -> None:
    """Cut into layers or multiplied as Python integers, the product is the same, whatever the size."""
    draw = random.Random(seed)
    left, right = random_matrix(draw, 3, size, one), random_matrix(draw, size, 4, other)
    assert (exact_product(left, right) == left.dot(right)).all()


def test_product_of_greatest_numbers() -> None:
    """Sums of a thousand greatest products stay exact."""
    left = np.full((1, 1000), -(2**63 - 1), dtype=np.int64)
    right = np.full((1000, 1), 2**63 - 1, dtype=np.int64)
    assert exact_product(left, right)[0, 0] == -1000 * (2**63 - 1) ** 2


def test_adjugate_of_a_laplacian() -> None:
    """The grounded Laplacian of the complete graph on 4 points has 16 spanning trees (Cayley)."""
    adjoint, determinant = adjugate(whole([[3, -1, -1], [-1, 3, -1], [-1, -1, 3]]))
    assert determinant == 16
    assert adjoint.tolist() == [[8, 4, 4], [4, 8, 4], [4, 4, 8]]


@given(st.integers(1, 7), st.integers(0, 10**6))
@settings(deadline=None)
def test_adjugate_over_determinant_is_the_inverse(size: int, seed: int) -> None:
    """Matrix times adjugate is the determinant times the identity."""
    factor = random_matrix(random.Random(seed), size, size + 2, 5)
    matrix = factor.dot(factor.T) + identity(size)
    adjoint, determinant = adjugate(matrix)
    assert (matrix.dot(adjoint) == determinant * identity(size)).all()


@pytest.mark.parametrize(
    ("rows", "holds"),
    [
        ([[0]], True),
        ([[-1]], False),
        ([[0, 0], [0, 5]], True),
        ([[0, 1], [1, 5]], False),
        ([[1, 1], [1, 1]], True),
        ([[1, 2], [2, 1]], False),
        ([[4, 2, 2], [2, 1, 1], [2, 1, 1]], True),
        ([[4, 2, 2], [2, 1, 1], [2, 1, 0]], False),
    ],
)
def test_semidefinite_by_hand(rows: list[list[int]], holds: bool) -> None:
    """Semidefinite matrices with and without zero pivots, and their neighbours that are not."""
    assert is_positive_semidefinite(whole(rows)) is holds


@given(st.integers(1, 5), st.integers(1, 5), st.integers(0, 10**6))
@settings(deadline=None)
def test_squares_are_semidefinite_and_no_more(size: int, rank: int, seed: int) -> None:
    """B B' is semidefinite; less a hair in a direction it does not reach it is not."""
    draw = random.Random(seed)
    factor = random_matrix(draw, size, rank, 4)
    square = factor.dot(factor.T)
    assert is_positive_semidefinite(square)
    if rank < size:
        assert not is_positive_semidefinite(1000 * square - identity(size))


def test_no_rounding_in_fractions() -> None:
    """An inverse of numbers that no float can tell apart is exact."""
    big = 10**40
    adjoint, determinant = adjugate(whole([[big + 1, big], [big, big + 1]]))
    assert Fraction(int(adjoint[0, 0]), determinant) == Fraction(big + 1, 2 * big + 1)
