"""What the evaluator and the bounds hand on."""

from __future__ import annotations

from dataclasses import dataclass
from enum import StrEnum
from fractions import Fraction
from typing import Any

from search.efficiency.comparing import is_tighter
from search.trial.records import AimKind


class NearBalance(StrEnum):
    """Whether the sum of squared concurrences is the least there is."""

    YES = "yes"
    NO = "no"
    UNKNOWN = "unknown"


@dataclass(frozen=True, slots=True)
class Score:
    """How good a plan is; efficiencies lie in [0, 1], variances are in units of the plot variance.

    A disconnected plan has efficiencies 0 and variances None.
    """

    aim: float
    """The efficiency for the aim; for even meetings the whole number `Σ_{i<j} λ_ij²`."""
    A: float
    D: float
    worst_pair_efficiency: float
    average_pair_variance: float | None
    largest_pair_variance: float | None
    aim_variance: float | None
    """The mean variance that the aim speaks of, for the worst pair the largest; for the overall aim None."""
    loss_to_replication_percent: float
    loss_to_blocks_percent: float
    residual_df: int
    connected: bool
    least_meetings: int
    most_meetings: int
    near_balanced: NearBalance
    balanced: bool
    """Equal variances for all pairs and no information lost beyond what blocks must cost."""


@dataclass(frozen=True, slots=True)
class Bound:
    """No plan that the trial admits has an efficiency for the aim above `exact`.

    For even meetings: none has a sum of squared meetings below `exact`, which is a whole number.
    `certificate` is JSON data, `{"kind", "statement", "multipliers"}`, rationals written "p/q",
    from which `search.proof` derives the bound again. `otherwise` is the best bound for those who do not
    believe this one: a proof by exhaustion is repeated only on demand.
    """

    aim: AimKind
    exact: Fraction
    argument: str
    certificate: dict[str, Any]
    otherwise: Bound | None = None

    @property
    def value(self) -> float:
        """The bound as a float, or as a whole number where the aim counts."""
        return int(self.exact) if self.aim.counts_meetings else float(self.exact)

    def beats(self, other: Bound | None) -> bool:
        """Whether it says more than another bound for the same aim."""
        return other is None or is_tighter(self.aim, self.exact, other.exact)
