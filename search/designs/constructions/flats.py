"""Flats of the projective and affine geometries over GF(q).

Points and subspaces of one dimension of PG(d, q) or AG(d, q): balanced because the group of the geometry
carries any pair of points to any other (Bose 1939, On the construction of balanced incomplete block
designs, Annals of Eugenics 9, 353–399). Flats of AG(d, q) fall into parallel classes.
"""

from __future__ import annotations

from itertools import product

from search.designs.conditions import Balanced
from search.designs.constructions.common import Build, Built
from search.designs.galois import Field, field, prime_power

Vector = tuple[int, ...]


def flats(sizes: Balanced, build: Build) -> Built | None:
    """All flats of one dimension of a projective or affine geometry, if these are their numbers."""
    for q in range(2, sizes.k + 1):
        if prime_power(q) is None:
            continue
        for affine in (True, False):
            dimension, flat = (_log(n, q, affine=affine) for n in (sizes.t, sizes.k))
            if not 0 < flat < dimension or _number(dimension, flat, q, affine) != sizes.b:
                continue
            return _affine(dimension, flat, field(q)) if affine else _projective(dimension, flat, field(q))
    return None


def _log(n: int, q: int, *, affine: bool) -> int:
    """The dimension of a geometry of n points over GF(q), 0 where there is none."""
    total, dimension = (q if affine else 1 + q), 1
    while total < n:
        total, dimension = (total * q if affine else total * q + 1), dimension + 1
    return dimension if total == n else 0


def _number(dimension: int, flat: int, q: int, affine: bool) -> int:
    """How many flats there are: a Gaussian binomial, times the parallels of one flat."""
    rank, sub = (dimension, flat) if affine else (dimension + 1, flat + 1)
    above = below = 1
    for i in range(sub):
        above *= q ** (rank - i) - 1
        below *= q ** (i + 1) - 1
    return above // below * (q ** (dimension - flat) if affine else 1)


def _subspaces(rank: int, sub: int, gf: Field) -> list[frozenset[Vector]]:
    """Subspaces of rank `sub` of GF(q)^rank, each as the set of its vectors."""
    found = {frozenset([(0,) * rank])}
    points = _points(rank, gf)
    for _ in range(sub):
        found = {larger for space in found for larger in _extended(space, points, gf)}
    return sorted(found, key=sorted)


def _extended(space: frozenset[Vector], points: list[Vector], gf: Field) -> list[frozenset[Vector]]:
    """Every subspace of one rank more that holds a subspace."""
    left, found = [point for point in points if point not in space], []
    while left:
        found.append(_joined(space, left[0], gf))
        left = [point for point in left if point not in found[-1]]
    return found


def _points(rank: int, gf: Field) -> list[Vector]:
    """One vector of each line through 0: its first coordinate that is not 0 is 1."""
    vectors = product(range(gf.q), repeat=rank)
    return [x for x in vectors if next((c for c in x if c), 0) == 1]


def _joined(space: frozenset[Vector], point: Vector, gf: Field) -> frozenset[Vector]:
    multiples = [tuple(gf.times(c, x) for x in point) for c in range(gf.q)]
    return frozenset(tuple(map(gf.plus, x, y)) for x in space for y in multiples)


def _projective(dimension: int, flat: int, gf: Field) -> Built:
    number = {point: i for i, point in enumerate(_points(dimension + 1, gf))}
    blocks = tuple(
        tuple(sorted(number[x] for x in space if x in number))
        for space in _subspaces(dimension + 1, flat + 1, gf)
    )
    return Built(blocks, f"{_named(flat)} of the projective geometry PG({dimension}, {gf.q}) (Bose 1939)")


def _affine(dimension: int, flat: int, gf: Field) -> Built:
    number = {point: i for i, point in enumerate(product(range(gf.q), repeat=dimension))}
    blocks: list[tuple[int, ...]] = []
    replicates = []
    for space in _subspaces(dimension, flat, gf):
        parallels = {frozenset(tuple(map(gf.plus, x, y)) for y in space) for x in number}
        class_ = sorted(tuple(sorted(number[x] for x in parallel)) for parallel in parallels)
        replicates.append(tuple(range(len(blocks), len(blocks) + len(class_))))
        blocks += class_
    sentence = f"{_named(flat)} of the affine geometry AG({dimension}, {gf.q}) (Bose 1939)"
    return Built(tuple(blocks), sentence, tuple(replicates))


def _named(flat: int) -> str:
    return {1: "lines", 2: "planes"}.get(flat, f"{flat}-flats")
