"""Exact minima over small whole-number vectors, one entry for each block size."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from fractions import Fraction

from search.proof.records import Refuted

MOST_STATES = 200_000
"""Sums that are followed at most; a trial with very many block sizes has more."""


@dataclass(frozen=True, slots=True)
class Coordinate:
    """One entry of the vector.

    Parameters
    ----------
    value : what one unit adds to the sum that is squared
    cost : what one unit costs
    low, high : range of the entry
    """

    value: Fraction
    cost: Fraction
    low: int
    high: int


def least_cost(
    coordinates: Sequence[Coordinate], squared: int | Fraction, fewest: int, most: int
) -> Fraction | None:
    """The least of squared·(Σ value·x)² + Σ cost·x over whole vectors x in range.

    Of all vectors with the same count Σx and the same Σ value·x only the cheapest is followed.

    Parameters
    ----------
    coordinates : the entries
    squared : weight of the square
    fewest, most : range of Σx

    Returns
    -------
    the least cost, or None where no vector is in range
    """
    states = {(0, Fraction(0)): Fraction(0)}
    for entry in coordinates:
        grown: dict[tuple[int, Fraction], Fraction] = {}
        for (count, total), cost in states.items():
            for x in range(entry.low, min(entry.high, most - count) + 1):
                state = count + x, total + x * entry.value
                price = cost + x * entry.cost
                if state not in grown or price < grown[state]:
                    grown[state] = price
            if len(grown) > MOST_STATES:
                raise Refuted("the trial has too many block sizes for its certificate to be checked")
        states = grown
    found = [squared * total**2 + cost for (count, total), cost in states.items() if count >= fewest]
    return min(found, default=None)
