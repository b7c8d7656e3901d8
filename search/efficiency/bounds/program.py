"""A linear program gathered piece by piece, solved for its prices."""

from __future__ import annotations

from collections.abc import Hashable, Mapping, Sequence
from dataclasses import dataclass
from typing import Any

import numpy as np
from numpy.typing import ArrayLike, NDArray

SECONDS = 10.0
"""More than any program of the size admitted needs; one that takes longer is dropped."""


@dataclass(frozen=True, slots=True, eq=False)
class Solution:
    """An optimum.

    Parameters
    ----------
    prices : dual values by row
    columns : in the order in which they were added
    cost : of the optimum
    """

    prices: dict[Hashable, float]
    columns: NDArray[np.float64]
    cost: float


class Program:
    """Minimise a cost over columns ≥ 0, with rows that are known by a key.

    The prices are what is wanted, not the columns: any prices give a valid bound, so nothing rests on
    the accuracy of the solver.
    """

    def __init__(self) -> None:
        self._rows: dict[Hashable, tuple[float, bool]] = {}
        self._costs: list[NDArray[np.float64]] = []
        self._entries: dict[Hashable, list[tuple[NDArray[np.int64], NDArray[np.float64]]]] = {}
        self.columns = 0

    def equal(self, row: Hashable, value: float) -> None:
        """The row equals the value."""
        self._rows[row] = (float(value), True)
        self._entries[row] = []

    def at_most(self, row: Hashable, value: float) -> None:
        """The row is not above the value."""
        self._rows[row] = (float(value), False)
        self._entries[row] = []

    def add(self, costs: Sequence[float] | ArrayLike, entries: Mapping[Hashable, ArrayLike]) -> None:
        """More columns, with their costs and their entries in the rows they touch."""
        cost = np.asarray(costs, dtype=np.float64)
        index = np.arange(self.columns, self.columns + len(cost))
        self._costs.append(cost)
        self.columns += len(cost)
        for row, values in entries.items():
            entry = np.broadcast_to(np.asarray(values, dtype=np.float64), cost.shape)
            self._entries[row].append((index, entry))

    def prices(self) -> dict[Hashable, float] | None:
        """The dual values: λ of `λ (value − row)` for equal rows, π ≥ 0 of `π (row − value)` else.

        Returns None where the solver does not end with an optimum.
        """
        found = self.solve()
        return None if found is None else found.prices

    def solve(self) -> Solution | None:
        """All of the optimum, or None where the solver does not end with one."""
        from scipy.optimize import linprog

        equal = [row for row, (_, is_equal) in self._rows.items() if is_equal]
        at_most = [row for row, (_, is_equal) in self._rows.items() if not is_equal]
        result = linprog(
            np.concatenate(self._costs),
            A_eq=self._matrix(equal),
            b_eq=[self._rows[row][0] for row in equal],
            A_ub=self._matrix(at_most),
            b_ub=[self._rows[row][0] for row in at_most] or None,
            method="highs",
            options={"time_limit": SECONDS},
        )
        if result.status != 0 or result.x is None or result.fun is None:
            return None
        prices = dict(zip(equal, result.eqlin.marginals.tolist(), strict=True))
        prices.update(zip(at_most, (-result.ineqlin.marginals).tolist(), strict=True))
        if not np.isfinite(list(prices.values())).all():
            return None
        return Solution(prices, result.x, float(result.fun))

    def _matrix(self, rows: list[Hashable]) -> Any:
        from scipy.sparse import csr_matrix

        if not rows:
            return None
        parts = [(k, *entry) for k, row in enumerate(rows) for entry in self._entries[row]]
        if not parts:
            return csr_matrix((len(rows), self.columns))
        return csr_matrix(
            (
                np.concatenate([values for _, _, values in parts]),
                (
                    np.concatenate([np.full(len(index), k) for k, index, _ in parts]),
                    np.concatenate([index for _, index, _ in parts]),
                ),
            ),
            shape=(len(rows), self.columns),
        )
