"""Plans to lay out and to print: the trial of the design document, and hostile variants of it."""

from __future__ import annotations

from datetime import UTC, datetime
from fractions import Fraction
from typing import Any

from search.efficiency.evaluator import score
from search.efficiency.records import Bound
from search.field.planfile import plan_document
from search.field.planshape import Document
from search.field.randomise import lay_out
from search.foundation.stopping import Ended
from search.runs.plan import Plan
from search.solvers.start import feasible_start
from search.trial.limits import limits
from search.trial.reading import trial_from_document
from search.trial.records import Trial
from search.trial.tables import tables

ISSUED = datetime(2027, 3, 2, 9, 10, tzinfo=UTC)

LOW_MOOR: dict[str, Any] = {
    "trial": "Low Moor winter wheat",
    "about": {"site": "Low Moor", "season": "2027", "crop": "winter wheat", "number": "LM-27-03"},
    "treatments": {
        "Arlen": {},
        "Bracken": {"plots": 3},
        "Clover": {},
        "Dunlin": {"plots": 6, "control": True},
        "Elder": {
            "caution": "Treated seed: gloves, no food on the plot",
            "amount": {"per_plot": 0.42, "unit": "kg"},
        },
        "Fescue": {},
        "Gorse": {},
        "Heather": {},
    },
    "plots_each": [3, 4],
    "rules": {
        "never_share_block": [["Arlen", "Clover"]],
        "meet_at_least": [{"pair": ["Arlen", "Elder"], "blocks": 1}],
        "keep_out": {"Heather": ["bay c"]},
        "must_hold": {"every block": ["Dunlin"]},
    },
    "ground": {
        "plot_m": [1.5, 9.0],
        "rows": "aaaaaabbbbbb\ncccccddddd..\n.eeeeffff...\n",
        "names": {letter: f"bay {letter}" for letter in "abcdef"},
    },
}
"""The example of the design document: an invented field of 30 plots in six bays."""


def trial_with(**changes: Any) -> Trial:
    """The Low Moor trial with some keys of its file changed; None leaves a key out."""
    document = {**LOW_MOOR, **changes}
    return trial_from_document({key: value for key, value in document.items() if value is not None})


def plan_of(trial: Trial, gap: float | None = 0.0084) -> Plan:
    """Any plan that the rules allow, under a bound that leaves the gap given."""
    contents, start = feasible_start(trial, tables(trial), limits(trial), seed=1, seconds=5)
    found = score(trial, contents)
    bound = None
    if gap is not None:
        exact = Fraction(found.aim / (1 - gap)).limit_denominator(10**9)
        certificate = {"kind": "made up", "statement": "for a test", "multipliers": {}}
        bound = Bound(trial.aim.kind, exact, "made up", certificate)
    return Plan(trial, contents, found, bound, Ended.MOVES, 7, 100, 0.5, start, "digest")


def document_of(trial: Trial, gap: float | None = 0.0084, seed: int = 8123) -> Document:
    """The plan file of any plan of a trial."""
    plan = plan_of(trial, gap)
    return plan_document(plan, lay_out(trial, plan.contents, seed), ISSUED)
