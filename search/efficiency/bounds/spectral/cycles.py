"""Where the graph of a level has degree 0, 1 or 2, or leaves so little of all pairs, there are few of them.

They are single members, pairs, or cycles whose lengths add up to the members: their eigenvalues are known, so
that the best of them is found by looking at each. With `L_c(z) = z L_{c−1} − L_{c−2}`, L₀ = 2, L₁ = z, a
cycle of length c has the characteristic polynomial L_c − 2, whose derivative is c S_{c−1}, S₀ = 1, S₁ = z, S
by the same recurrence (Chebyshev polynomials).

Where there are as many blocks as treatments, N is square, so that `det NN' = (det N)²` must be a square: that
rules graphs out, as it does for symmetric balanced designs (Schützenberger 1949).
"""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import dataclass
from fractions import Fraction
from functools import lru_cache
from math import isqrt, prod
from typing import Any

from search.efficiency.bounds.spectral.prices import Split
from search.efficiency.bounds.spectral.side import Half, Shape, halves

MOST_PARTITIONS = 20_000
NO_PLAN = Fraction(10**9)
"""Value of a level whose graphs are all ruled out."""


@dataclass(frozen=True, slots=True)
class Listed:
    """A level whose graphs were all looked at.

    Parameters
    ----------
    value : least `Σ 1/(1 − x)` of them
    side : "primal" or "dual"
    of : "graph", or "other" where the pairs that it leaves out were listed
    """

    value: Fraction
    side: str
    of: str

    @property
    def splits(self) -> tuple[Split, ...]:
        """None."""
        return ()

    def split(self) -> None:
        """There is nothing to make finer."""

    def multipliers(self) -> dict[str, Any]:
        """What was listed."""
        return {"cycles": self.side, "of": self.of}


def listed(shape: Shape, levels: tuple[int, int]) -> Listed | None:
    """The best graph of a level, where one of the sides is even and its graphs can be listed."""
    found = [
        Listed(value, half.name, of)
        for half, level in zip(halves(shape), levels, strict=True)
        if level == 0 and half.sets == 1
        for of, degree in (("graph", half.degree), ("other", half.others - half.degree))
        if degree <= 2 and (value := _least(shape, half, of, degree)) is not None
    ]
    return max(found, key=lambda one: one.value, default=None)


def _least(shape: Shape, half: Half, of: str, degree: int) -> Fraction | None:
    """The least `Σ 1/(1 − x)`, None where no graph is connected or there are too many."""
    wide = shape.r * shape.k
    # 1 − x = ±(z − θ)/(rk) for an eigenvalue θ of the graph that is listed
    sign, z = (1, wide + half.offset) if of == "graph" else (-1, -(wide + half.offset + 1))
    zeros = shape.rank - (half.size - 1)
    best: Fraction | None = None
    for number, parts in enumerate(_parts(half.size, degree)):
        if number >= MOST_PARTITIONS:
            return None
        total = _sum(parts, degree, z)
        if total is not None:
            possible = shape.t != shape.b or _may_be_square(half, of, parts, degree)
            value = sign * wide * total + zeros if possible else NO_PLAN
            best = value if best is None else min(best, value)
    return best


def _may_be_square(half: Half, of: str, parts: tuple[int, ...], degree: int) -> bool:
    """Whether det NN' is a square: rk times all `own − base + θ`, θ of M but that of the ones."""
    y = half.own - half.base
    # θ itself is listed, or −1 − θ
    z, sign = (-y, (-1) ** half.size) if of == "graph" else (y - 1, 1)
    ones = y + degree if of == "graph" else y - 1 - degree
    if ones == 0:
        return True
    determinant = half.own * half.line * sign * prod(_characteristic(c, z) for c in parts) // ones
    return determinant >= 0 and isqrt(determinant) ** 2 == determinant


@lru_cache(maxsize=1024)
def _characteristic(c: int, z: int) -> int:
    """Π (z − θ) for a single member, a pair, or a cycle."""
    if c <= 2:
        return z if c == 1 else z * z - 1
    lucas = 2, z
    for _ in range(c - 1):
        lucas = lucas[1], z * lucas[1] - lucas[0]
    return lucas[1] - 2


def _sum(parts: tuple[int, ...], degree: int, z: int) -> Fraction | None:
    """Σ 1/(z − θ) over all eigenvalues but that of the ones; None where another equals it, and z too."""
    if z == degree:
        c = parts[0]
        return Fraction(c * c - 1, 12) if len(parts) == 1 and degree == 2 else None
    return sum((_inverses(c, z) for c in parts), Fraction(0)) - Fraction(1, z - degree)


@lru_cache(maxsize=1024)
def _inverses(c: int, z: int) -> Fraction:
    """Σ 1/(z − θ) for a single member, a pair, or a cycle."""
    if c == 1:
        return Fraction(1, z)
    if c == 2:
        return Fraction(2 * z, z * z - 1)
    lucas, second = (2, z), (1, z)
    for _ in range(c - 1):
        lucas = lucas[1], z * lucas[1] - lucas[0]
    for _ in range(c - 2):
        second = second[1], z * second[1] - second[0]
    return Fraction(c * second[1], lucas[1] - 2)


def _parts(size: int, degree: int) -> Iterator[tuple[int, ...]]:
    """Sizes of the components of every graph of a degree up to 2."""
    if degree < 2:
        if size % (degree + 1) == 0:
            yield (degree + 1,) * (size // (degree + 1))
        return
    waiting: list[tuple[tuple[int, ...], int]] = [((), size)]
    while waiting:
        parts, left = waiting.pop()
        if left == 0:
            yield parts
        most = parts[-1] if parts else left
        waiting += [((*parts, c), left - c) for c in range(3, min(most, left) + 1)]
