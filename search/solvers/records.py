"""What a search is given, and what it hands on."""

from __future__ import annotations

from dataclasses import dataclass
from fractions import Fraction

import numpy as np
from numpy.typing import NDArray

from search.foundation.stopping import Ended
from search.trial.records import Contents
from search.trial.tables import Tables

Floats = NDArray[np.float64]


@dataclass(frozen=True, slots=True, eq=False)
class Problem:
    """The rules of a trial as arrays, and its aim.

    Parameters
    ----------
    tables : the rules; `least` and `most` are what all the rules leave of the stated ranges
    weights : (t, t) W of a trace aim `tr(W C⁺)`, or None for the overall aim `−log pdet(C)/(t−1)`
    blocks_random : block variance over plot variance; None where blocks are fixed
    """

    tables: Tables
    weights: Floats | None
    blocks_random: Fraction | None = None


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
