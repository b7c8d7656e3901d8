"""The prices of a local spectral program, and the exact value that they prove."""

from __future__ import annotations

from collections.abc import Iterable
from dataclasses import dataclass, field
from fractions import Fraction

from search.efficiency.bounds.spectral.side import Pairs, Shape, Side
from search.efficiency.bounds.spectral.walks import added, shifted, value, walk_polynomial


@dataclass(frozen=True, slots=True)
class Split:
    """At most `count` of the eigenvalues have x ≤ `at` ("few"), or more of them have."""

    at: Fraction
    count: int
    few: bool


@dataclass(slots=True)
class SidePrices:
    """Prices of one side.

    Parameters
    ----------
    powers : of the traces of the first to fourth power
    diagonal : of the diagonal of the square
    excess : of the distance from even
    rows : for each relation of the row sums of the matrix and of its square
    walks : by family, for each length
    """

    powers: tuple[Fraction, Fraction, Fraction, Fraction]
    diagonal: Fraction
    excess: Fraction
    rows: tuple[tuple[Fraction, Fraction], ...]
    walks: dict[str, dict[int, Fraction]] = field(default_factory=dict)


@dataclass(slots=True)
class Prices:
    """Prices of a program: a constant, those of each side, and of each split on the way to it."""

    constant: Fraction
    sides: tuple[SidePrices, ...]
    splits: tuple[Fraction, ...]


def polynomial(shape: Shape, sides: Iterable[Side], prices: Prices) -> list[Fraction]:
    """p as a polynomial of x = ρ/(rk), to lie below the cost of an eigenvalue."""
    parts = [[prices.constant]]
    scale = shape.r * shape.k
    for side, price in zip(sides, prices.sides, strict=True):
        parts.append(shifted((Fraction(0), *price.powers), side.offset, scale))
        for family in side.walks:
            for length, gamma in price.walks.get(family.name, {}).items():
                walk = walk_polynomial(length, family.lines, family.points)
                own = shifted(walk, family.offset, family.sign * scale)
                parts.append([gamma * c for c in own])
    return added(*parts)


def proved(
    shape: Shape,
    sides: tuple[Side, ...],
    prices: Prices,
    splits: tuple[Split, ...],
    at_zero: int,
) -> tuple[Fraction, list[Columns]]:
    """What Σ cost(x) is not below, given that p and the splits lie below the cost everywhere.

    Parameters
    ----------
    at_zero : cost of an eigenvalue with x = 0

    Returns
    -------
    the value, and for each side the columns that decide it
    """
    columns = []
    rank, known = shape.rank, shape.without_loss
    total = prices.constant * (rank - known) + known * at_zero
    for side, price in zip(sides, prices.sides, strict=True):
        q = (Fraction(0), *price.powers)
        trace, cheapest = traces_from_below(side, price)
        total += trace
        columns.append(cheapest)
        total -= sum(times * value(q, x) for x, times in side.fixed)
        total += (side.zeros(rank) - known) * value(q, side.offset)
        for family in side.walks:
            for length, gamma in price.walks.get(family.name, {}).items():
                walk = walk_polynomial(length, family.lines, family.points)
                fixed = sum(times * value(walk, x) for x, times in family.fixed)
                missing = (side.zeros(rank) - known) * value(walk, family.offset)
                total += gamma * (missing - fixed + (family.least or 0))
    for split, eta in zip(splits, prices.splits, strict=True):
        total += -eta * (split.count - known) if split.few else eta * (split.count + 1 - known)
    return total, columns


Columns = tuple[tuple[tuple[int, int] | None, ...], tuple[int, ...]]
"""The cheapest pair of entries of each relation, and the cheapest of each kind of diagonal entry."""


def traces_from_below(side: Side, price: SidePrices) -> tuple[Fraction, Columns]:
    """What `Σ w_p tr M^p` is not below, pair by pair, and where the least of each pair lies.

    With C = M²: `tr M² = Σ c_ii`, `tr M³ = Σ m_ij c_ij`, `tr M⁴ = Σ c_ij² + Σ c_ii²`, `c_ii = Σ_j m_ij²`.
    A relation without possible entries has no pairs, so it adds nothing.
    """
    w2, w4 = price.powers[1], price.powers[3]
    total, pairs = price.excess * side.excess, []
    for relation in side.pairs:
        least, at = _cheapest_pair(price, relation)
        total += relation.count * least
        pairs.append(at)
    for (u, v), (entries, squares) in zip(price.rows, side.rows, strict=True):
        total -= u * entries + v * squares
    slope, kappas = w2 + price.rows[0][1] - price.diagonal, []
    for count, low, high in side.diagonals:
        kappa = _lowest(w4, slope, low, high, 2)
        total += count * (slope * kappa + w4 * kappa**2)
        kappas.append(kappa)
    return total, (tuple(pairs), tuple(kappas))


def _cheapest_pair(price: SidePrices, relation: Pairs) -> tuple[Fraction, tuple[int, int] | None]:
    w3, w4 = price.powers[2:]
    u, v = price.rows[relation.rows]
    options = []
    for m, (low, high) in relation.ends.items():
        c = _lowest(w4, w3 * m + v, low, high, 1)
        cost = price.diagonal * m * m + u * m + (w3 * m + v) * c + w4 * c * c
        options.append((cost - price.excess * m * (m - 1), (m, c)))
    return min(options, default=(Fraction(0), None))


def _lowest(square: Fraction, slope: Fraction, low: int, high: int, step: int) -> int:
    """Where `square·c² + slope·c` is least over c = low, low + step, ..., high."""
    places = {low, high - (high - low) % step}
    if square > 0:
        place = (-slope / (2 * square) - low) / step
        below = low + step * (place.numerator // place.denominator)
        places |= {c for c in (below, below + step) if low <= c <= high}
    return min(places, key=lambda c: (square * c * c + slope * c, c))
