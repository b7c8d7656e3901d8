"""What a search is given, and what it hands on."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from search.foundation.stopping import Ended
from search.trial.records import Contents
from search.trial.tables import Tables

PROVER = "proof by exhaustion"
"""Where a plan comes from that such a proof came upon."""

Floats = NDArray[np.float64]


@dataclass(frozen=True, slots=True, eq=False)
class Problem:
    """The rules of a trial as arrays, and its aim.

    Parameters
    ----------
    tables : the rules; `least` and `most` are what all the rules leave of the stated ranges
    weights : (t, t) W of a trace aim `tr(W C⁺)`, or None for the overall aim `−log pdet(C)/(t−1)`
    """

    tables: Tables
    weights: Floats | None


@dataclass(frozen=True, slots=True)
class Outcome:
    """The best plan of a search.

    Parameters
    ----------
    contents : block contents
    objective : the aim's objective, the smaller the better; inf for a disconnected plan
    moves : moves scored in all runs together
    seconds : wall time of the search
    ended : what brought it to its end
    run : number of the run that found the plan, -1 for a plan that the search was given
    start : what that run started from
    """

    contents: Contents
    objective: float
    moves: int
    seconds: float
    ended: Ended
    run: int
    start: str
