"""What a trial can be expected to show before any search: at best, and with the first plan found."""

from __future__ import annotations

import time
from dataclasses import dataclass, replace
from math import sqrt

from search.efficiency.bounds import all_bounds
from search.efficiency.evaluator import score
from search.efficiency.precision import detectable_multiple, plot_deviation
from search.efficiency.records import Bound
from search.efficiency.reference import reference_variance
from search.trial.limits import Limits
from search.trial.records import Aim, AimKind, Contents, Trial

MOST_TREATMENTS = 500
"""Beyond, scoring a plan takes longer than a page that is read before a search may."""
BOUND_SECONDS = 4.0


@dataclass(frozen=True, slots=True)
class Prospects:
    """Expected before any search.

    Parameters
    ----------
    compared : which differences the figures speak of
    aim : the aim that `bound` and `first` are for
    bound : no plan has an efficiency above it (for even meetings: a sum of squared meetings below it), as
        far as quick arguments tell; None where none applies
    argument : the argument behind it
    first : the same of the first plan found; an efficiency is 0 where it is disconnected
    unit : of the differences
    at_best, with_first : difference that is detected with the power asked for, at best and with the first
        plan, on average over what is compared; None where nothing can be tested
    """

    compared: str
    aim: AimKind
    bound: float | None
    argument: str
    first: float
    unit: str
    at_best: float | None
    with_first: float | None


def prospects(trial: Trial, implied: Limits, first: Contents) -> Prospects | None:
    """What the trial can be expected to show; None for a trial too large to look at quickly.

    The mean pair variance of any plan is at least `reference / bound`, in units of the plot variance.

    Parameters
    ----------
    trial : the trial
    implied : what its rules leave of the replication
    first : a plan that obeys the rules
    """
    if trial.t > MOST_TREATMENTS:
        return None
    asked, compared = trial, "differences of this aim"
    if trial.aim.kind in (AimKind.ALL_PAIRS, AimKind.OVERALL, AimKind.EVEN_MEETINGS):
        # The overall aim and even meetings speak of no single difference: all pairs are told.
        trial, compared = replace(trial, aim=Aim(AimKind.ALL_PAIRS)), "pairs, on average"
    elif trial.aim.kind is AimKind.WORST_PAIR:
        compared = "the worst pair"
    bound = _quick_bound(trial, implied)
    plan = score(trial, first)
    df = implied.planted[1] - trial.b - trial.t + 1
    best = None if bound is None else float(reference_variance(trial)) / bound.value
    counted = asked.aim.kind.counts_meetings
    if counted:
        bound = _quick_bound(asked, implied)
    deviation, unit = plot_deviation(trial.precision)
    return Prospects(
        compared=compared,
        aim=asked.aim.kind if counted else trial.aim.kind,
        bound=None if bound is None else bound.value,
        argument="" if bound is None else bound.argument,
        first=score(asked, first).aim if counted else plan.aim,
        unit=unit,
        at_best=_detectable(trial, best, df, deviation),
        with_first=_detectable(trial, plan.aim_variance, plan.residual_df, deviation),
    )


def _quick_bound(trial: Trial, implied: Limits) -> Bound | None:
    started = time.monotonic()
    bounds = all_bounds(trial, implied, lambda more: time.monotonic() - started + more <= BOUND_SECONDS)
    best: Bound | None = None
    for bound in bounds:
        best = bound if bound.beats(best) else best
    return best


def _detectable(trial: Trial, variance: float | None, df: int, deviation: float) -> float | None:
    if variance is None or df < 1:
        return None
    asked = trial.precision
    return detectable_multiple(df, asked.level_percent, asked.power_percent) * deviation * sqrt(variance)
