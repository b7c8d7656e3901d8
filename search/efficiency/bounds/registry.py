"""Every argument that bounds an efficiency, in order from quick to slow. A new one is added here."""

from __future__ import annotations

import time
from collections.abc import Callable, Iterator
from dataclasses import dataclass

from search.efficiency.bounds import (
    averaged,
    control_meets,
    control_row,
    first_order,
    meets,
    normalised,
    pairs,
    replication,
    trace_root,
)
from search.efficiency.bounds.problem import Problem, problem
from search.efficiency.bounds.spectral import local
from search.efficiency.records import Bound
from search.trial.limits import Limits
from search.trial.records import Trial

QUICK = 0.1
"""Seconds that every caller has."""


@dataclass(frozen=True, slots=True)
class Argument:
    """One argument.

    Parameters
    ----------
    name : as it stands in a certificate
    sentence : the argument for a planner
    applies : whether it holds for a trial at all
    find : its bound, or None where it has none to give
    seconds : what it takes in a large trial, about
    """

    name: str
    sentence: str
    applies: Callable[[Trial], bool]
    find: Callable[[Problem], Bound | None]
    seconds: float = QUICK


@dataclass(frozen=True, slots=True)
class Tried:
    """An argument that applies, what it gave, and how long that took."""

    argument: Argument
    bound: Bound | None
    seconds: float


ARGUMENTS = (
    *(
        Argument(module.NAME, module.SENTENCE, module.applies, module.find)
        for module in (first_order, replication, trace_root, pairs, meets)
    ),
    Argument(averaged.NAME, averaged.SENTENCE, averaged.applies, averaged.find, 1.0),
    Argument(control_meets.NAME, control_meets.SENTENCE, control_meets.applies, control_meets.find, 1.0),
    Argument(control_row.NAME, control_row.SENTENCE, control_row.applies, control_row.find, 2.0),
    Argument(normalised.NAME, normalised.SENTENCE, normalised.applies, normalised.find, 1.0),
    Argument(local.NAME, local.SENTENCE, local.applies, local.find, 1.0),
    Argument(local.FINER, local.FINER_SENTENCE, local.applies, local.find_finer, 5.0),
)


def tried(
    trial: Trial, limits: Limits, has_time: Callable[[float], bool] = lambda seconds: True
) -> Iterator[Tried]:
    """Every argument that applies, each tried when it is asked for, the quick ones first.

    Parameters
    ----------
    trial : the trial
    limits : the replication that its rules leave, from `search.trial.limits`
    has_time : whether there are so many seconds left; arguments that take longer are left out
    """
    given = problem(trial, limits)
    if given is None:
        return
    for argument in ARGUMENTS:
        if argument.applies(trial) and (argument.seconds <= QUICK or has_time(argument.seconds)):
            start = time.perf_counter()
            bound = argument.find(given)
            # an argument too weak to say anything may end above 1
            if bound is not None and bound.exact > 1:
                bound = None
            yield Tried(argument, bound, time.perf_counter() - start)


def all_bounds(
    trial: Trial, limits: Limits, has_time: Callable[[float], bool] = lambda seconds: True
) -> Iterator[Bound]:
    """One bound after another, each computed when it is asked for, the quick ones first; see `tried`."""
    for one in tried(trial, limits, has_time):
        if one.bound is not None:
            yield one.bound


def best_bound(trial: Trial, limits: Limits) -> Bound | None:
    """The lowest bound of all that apply, the simplest argument on ties; None where there is none."""
    return min(all_bounds(trial, limits), key=lambda bound: bound.exact, default=None)
