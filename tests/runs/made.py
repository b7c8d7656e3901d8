"""A plan made by hand, for tests that need one without a search."""

from __future__ import annotations

from search.efficiency.bounds import best_bound
from search.efficiency.evaluator import score
from search.foundation.stopping import Ended
from search.runs.plan import Plan
from search.trial.limits import limits
from search.trial.records import Contents, Trial


def made_plan(trial: Trial, contents: Contents, ended_by: Ended = Ended.MOVES) -> Plan:
    """Contents with their true score and the trial's best bound."""
    return Plan(
        trial=trial,
        contents=contents,
        score=score(trial, contents),
        bound=best_bound(trial, limits(trial)),
        ended_by=ended_by,
        seed=1,
        moves=5,
        seconds=0.1,
        start="by hand",
        digest="",
    )
