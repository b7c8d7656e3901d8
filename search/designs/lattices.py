"""Square and rectangular lattices: replicates from mutually orthogonal Latin squares.

Yates 1936 (A new method of arranging variety trials involving a large number of varieties, Journal of
Agricultural Science 26, 424–455) for s² treatments in blocks of s; Harshbarger 1949 (Triple rectangular
lattices, Biometrics 5, 1–13) for s(s − 1) in blocks of s − 1. The squares are y = ax + c over a product of
fields; a may be taken so that all differences are units, one less than the smallest field has elements
(MacNeish 1922).
"""

from __future__ import annotations

from itertools import product
from math import gcd, isqrt

from search.designs.galois import field, prime_power
from search.designs.records import Blocks

Replicate = Blocks


def square_lattice(s: int, replicates: int) -> tuple[Replicate, ...] | None:
    """Replicates of s blocks of s for s² treatments, no two treatments together twice.

    None where this many are not known to this construction.
    """
    fields = [field(q) for q in _parts(s)]
    if s < 2 or not 0 < replicates <= min(gf.q for gf in fields) + 1:
        return None
    ring = list(product(*(range(gf.q) for gf in fields)))
    number = {element: i for i, element in enumerate(ring)}
    found: list[Replicate] = [tuple(tuple(range(s * x, s * x + s)) for x in range(s))]
    for a in range(replicates - 1):
        slope = [gf.powers[a - 1] if a else 0 for gf in fields]
        blocks: list[list[int]] = [[] for _ in ring]
        for x, element in enumerate(ring):
            for c, constant in enumerate(ring):
                y = tuple(
                    gf.plus(gf.times(up, part), add)
                    for gf, up, part, add in zip(fields, slope, element, constant, strict=True)
                )
                blocks[c].append(s * x + number[y])
        found.append(tuple(tuple(sorted(block)) for block in blocks))
    return tuple(found)


def rectangular_lattice(s: int, replicates: int) -> tuple[Replicate, ...] | None:
    """Replicates of s blocks of s − 1 for s(s − 1) treatments: a square lattice less one block."""
    square = square_lattice(s, replicates + 1)
    if square is None or s < 3:
        return None
    (gone, *_), *rest = square
    number = {x: i for i, x in enumerate(x for x in range(s * s) if x not in gone)}
    return tuple(tuple(tuple(number[x] for x in block if x in number) for block in part) for part in rest)


def lattice(t: int, k: int, replicates: int) -> tuple[str, tuple[Replicate, ...]] | None:
    """The lattice for these numbers with its name, if there is one."""
    if k * k == t:
        return _named("square lattice", square_lattice(k, replicates))
    s = isqrt(t) + 1
    if t == s * (s - 1) and k == s - 1:
        return _named("rectangular lattice", rectangular_lattice(s, replicates))
    return None


def _named(name: str, parts: tuple[Replicate, ...] | None) -> tuple[str, tuple[Replicate, ...]] | None:
    return None if parts is None else (name, parts)


def _parts(s: int) -> list[int]:
    return [q for q in range(2, s + 1) if s % q == 0 and prime_power(q) and gcd(q, s // q) == 1]
