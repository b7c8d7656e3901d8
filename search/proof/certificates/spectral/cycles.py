"""Graphs of degree 0, 1 or 2: all of them can be looked at, component by component."""

from __future__ import annotations

from collections.abc import Iterator
from fractions import Fraction
from functools import lru_cache
from math import isqrt

from search.proof.certificates.spectral.numbers import EVEN, Numbers, Side
from search.proof.parts import Part
from search.proof.records import Refuted

MOST_GRAPHS = 20_000


def least_of_all_graphs(numbers: Numbers, both: tuple[Side, Side], leaf: Part) -> list[Fraction]:
    """Σ 1/(1 − x) over the t − 1 eigenvalues of every graph that a level can have.

    Where meetings of treatments (or of blocks) are even, M is a graph with row sums d, and so is what it
    leaves of all pairs. If either has a degree of at most 2, its components are points, edges or cycles.
    With as many blocks as treatments det NN' = (det N)² must be a square, which some graphs cannot be.
    """
    names = {"primal": both[0], "dual": both[1]}
    side = names.get(leaf.text("cycles"))
    if side is None or side.form != EVEN or side.sets > 1:
        raise Refuted(f"{leaf.where} lists graphs of a side that is no graph")
    rest = side.members - 1 - side.d
    itself = leaf.text("of") == "graph"
    if not itself and leaf.text("of") != "other":
        raise Refuted(f"{leaf.at('of')} must be graph or other")
    degree = side.d if itself else rest
    if degree > 2:
        raise Refuted(f"{leaf.where} lists graphs of a degree above 2")
    spread = numbers.r * numbers.k
    # eigenvalue at_zero + spread·x of M; −1 less that of M for what it leaves
    shift = spread + side.at_zero if itself else spread + side.at_zero + 1
    turn = 1 if itself else -1
    return [
        spread * total + (numbers.t - side.members)
        for components in _graphs(side.members, degree)
        if (total := _inverses(components, degree, shift, turn)) is not None
        and (numbers.t != numbers.b or _may_be_square(side, components, degree, itself))
    ]


def _may_be_square(side: Side, components: list[int], degree: int, itself: bool) -> bool:
    """det NN' is lines·points times det((lines − base)I + M), without the eigenvalue of the ones."""
    own = side.lines - side.base
    shift, turn = (own, -1) if itself else (own - 1, 1)
    ones = shift - turn * degree
    if ones == 0:
        return True
    product = Fraction(side.lines * side.points, ones)
    for size in components:
        product *= _determinant(size, shift, turn)
    whole = product.numerator
    return whole >= 0 and isqrt(whole) ** 2 == whole


@lru_cache(maxsize=256)
def _determinant(size: int, shift: int, turn: int) -> Fraction:
    """Of shift·I − turn·A, A of a point, an edge or a cycle."""
    rows, product = _matrix(size, shift, turn, Fraction(0)), Fraction(1)
    for column in range(size):
        pivot = next((i for i in range(column, size) if rows[i][column]), None)
        if pivot is None:
            return Fraction(0)
        if pivot != column:
            rows[column], rows[pivot], product = rows[pivot], rows[column], -product
        product *= rows[column][column]
        for i in range(column + 1, size):
            factor = rows[i][column] / rows[column][column]
            if factor:
                rows[i] = [a - factor * b for a, b in zip(rows[i], rows[column], strict=True)]
    return product


def _matrix(size: int, shift: int, turn: int, mean: Fraction) -> list[list[Fraction]]:
    rows = [[mean + (shift if i == j else 0) for j in range(size)] for i in range(size)]
    for i in range(size):
        for j in {(i + 1) % size, (i - 1) % size} - {i}:
            rows[i][j] -= turn
    return rows


def _graphs(members: int, degree: int) -> Iterator[list[int]]:
    """Numbers of members of the components."""
    if degree < 2:
        if members % (degree + 1) == 0:
            yield [degree + 1] * (members // (degree + 1))
        return
    for count, cycles in enumerate(_cycles(members, 3)):
        if count >= MOST_GRAPHS:
            raise Refuted("there are more graphs than can be looked at")
        yield cycles


def _cycles(members: int, shortest: int) -> Iterator[list[int]]:
    """Lengths in rising order that add up to the members."""
    if members >= shortest:
        yield [members]
    for first in range(shortest, members // 2 + 1):
        for others in _cycles(members - first, first):
            yield [first, *others]


def _inverses(components: list[int], degree: int, shift: int, turn: int) -> Fraction | None:
    """Σ 1/(shift − turn·θ) over the eigenvalues θ of the graph, once without θ = degree; None if infinite."""
    if shift == turn * degree:
        return _trace_of_inverse(components[0], shift, turn, True) - 1 if len(components) == 1 else None
    total = sum((_trace_of_inverse(size, shift, turn, False) for size in components), Fraction(0))
    return total - Fraction(1, shift - turn * degree)


@lru_cache(maxsize=256)
def _trace_of_inverse(size: int, shift: int, turn: int, with_mean: bool) -> Fraction:
    """Of shift·I − turn·A (plus J/size), A of a point, an edge or a cycle, by elimination.

    All rows are alike, so that the trace is `size` times the first entry of the inverse.
    """
    mean = Fraction(1, size) if with_mean else Fraction(0)
    rows = _matrix(size, shift, turn, mean)
    right = [Fraction(int(i == 0)) for i in range(size)]
    for column in range(size):
        pivot = next((i for i in range(column, size) if rows[i][column]), None)
        if pivot is None:
            raise Refuted("a graph of the level has no inverse")
        rows[column], rows[pivot] = rows[pivot], rows[column]
        right[column], right[pivot] = right[pivot], right[column]
        for i in range(size):
            factor = rows[i][column] / rows[column][column] if i != column else Fraction(0)
            if factor:
                rows[i] = [a - factor * b for a, b in zip(rows[i], rows[column], strict=True)]
                right[i] -= factor * right[column]
    return size * right[0] / rows[0][0]
