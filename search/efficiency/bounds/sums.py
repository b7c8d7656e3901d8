"""The limits on the plots that several treatments have together, and their prices."""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from dataclasses import dataclass
from fractions import Fraction
from typing import Any

import numpy as np

from search.efficiency.bounds.problem import Problem, text
from search.efficiency.bounds.program import Program
from search.trial.limits import SumLimit
from search.trial.tables import Ints

SumType = tuple[int, int]
"""Number of treatments, and the most plots they have together."""


@dataclass(frozen=True, slots=True, eq=False)
class Sums:
    """The sum limits of a trial by type; alike limits have one price, so that alike treatments stay alike.

    Parameters
    ----------
    types : the limits of each type
    memberships : (t, types) in how many limits of each type a treatment stands
    """

    types: dict[SumType, tuple[SumLimit, ...]]
    memberships: Ints

    @classmethod
    def of(cls, given: Problem) -> Sums:
        """Those of a trial."""
        types: dict[SumType, tuple[SumLimit, ...]] = {}
        for limit in given.limits.sums:
            key = (len(limit.treatments), limit.most)
            types[key] = (*types.get(key, ()), limit)
        counts = np.zeros((given.trial.t, len(types)), dtype=np.int64)
        for k, limits in enumerate(types.values()):
            for limit in limits:
                counts[list(limit.treatments), k] += 1
        return cls(types, counts)

    def add_rows(self, program: Program) -> None:
        """One row for each type: its limits added up."""
        for kind, limits in self.types.items():
            program.at_most(("sum", kind), kind[1] * len(limits))

    def entries(self, memberships: Sequence[int], plots: Any) -> dict[Any, Any]:
        """Entries in those rows of columns for a treatment with so many plots."""
        return {
            ("sum", kind): times * plots for kind, times in zip(self.types, memberships, strict=True) if times
        }

    def values(self, prices: Mapping[Any, float]) -> list[float]:
        """The price of each type, none below 0."""
        return [max(0.0, prices["sum", kind]) for kind in self.types]

    def each(self, memberships: Sequence[int], prices: Sequence[Fraction]) -> Fraction:
        """What a plot costs a treatment on account of the sums."""
        return sum((int(k) * pi for k, pi in zip(memberships, prices, strict=True)), Fraction(0))

    def constant(self, prices: Sequence[Fraction]) -> Fraction:
        """`Σ π most`."""
        return sum(
            (
                pi * kind[1] * len(limits)
                for (kind, limits), pi in zip(self.types.items(), prices, strict=True)
            ),
            Fraction(0),
        )

    def multipliers(self, prices: Sequence[Fraction]) -> list[dict[str, Any]]:
        """The prices as they stand in a certificate, without those that are 0."""
        return [
            {"treatments": list(limit.treatments), "price": text(pi)}
            for limits, pi in zip(self.types.values(), prices, strict=True)
            if pi
            for limit in limits
        ]
