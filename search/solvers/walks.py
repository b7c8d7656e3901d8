"""Which walk serves which goal."""

from __future__ import annotations

import numpy as np
from numpy.typing import NDArray

from search.foundation.stopping import Stop
from search.solvers.even_walk import EvenWalk
from search.solvers.records import Goal, Problem
from search.solvers.walk import Report, Walk, quiet
from search.solvers.worst_walk import WorstWalk
from search.trial.records import Contents

WALKS: dict[Goal, type[Walk]] = {Goal.SPREAD: Walk, Goal.MEETINGS: EvenWalk, Goal.WORST: WorstWalk}


def walk_from(
    problem: Problem, start: Contents, random: NDArray[np.uint64], stop: Stop, report: Report = quiet
) -> Walk:
    """A walk from a connected plan, of the kind that the goal of the problem asks for; see `Walk`."""
    return WALKS[problem.goal](problem, start, random, stop, report)
