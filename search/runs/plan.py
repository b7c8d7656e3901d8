"""A finished plan: block contents with their score, the bound, and what the two say together."""

from __future__ import annotations

from dataclasses import dataclass
from enum import StrEnum
from html import escape
from typing import TYPE_CHECKING

from search.efficiency.comparing import gap_percent, in_figures, measure
from search.efficiency.records import Bound, Score
from search.foundation.stopping import Ended
from search.trial.records import Contents, Trial

if TYPE_CHECKING:
    import pandas as pd

PROVEN_PERCENT = 1e-4
"""A gap of at most one part in a million counts as proven optimal: certificates never sit on the optimum."""


WRONG = 1e-9
"""A plan that beats a bound by more than this part of it cannot be."""


class Standing(StrEnum):
    """How much is known about a plan."""

    BALANCED = "balanced"
    PROVEN_OPTIMAL = "proven optimal"
    BOUNDED = "bounded"
    FEASIBLE = "feasible"


@dataclass(frozen=True, slots=True)
class Plan:
    """Block contents and everything that is known of them; plots are placed by `search.field`."""

    trial: Trial
    contents: Contents
    score: Score
    bound: Bound | None
    ended_by: Ended
    seed: int
    moves: int
    seconds: float
    start: str
    digest: str

    @property
    def gap_percent(self) -> float | None:
        """How far the plan is from the bound; 0 for a balanced one, 100 where its efficiency is 0."""
        if self.bound is None:
            return None
        if self.standing is Standing.BALANCED:
            return 0.0
        return max(0.0, self._distance(self.bound))

    def is_better_than(self, bound: Bound) -> bool:
        """Whether it beats a bound by more than rounding: then one of the two is wrong."""
        return self._distance(bound) < -100 * WRONG

    def _distance(self, bound: Bound) -> float:
        return gap_percent(self.trial.aim.kind, self.score.aim, bound.value)

    @property
    def standing(self) -> Standing:
        """Balanced, proven optimal, bounded or feasible."""
        if self.bound is None or self.score.average_pair_variance is None:
            return Standing.FEASIBLE
        aim, gap = self.trial.aim.kind, self._distance(self.bound)
        # Balanced with unequal blocks need not be as even as can be: only a met bound tells.
        best = aim.treats_pairs_alike and (gap <= 0 or not aim.counts_meetings)
        if self.score.balanced and best:
            return Standing.BALANCED
        if gap <= PROVEN_PERCENT:
            return Standing.PROVEN_OPTIMAL
        return Standing.BOUNDED

    @property
    def frame(self) -> pd.DataFrame:
        """One row a plot: block, treatment."""
        import pandas as pd

        trial = self.trial
        rows = [
            (trial.blocks[j].name, trial.treatments[i].name)
            for j, block in enumerate(self.contents)
            for i in block
        ]
        return pd.DataFrame(rows, columns=["block", "treatment"])

    def _repr_html_(self) -> str:
        trial = self.trial
        rows = "".join(
            f"<tr><th>{escape(trial.blocks[j].name)}</th>"
            + "".join(f"<td>{escape(trial.treatments[i].name)}</td>" for i in block)
            + "</tr>"
            for j, block in enumerate(self.contents)
        )
        gap = self.gap_percent
        aim = trial.aim.kind
        known = "no bound" if gap is None else f"at most {gap:.3g}% from the best possible"
        return (
            f"<p><b>{escape(trial.name)}</b>: {measure(aim)} {in_figures(aim, self.score.aim, 4)} "
            f"({escape(trial.aim.kind.value)}), {known}, {self.standing.value}</p><table>{rows}</table>"
        )
