"""From a number that Σλ² is not below to the bound of even meetings; what both of its arguments share."""

from __future__ import annotations

from collections.abc import Mapping
from fractions import Fraction
from math import ceil
from typing import Any

from search.efficiency.bounds.problem import Problem
from search.efficiency.records import Bound
from search.trial.records import AimKind, Trial


def applies(trial: Trial) -> bool:
    """Whether meetings are counted, and nothing stands twice in a block.

    Where treatments may repeat, plots of one treatment fill a block without a meeting, and no plan is known
    to need any.
    """
    return trial.aim.kind.counts_meetings and not trial.rules.twice_in_block


def bound_on_meetings(
    given: Problem, argument: str, squares: Fraction, multipliers: Mapping[str, Any]
) -> Bound | None:
    """The bound that `Σ_{i<j} λ_ij² ≥ squares` gives; None where it says nothing.

    The sum is whole, and it is odd or even as `Σ λ = Σ_B k_B(k_B − 1)/2` is, since λ² and λ are odd together.
    """
    least = ceil(squares)
    if (least - int((given.rules.sizes * (given.rules.sizes - 1)).sum()) // 2) % 2:
        least += 1
    if least < 1:
        return None
    certificate = {
        "kind": argument,
        "statement": f"no plan that this trial admits has a sum of squared meetings below {least}",
        "multipliers": dict(multipliers),
    }
    return Bound(AimKind.EVEN_MEETINGS, Fraction(least), argument, certificate)
