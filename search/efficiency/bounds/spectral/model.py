"""The linear program whose prices make a certificate.

Its columns are eigenvalues on a grid, and for each side pairs of entries of M and M², and diagonal entries
of M²; its rows say that the traces of the powers agree. Columns that turn out to be missing are put in and
the program is solved again, so that neither grid nor window shapes the result.
"""

from __future__ import annotations

from dataclasses import dataclass, replace
from fractions import Fraction
from math import sqrt
from typing import Any

import numpy as np
from numpy.typing import NDArray

from search.efficiency.bounds.program import Program
from search.efficiency.bounds.spectral.below import Cost
from search.efficiency.bounds.spectral.prices import Columns, Prices, SidePrices, Split
from search.efficiency.bounds.spectral.side import Pairs, Shape, Side, Walks
from search.efficiency.bounds.spectral.walks import value, walk_polynomial

Floats = NDArray[np.float64]
WINDOW = 4
"""Entries of the square on either side of the usual one that the program begins with."""
PENALTY = 30.0
"""Cost of traces that do not agree, so that a level without any plan is told by a high value."""


@dataclass(slots=True)
class Model:
    """A program that can be solved, grown and solved again.

    Parameters
    ----------
    shape, sides, splits, cost : what is bounded
    places : x of the eigenvalues
    columns : for each side and relation, pairs of an entry of M and one of M²
    kappas : for each side, diagonal entries of M²
    penalty : cost of traces that do not agree
    """

    shape: Shape
    sides: tuple[Side, ...]
    splits: tuple[Split, ...]
    cost: Cost
    places: Floats
    columns: list[list[set[tuple[int, int]]]]
    kappas: list[list[set[int]]]
    penalty: float = PENALTY

    @classmethod
    def of(cls, shape: Shape, sides: tuple[Side, ...], cost: Cost, penalty: float = PENALTY) -> Model:
        """A program to begin with."""
        columns = [[_window(side, relation) for relation in side.pairs] for side in sides]
        kappas = [[_usual(side, *ends) for _, *ends in side.diagonals] for side in sides]
        places = np.concatenate([1 - np.geomspace(1, 0.01, 100), np.linspace(0.01, 0.9, 80)])
        return cls(shape, sides, (), cost, places, columns, kappas, penalty)

    def split_at(self, split: Split) -> Model:
        """The same with one more split, grown so far as this one is."""
        cut = float(split.at)
        return replace(
            self,
            splits=(*self.splits, split),
            places=np.unique([*self.places, cut, cut + 1e-7]),
            columns=[[set(pairs) for pairs in side] for side in self.columns],
            kappas=[[set(held) for held in side] for side in self.kappas],
        )

    def solve(self) -> tuple[Prices, list[tuple[float, float]], float] | None:
        """Prices, how many eigenvalues lie where, and the value; None where the solver finds no optimum."""
        found = self._program().solve()
        if found is None:
            return None
        masses = found.columns[: len(self.places)]
        atoms = [
            (x, mass) for x, mass in zip(self.places.tolist(), masses.tolist(), strict=True) if mass > 1e-9
        ]
        return self._prices(found.prices), atoms, found.cost + self.shape.without_loss * self.cost.at_zero

    def grow(self, places: list[float], wanted: list[Columns]) -> bool:
        """Put missing columns in; False where none is missing."""
        before = self._size
        if places:
            self.places = np.unique([*self.places, *places])
        for side, columns, kappas, (pairs, diagonals) in zip(
            self.sides, self.columns, self.kappas, wanted, strict=True
        ):
            for relation, held, pair in zip(side.pairs, columns, pairs, strict=True):
                if pair is not None:
                    m, c = pair
                    low, high = relation.ends[m]
                    held |= {(m, near) for near in (c - 1, c, c + 1) if low <= near <= high}
            for held_kappas, kappa in zip(kappas, diagonals, strict=True):
                held_kappas.add(kappa)
        return self._size > before

    @property
    def _size(self) -> int:
        pairs = sum(len(held) for side in self.columns for held in side)
        return len(self.places) + pairs + sum(len(held) for side in self.kappas for held in side)

    def _program(self) -> Program:
        program = Program()
        rank, known, x = self.shape.rank, self.shape.without_loss, self.places
        program.equal("mass", rank - known)
        entries: dict[Any, Any] = {"mass": 1}
        for number, split in enumerate(self.splits):
            few = 1 if split.few else -1
            program.at_most(("split", number), few * (split.count + (not split.few) - known))
            entries["split", number] = few * (x <= float(split.at))
        for s, side in enumerate(self.sides):
            entries |= self._trace_rows(program, s, side)
        program.add(self.cost(x), entries)
        for s, side in enumerate(self.sides):
            self._add_side(program, s, side)
        return program

    def _trace_rows(self, program: Program, s: int, side: Side) -> dict[Any, Any]:
        """Rows for the powers and the closed walks of a side, and the entries of eigenvalues in them."""
        scale, wide = _scale(side), self.shape.r * self.shape.k
        missing = side.zeros(self.shape.rank) - self.shape.without_loss
        entries: dict[Any, Any] = {}
        for p in range(1, 5):
            fixed = sum(times * (x / scale) ** p for x, times in side.fixed)
            program.equal((s, p), missing * (side.offset / scale) ** p - fixed)
            entries[s, p] = ((side.offset + wide * self.places) / scale) ** p
        for family in side.walks:
            for length in family.lengths:
                walk = walk_polynomial(length, family.lines, family.points)
                fixed = sum(times * float(value(walk, x)) for x, times in family.fixed)
                level, row = self._walk_scale(family, length), (s, family.name, length)
                program.at_most(
                    row, (fixed - missing * float(value(walk, family.offset)) - (family.least or 0)) / level
                )
                entries[row] = -self._walks_at(family, length, self.places) / level
        return entries

    def _walks_at(self, family: Walks, length: int, x: Floats) -> Floats:
        alpha = family.offset + family.sign * self.shape.r * self.shape.k * x
        walk = np.array(walk_polynomial(length, family.lines, family.points), dtype=float)
        return np.asarray(np.polynomial.polynomial.polyval(alpha, walk))

    def _walk_scale(self, family: Walks, length: int) -> float:
        """So that entries are of the size of those of the powers, and none is out of proportion."""
        usual = sqrt(max(1, (family.lines - 1) * (family.points - 1))) ** length
        greatest = np.abs(self._walks_at(family, length, np.array([0.0, 0.25, 0.5, 1.0]))).max()
        return max(usual, float(greatest) / 1e6)

    def _add_side(self, program: Program, s: int, side: Side) -> None:
        """Pairs and diagonal entries, and slack at a price, in units of one member."""
        scale, size = _scale(side), side.size
        program.equal((s, "diagonal"), 0)
        if side.exactly:
            program.equal((s, "excess"), side.excess / size)
        else:
            program.at_most((s, "excess"), -side.excess / size)
        for number, (total, squares) in enumerate(side.rows):
            program.equal((s, "row", number), total / scale / size)
            program.equal((s, "square", number), squares / scale**2 / size)
        for number, relation in enumerate(side.pairs):
            program.equal((s, "count", number), relation.count / size)
            if self.columns[s][number]:
                m, c = np.array(sorted(self.columns[s][number]), dtype=float).T
                entries: dict[Any, Any] = {
                    (s, "count", number): 1,
                    (s, 3): -size * m * c / scale**3,
                    (s, 4): -size * c * c / scale**4,
                    (s, "diagonal"): m * m / scale**2,
                    (s, "row", relation.rows): m / scale,
                    (s, "square", relation.rows): c / scale**2,
                    (s, "excess"): (1 if side.exactly else -1) * m * (m - 1),
                }
                program.add(np.zeros(len(m)), entries)
        for number, (count, _, _) in enumerate(side.diagonals):
            program.equal((s, "members", number), count / size)
            kappa = np.array(sorted(self.kappas[s][number]), dtype=float)
            entries = {
                (s, "members", number): 1,
                (s, 2): -size * kappa / scale**2,
                (s, 4): -size * kappa**2 / scale**4,
                (s, "diagonal"): -kappa / scale**2,
                (s, "square", 0): kappa / scale**2,
            }
            program.add(np.zeros(len(kappa)), entries)
        for p in range(1, 5):
            program.add([self.penalty] * 2, {(s, p): [1, -1]})
        slack = [(s, "excess"), *((s, name, n) for n in range(len(side.rows)) for name in ("row", "square"))]
        slack += [(s, "count", number) for number in range(len(side.pairs))]
        for row in slack:
            program.add([self.penalty * size] * 2, {row: [1, -1]})

    def _prices(self, found: dict[Any, float]) -> Prices:
        sides = tuple(self._side_prices(found, s, side) for s, side in enumerate(self.sides))
        splits = tuple(_near(max(0.0, found["split", n])) for n in range(len(self.splits)))
        return Prices(_near(found["mass"]), sides, splits)

    def _side_prices(self, found: dict[Any, float], s: int, side: Side) -> SidePrices:
        scale, size = _scale(side), side.size
        excess = found[s, "excess"] if side.exactly else max(0.0, found[s, "excess"])
        w1, w2, w3, w4 = (_near(found[s, p] / scale**p) for p in range(1, 5))
        rows = tuple(
            (
                _near(-found[s, "row", number] / scale / size),
                _near(-found[s, "square", number] / scale**2 / size),
            )
            for number in range(len(side.rows))
        )
        walks = {
            family.name: {
                length: _near(price / self._walk_scale(family, length))
                for length in family.lengths
                if (price := found[s, family.name, length]) > 1e-12
            }
            for family in side.walks
        }
        diagonal = _near(-found[s, "diagonal"] / scale**2 / size)
        return SidePrices((w1, w2, w3, w4), diagonal, _near(excess / size), rows, walks)


def _scale(side: Side) -> float:
    return sqrt(max(1, side.diagonals[0][1]))


def _near(x: float) -> Fraction:
    """The float to fifteen digits, as a rational."""
    return Fraction(f"{x:.15g}")


def _usual(side: Side, low: int, high: int) -> set[int]:
    """The least diagonal entries of the square, those near the usual one, and the greatest."""
    usual = side.excess // side.size // 2 * 2
    near = {low + step for step in (0, 2, 4, usual - 2, usual, usual + 2, usual + 4)}
    return {kappa for kappa in (*near, high - (high - low) % 2) if low <= kappa <= high}


def _window(side: Side, relation: Pairs) -> set[tuple[int, int]]:
    """All entries m, with entries of the square near the usual one."""
    pairs = sum(other.count for other in side.pairs if other.rows == relation.rows)
    usual = side.rows[relation.rows][1] // pairs
    around = range(usual - WINDOW, usual + WINDOW + 2)
    return {
        (m, c)
        for m, (low, high) in relation.ends.items()
        for c in (low, *around, min(high, low + WINDOW))
        if low <= c <= high
    }
