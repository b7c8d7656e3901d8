"""Closed walks that never turn back: their number is not below 0, whatever the plan."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from fractions import Fraction

from search.proof.certificates.spectral.numbers import ANY, EVEN, Side

SHORTEST, LONGEST = 3, 8


@dataclass(frozen=True, slots=True)
class Family:
    """Walks from member to member over lines.

    Parameters
    ----------
    lines, points : lines through a member, members of a line
    at_zero, turn : eigenvalue `at_zero + turn·rk·x` of the matrix of single steps
    known : eigenvalues of every plan
    longest, floor : lengths that are counted, and what none of their numbers is below
    """

    lines: int
    points: int
    at_zero: int
    turn: int
    known: list[tuple[int, int]]
    longest: int = LONGEST
    floor: int = 0


def families(side: Side) -> dict[str, Family]:
    """Those that are walks of some graph at the side's level, by name."""
    found = {"meetings": Family(side.lines, side.points, -side.lines, 1, side.known(side.meets))}
    rest = side.members - side.alone - side.d
    # M itself, a graph with several edges between two members where it has no entry below 0
    if side.form == EVEN or side.odd == 2 or side.base == 0:
        found["graph"] = Family(side.d, 2, side.at_zero, 1, side.known(side.d))
    # what M leaves of the complete graph, likewise where no entry of M is above 1
    if side.form == EVEN or side.odd == -1:
        at_zero = -side.at_zero if side.sets > 1 else -1 - side.at_zero
        found["other"] = Family(rest, 2, at_zero, -1, side.known(rest))
    if side.form == ANY and side.exactly and side.sets == 1:
        far, base, spare = sum(side.apart), side.base, side.level - side.taken
        partners = max(side.apart, default=0)
        if "graph" not in found:
            triangles = max(
                _fewest_triangles(side.d, side.level),
                # −base stands at the pairs that never meet; other entries of such a row square to base more
                _fewest_beside(side.d + base * partners, base * far, base**2 * partners, spare),
            )
            found["graph"] = Family(side.d, 2, side.at_zero, 1, side.known(side.d), SHORTEST, triangles)
        triangles = max(
            _fewest_triangles(rest, side.level),
            # here they have the entry 1 + base above 0, and only what is spare can be below
            _fewest_beside(rest + base * (base + 1) * partners, 0, 0, spare),
        )
        longest = LONGEST if far and spare == 0 else SHORTEST
        found["other"] = Family(rest, 2, -1 - side.at_zero, -1, side.known(rest), longest, triangles)
    return {name: family for name, family in found.items() if family.lines > 1}


def _fewest_triangles(d: int, level: int) -> int:
    """What tr M³ is not below for row sums d and Σ m(m−1) = 4·level over ordered pairs.

    With M = P − Q, both from 0 on, tr M³ ≥ −3 tr P²Q − tr Q³. Q sums to at most 2·level over ordered pairs,
    P² has no entry above the greatest Σ_j m_ij² ≤ d + 2·level, and Q² none off its diagonal above the level.
    """
    return -6 * level * (d + 2 * level) - 2 * level**2


def _fewest_beside(squares: int, told: int, told_squares: int, spare: int) -> int:
    """The same where entries below 0 are those of told pairs, and those of `spare` steps besides.

    With M = P − Q as before: Q sums to told + 2·spare, a row of P squares to at most squares + 2·spare,
    one of Q to at most told_squares + 2·spare; and (Q²)_ij is not above the greatest of those of Q.
    """
    below = told + 2 * spare
    return -3 * below * (squares + 2 * spare) - below * (told_squares + 2 * spare)


def coefficients(family: Family, length: int) -> list[int]:
    """The polynomial in the matrix of steps A that counts walks of this length.

    From F₀ = I, F₁ = A by A F_l = F_{l+1} + (points−2) F_l + back F_{l−1}, back = (lines−1)(points−1), but
    lines (points−1) the first time, when every line may be turned back on.
    """
    q, s = family.points - 2, family.points - 1
    found = [[1], [0, 1]]
    while len(found) <= length:
        back = family.lines * s if len(found) == 2 else (family.lines - 1) * s
        one, two = found[-1], found[-2]
        following = [0] * (len(one) + 1)
        for power, c in enumerate(one):
            following[power + 1] += c
            following[power] -= q * c
        for power, c in enumerate(two):
            following[power] -= back * c
        found.append(following)
    return found[length]


def at(polynomial: Sequence[int | Fraction], x: int) -> Fraction:
    """The polynomial at a whole number."""
    return sum((Fraction(c) * x**n for n, c in enumerate(polynomial)), Fraction(0))
