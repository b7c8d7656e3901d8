"""Evenfield: near-balanced and A/D-optimal incomplete block plans for field trials.

From Python:

    from search import Trial, plan
    found = plan(Trial.from_yaml("configs/first_trial.yaml"), seconds=2)
    print(found.score.aim, found.gap_percent)
"""

from importlib import import_module
from typing import TYPE_CHECKING, Any

if TYPE_CHECKING:
    from search.api import Trial as Trial
    from search.api import bound as bound
    from search.api import evaluate as evaluate
    from search.api import plan as plan
    from search.api import sweep as sweep
    from search.runs.store import Store as Store

HOMES = {
    "Trial": "search.api",
    "plan": "search.api",
    "evaluate": "search.api",
    "bound": "search.api",
    "sweep": "search.api",
    "Store": "search.runs.store",
}
__all__ = ["Store", "Trial", "bound", "evaluate", "plan", "sweep"]


def __getattr__(name: str) -> Any:
    """Import a public name when it is asked for, so that the command line starts fast."""
    if name not in HOMES:
        raise AttributeError(f"module 'search' has no attribute {name!r}")
    return getattr(import_module(HOMES[name]), name)
