"""One level of one trial, cut down by splits: its program solved until nothing is missing."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from fractions import Fraction
from itertools import pairwise
from math import floor
from typing import Any

import numpy as np

from search.efficiency.bounds.problem import text
from search.efficiency.bounds.spectral.below import (
    Piece,
    low_points,
    stays_below,
)
from search.efficiency.bounds.spectral.model import Model
from search.efficiency.bounds.spectral.prices import (
    Prices,
    SidePrices,
    Split,
    polynomial,
    proved,
)

ROUNDS = 12
ENOUGH = 3e-8
"""Rounds end where more columns could bring less than this part of the value."""
MARGIN = 1e-10
"""How far polynomials stay below the cost, so that exact arithmetic agrees soon."""
ROUNDING = 2e-15
"""What floats may add to a polynomial, as a part of its greatest coefficient."""
STEPS_DOWN = (Fraction(0), *(Fraction(1, 10**n) for n in (10, 9, 8, 7)))
SAME_PLACE = 0.004
"""Eigenvalues of the program that lie closer are one."""


@dataclass(slots=True)
class Leaf:
    """What is proved for one level under some splits.

    Parameters
    ----------
    model : its program
    value : what `Σ cost` is not below
    prices : that prove it
    atoms : places of the eigenvalues that the program chose, and how many
    """

    model: Model
    value: Fraction
    prices: Prices
    atoms: list[tuple[float, float]]

    def split(self) -> Split | None:
        """Where the number of eigenvalues up to some place is farthest from whole."""
        groups = grouped(self.atoms)
        total, farthest, best = float(self.model.shape.without_loss), 1e-3, None
        for (_, end, mass, _), (start, *_) in pairwise(groups):
            total += mass
            broken = min(total - floor(total), 1 - total + floor(total))
            if broken > farthest:
                at = Fraction(round((end + start) * 500_000), 10**6)
                farthest, best = broken, Split(at, floor(total), few=True)
        return best

    @property
    def splits(self) -> tuple[Split, ...]:
        """On the way to it."""
        return self.model.splits

    def multipliers(self) -> dict[str, Any]:
        """Its prices as the checker reads them."""
        sides = {
            side.name: _side_multipliers(price)
            for side, price in zip(self.model.sides, self.prices.sides, strict=True)
        }
        return {
            "constant": text(self.prices.constant),
            "splits": [text(eta) for eta in self.prices.splits],
            **sides,
        }

    def made_sure(self) -> bool:
        """Lower the polynomial until exact arithmetic agrees that it lies below the cost, if it soon does."""
        shape, model = self.model.shape, self.model
        for step in STEPS_DOWN:
            self.prices.constant -= step
            self.value -= step * (shape.rank - shape.without_loss)
            p = polynomial(shape, model.sides, self.prices)
            if stays_below(p, model.cost, pieces(model.splits, self.prices)):
                return True
        return False


def grouped(atoms: Sequence[tuple[float, float]]) -> list[tuple[float, float, float, float]]:
    """Eigenvalues that are really one: from, to, how many, and their middle."""
    groups: list[tuple[float, float, float, float]] = []
    for x, mass in atoms:
        if groups and x - groups[-1][1] < SAME_PLACE:
            start, _, others, middle = groups[-1]
            whole = others + mass
            groups[-1] = start, x, whole, (others * middle + mass * x) / whole
        else:
            groups.append((x, x, mass, x))
    return groups


def pieces(splits: Sequence[Split], prices: Prices) -> list[Piece]:
    """What the splits add to the cost, from place to place."""
    cuts = sorted({Fraction(0), Fraction(1), *(split.at for split in splits)})
    return [
        (
            low,
            high,
            sum(
                (
                    eta if split.few else -eta
                    for split, eta in zip(splits, prices.splits, strict=True)
                    if high <= split.at
                ),
                Fraction(0),
            ),
        )
        for low, high in pairwise(cuts)
    ]


def solved(model: Model) -> Leaf | None:
    """The best value that the rounds reach; None where the solver fails, or exact arithmetic disagrees."""
    best: Leaf | None = None
    for _ in range(ROUNDS):
        found = model.solve()
        if found is None:
            break
        prices, atoms, within_reach = found
        places = _lower(model, prices)
        value, columns = proved(model.shape, model.sides, prices, model.splits, model.cost.at_zero)
        if best is None or value > best.value:
            best = Leaf(model, value, prices, atoms)
        if within_reach - float(best.value) < ENOUGH * abs(within_reach):
            break
        places += [middle for start, end, _, middle in grouped(atoms) if start < end]
        if not model.grow(places, columns):
            break
    return best if best is not None and best.made_sure() else None


def _lower(model: Model, prices: Prices) -> list[float]:
    """Lower the constant until the polynomial lies below the cost, and tell where it touched."""
    p = np.array([float(c) for c in polynomial(model.shape, model.sides, prices)])
    points = [point for piece in pieces(model.splits, prices) for point in low_points(p, model.cost, piece)]
    above = max(0.0, *(-room for _, room in points))
    margin = MARGIN + ROUNDING * float(np.abs(p).max())
    prices.constant -= Fraction(f"{above + margin:.6e}")
    return [x for x, room in points if room < -MARGIN]


def _side_multipliers(price: SidePrices) -> dict[str, Any]:
    return {
        "powers": [text(w) for w in price.powers],
        "diagonal": text(price.diagonal),
        "excess": text(price.excess),
        "rows": [[text(u), text(v)] for u, v in price.rows],
        "walks": {
            family: {str(length): text(gamma) for length, gamma in lengths.items()}
            for family, lengths in price.walks.items()
        },
    }
