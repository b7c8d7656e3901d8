"""What a search is given, and what it hands on."""

from __future__ import annotations

from dataclasses import dataclass
from enum import StrEnum
from fractions import Fraction

import numpy as np
from numpy.typing import NDArray

from search.efficiency.aims import pair_weights, weights
from search.foundation.stopping import Ended
from search.trial.records import AimKind, Contents, Trial
from search.trial.tables import Tables

PROVER = "proof by exhaustion"
"""Where a plan comes from that such a proof came upon."""

Floats = NDArray[np.float64]


class Goal(StrEnum):
    """What the search makes small."""

    SPREAD = "spread"
    """The mean variance `tr(W C⁺)` of the weights, or `−log pdet(C)/(t−1)` where there are none."""
    MEETINGS = "meetings"
    """The sum of squared meetings, and among equals the mean variance of the weights."""
    WORST = "worst"
    """The largest pair variance; the mean variance of the weights leads the way there."""


@dataclass(frozen=True, slots=True, eq=False)
class Problem:
    """The rules of a trial as arrays, and its aim.

    Parameters
    ----------
    tables : the rules; `least` and `most` are what all the rules leave of the stated ranges
    weights : (t, t) W of a mean variance `tr(W C⁺)`, or None for the overall aim `−log pdet(C)/(t−1)`
    goal : what is made small
    filler : how many of the treatments, the last ones, are only filler (`search.solvers.filler`)
    blocks_random : block variance over plot variance; None where blocks are fixed
    """

    tables: Tables
    weights: Floats | None
    goal: Goal = Goal.SPREAD
    filler: int = 0
    blocks_random: Fraction | None = None


def goal_of(aim: AimKind) -> Goal:
    """What the search makes small for an aim."""
    return {AimKind.EVEN_MEETINGS: Goal.MEETINGS, AimKind.WORST_PAIR: Goal.WORST}.get(aim, Goal.SPREAD)


def problem_of(trial: Trial, rules: Tables, filler: int = 0) -> Problem:
    """The problem of a trial.

    Parameters
    ----------
    trial : gives the aim
    rules : its tables, with the implied replication
    filler : how many of their treatments, the last ones, are only filler
    """
    goal = goal_of(trial.aim.kind)
    matrix = weights(trial) if goal is Goal.SPREAD else pair_weights(trial.t)
    if matrix is not None:
        matrix = np.pad(matrix, (0, filler))
    return Problem(rules, matrix, goal, filler, trial.blocks_random)


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
