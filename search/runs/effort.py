"""How long the search of a trial will take, roughly: for the order of rows, and for the time left."""

from __future__ import annotations

from search.foundation.stopping import Limits
from search.trial.records import Trial

MOVE_SECONDS, MOVE_SECONDS_PER_PAIR = 0.7e-6, 5e-10
"""Of one move: a part for any trial, and one for each of t² pairs of treatments."""
READY_SECONDS_PER_PAIR = 1e-4
"""Of first plans and scores before the search."""
BOUND_SECONDS, BOUND_SECONDS_PER_TREATMENT, MOST_BOUND_SECONDS = 0.5, 0.05, 4.0


def seconds_of(trial: Trial, limits: Limits) -> float:
    """Estimated seconds of a search by one worker; only their order and their ratios mean something.

    Measured on equal blocks from 6 to 150 treatments, right within a factor of three there. A search that
    meets its bound ends earlier, which nobody knows before.

    Parameters
    ----------
    trial : the trial
    limits : how far it is searched
    """
    pairs = trial.t**2
    search = []
    if limits.seconds is not None:
        search.append(limits.seconds)
    if limits.moves is not None:
        search.append(limits.moves * (MOVE_SECONDS + MOVE_SECONDS_PER_PAIR * pairs))
    bounds = min(MOST_BOUND_SECONDS, BOUND_SECONDS + BOUND_SECONDS_PER_TREATMENT * trial.t)
    if limits.seconds is not None:
        bounds = min(bounds, limits.seconds)  # found while the search goes on, for the most part
    return min(search, default=0.0) + READY_SECONDS_PER_PAIR * pairs + bounds
