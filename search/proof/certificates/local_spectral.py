"""Kind "local spectral": eigenvalues must fit whole numbers of meetings and of walks, on both sides."""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import dataclass
from fractions import Fraction
from itertools import pairwise
from math import comb

from search.proof.certificates.case import Case
from search.proof.certificates.claims import (
    Claim,
    claim_of_determinant,
    claim_of_variance,
    exponential_above,
)
from search.proof.certificates.multipliers import known
from search.proof.certificates.spectral.cost import inverse_stays_above, logarithm_stays_above
from search.proof.certificates.spectral.cycles import least_of_all_graphs
from search.proof.certificates.spectral.entries import diagonals, places, row_sums
from search.proof.certificates.spectral.numbers import Numbers, Side, numbers_of, pairs_of_sides
from search.proof.certificates.spectral.walks import SHORTEST, at, coefficients, families
from search.proof.parts import Part, listed, ratio
from search.proof.records import Refuted
from search.trial.records import AimKind

AIMS = (AimKind.ALL_PAIRS, AimKind.OVERALL)
MOST_LEVELS, DEEPEST = 40, 60


def derive(case: Case, multipliers: Part) -> Claim:
    """Σ cost(x) over the t − 1 eigenvalues that a plan decides, from below, the least over all levels.

    For each level the certificate has a polynomial p below the cost, made of powers of M and of walks on
    both sides. Σ p(x) is then a trace, and a trace is a sum over pairs of members; each pair costs at least
    the least over all whole entries that it could have. The last level stands for all further ones.
    """
    known(multipliers, ("levels",))
    numbers = numbers_of(case)
    levels = multipliers.items("levels")
    if not 1 <= len(levels) <= MOST_LEVELS:
        raise Refuted(f"{multipliers.at('levels')} must list the levels, {MOST_LEVELS} at most")
    # With two plots a block and two a treatment, a pair that meets twice is cut off from the others.
    only_even = numbers.r == numbers.k == 2 and len(levels) == 1
    values = list(level_values(case, numbers, multipliers, 0, only_even))
    # a level of which no plan can be has no forms, so that it proves nothing and needs nothing
    if not values:
        raise Refuted("the certificate has no level that a plan could have")
    return claim_of_costs(case, numbers, min(values))


def level_values(
    case: Case, numbers: Numbers, multipliers: Part, first: int, last_exactly: bool = False
) -> Iterator[Fraction]:
    """What Σ cost is not below in each part of each level; the last one stands for all further ones.

    Parameters
    ----------
    case, numbers : the trial
    multipliers : their `levels` are the levels from `first` on
    first : number of the first level that is listed
    last_exactly : whether the last one stands for itself alone
    """
    levels = multipliers.items("levels")
    for nth, level in enumerate(levels):
        where = f"{multipliers.at('levels')}[{nth + 1}]"
        sides = pairs_of_sides(numbers, first + nth, last_exactly or nth < len(levels) - 1)
        cases = listed(where, level)
        if len(cases) != len(sides):
            raise Refuted(f"{where} must have a proof for each of the {len(sides)} forms of the level")
        for both, tree in zip(sides, cases, strict=True):
            yield from _values(case, numbers, both, Part.of(where, tree), [])


def claim_of_costs(case: Case, numbers: Numbers, least: Fraction) -> Claim:
    """From what Σ cost is not below in any plan."""
    if case.aim is AimKind.OVERALL:
        return claim_of_determinant(case, exponential_above(-least) * numbers.r**case.rank)
    return claim_of_variance(case, 2 * least / numbers.r / case.rank)


@dataclass(frozen=True, slots=True)
class Split:
    """At most `count` eigenvalues have x ≤ place, or at least one more than that."""

    place: Fraction
    count: int
    few: bool


def _values(
    case: Case, numbers: Numbers, both: tuple[Side, Side], tree: Part, path: list[Split]
) -> Iterator[Fraction]:
    """The value of every leaf of a tree of splits."""
    if tree.has("cycles") and not path and case.aim is AimKind.ALL_PAIRS:
        yield from least_of_all_graphs(numbers, both, tree)
        return
    if not tree.has("at"):
        yield _value(case, numbers, both, tree, path)
        return
    place, count = tree.ratio("at"), tree.whole("count")
    if not 0 < place < 1 or len(path) >= DEEPEST:
        raise Refuted(f"{tree.where} splits too often, or where no eigenvalue is")
    for name, few in (("few", True), ("many", False)):
        yield from _values(case, numbers, both, tree.part(name), [*path, Split(place, count, few)])


def _value(case: Case, numbers: Numbers, both: tuple[Side, Side], leaf: Part, path: list[Split]) -> Fraction:
    constant = leaf.ratio("constant")
    prices = [ratio(leaf.at("splits"), x) for x in leaf.items("splits")]
    if len(prices) != len(path) or any(price < 0 for price in prices):
        raise Refuted(f"{leaf.at('splits')} must have a price from 0 on for each split")
    polynomial, free = [constant], case.rank - numbers.kernel
    at_zero = 0 if case.aim is AimKind.OVERALL else 1
    total = constant * free + numbers.kernel * at_zero
    for side, name in zip(both, ("primal", "dual"), strict=True):
        own, value = _side(numbers, side, leaf.part(name), free)
        polynomial = _sum(polynomial, own)
        total += value
    for split, price in zip(path, prices, strict=True):
        left = split.count - numbers.kernel
        total += -price * left if split.few else price * (left + 1)
    if not _below(case, polynomial, path, prices):
        raise Refuted(f"the polynomial of {leaf.where} passes what an eigenvalue costs")
    return total


def _below(case: Case, polynomial: list[Fraction], path: list[Split], prices: list[Fraction]) -> bool:
    above = logarithm_stays_above if case.aim is AimKind.OVERALL else inverse_stays_above
    ends = sorted({Fraction(0), Fraction(1), *(split.place for split in path)})
    for low, high in pairwise(ends):
        extra = Fraction(0)
        for split, price in zip(path, prices, strict=True):
            if split.place >= high:
                extra += price if split.few else -price
        if not above(polynomial, low, high, extra):
            return False
    return True


def _side(numbers: Numbers, side: Side, prices: Part, free: int) -> tuple[list[Fraction], Fraction]:
    """The polynomial in x of a side's prices, and what its sum over the free eigenvalues is not below.

    A trace runs over all members: those eigenvalues that every plan has are taken out, and those with
    x = 0 that this side shows more or less often than there are outside the free ones are evened out.
    """
    spread = numbers.r * numbers.k
    powers = _list_of(prices, "powers", 4)
    trace_polynomial = [Fraction(0), *powers]
    polynomial = _in_x(trace_polynomial, side.at_zero, spread)
    total = _trace(side, prices, powers) + _others(
        trace_polynomial, side.at_zero, side.known(side.d), side, free
    )
    given, possible = prices.part("walks"), families(side)
    for name in given.content:
        if name not in possible:
            raise Refuted(f"{given.where} prices walks that its level does not have")
        family, lengths = possible[name], given.part(name)
        for length in lengths.content:
            if length not in {str(n) for n in range(SHORTEST, family.longest + 1)}:
                raise Refuted(f"{lengths.where} prices walks of a length that is not counted")
            price = lengths.ratio(length)
            if price < 0:
                raise Refuted(f"{lengths.at(length)} is below 0")
            walk = [price * c for c in coefficients(family, int(length))]
            polynomial = _sum(polynomial, _in_x(walk, family.at_zero, family.turn * spread))
            total += price * family.floor + _others(walk, family.at_zero, family.known, side, free)
    return polynomial, total


def _others(
    polynomial: list[Fraction], at_zero: int, known_ones: list[tuple[int, int]], side: Side, free: int
) -> Fraction:
    taken_out = sum((times * at(polynomial, x) for x, times in known_ones), Fraction(0))
    return (free - side.unknown) * at(polynomial, at_zero) - taken_out


def _trace(side: Side, prices: Part, powers: list[Fraction]) -> Fraction:
    """Σ powers_n tr M^n from below, with prices on what the entries sum to."""
    sums = row_sums(side)
    rows = [_pair(prices.at("rows"), row) for row in prices.items("rows")]
    diagonal, excess = prices.ratio("diagonal"), prices.ratio("excess")
    if len(rows) != len(sums):
        raise Refuted(f"{prices.at('rows')} must have two prices for each of {len(sums)} row sums")
    if excess < 0 and not side.exactly:
        raise Refuted(f"{prices.at('excess')} is below 0, but only the least excess is known")
    total = excess * 4 * side.level if side.form not in ("even", "odd") else Fraction(0)
    free_of_excess = Fraction(0) if side.form in ("even", "odd") else excess
    for (u, v), (entries, squares) in zip(rows, sums, strict=True):
        total -= u * entries + v * squares
    for place in places(side):
        u, v = rows[place.rows]
        costs = [
            diagonal * m * m
            + u * m
            - free_of_excess * m * (m - 1)
            + _least_quadratic(powers[3], powers[2] * m + v, low, high, 1)
            for m, (low, high) in place.ranges.items()
        ]
        total += place.count * min(costs, default=Fraction(0))
    for count, low, high in diagonals(side):
        total += count * _least_quadratic(powers[3], powers[1] + rows[0][1] - diagonal, low, high, 2)
    return total


def _least_quadratic(a: Fraction, b: Fraction, low: int, high: int, step: int) -> Fraction:
    """The least of a c² + b c over c = low, low + step, ... up to high."""
    steps = (high - low) // step
    # with c = low + step·n the difference from n to n + 1 grows with n where a > 0
    candidates = {0, steps}
    if a > 0:
        turn = (-b / (2 * a) - low) / step
        near = turn.numerator // turn.denominator
        candidates |= {min(max(n, 0), steps) for n in (near, near + 1)}
    return min(a * c * c + b * c for c in (low + step * n for n in candidates))


def _in_x(polynomial: list[Fraction], at_zero: int, slope: int) -> list[Fraction]:
    """The polynomial of at_zero + slope·x as one of x."""
    return [
        sum(
            (comb(n, m) * c * at_zero ** (n - m) for n, c in enumerate(polynomial) if n >= m and c),
            Fraction(0),
        )
        * slope**m
        for m in range(len(polynomial))
    ]


def _sum(one: list[Fraction], other: list[Fraction]) -> list[Fraction]:
    size = max(len(one), len(other))
    return [
        (one[n] if n < len(one) else Fraction(0)) + (other[n] if n < len(other) else Fraction(0))
        for n in range(size)
    ]


def _list_of(part: Part, key: str, length: int) -> list[Fraction]:
    found = [ratio(part.at(key), x) for x in part.items(key)]
    if len(found) != length:
        raise Refuted(f"{part.at(key)} must have {length} numbers")
    return found


def _pair(where: str, value: object) -> tuple[Fraction, Fraction]:
    found = [ratio(where, x) for x in listed(where, value)]
    if len(found) != 2:
        raise Refuted(f"{where} must have two prices in each row")
    return found[0], found[1]
