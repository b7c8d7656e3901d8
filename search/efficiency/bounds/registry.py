"""Every argument that bounds an efficiency, in order from quick to slow. A new one is added here."""

from __future__ import annotations

import time
from collections.abc import Callable, Iterator
from dataclasses import dataclass, replace

from search.efficiency.bounds import (
    averaged,
    control_meets,
    control_row,
    even_pairs,
    first_order,
    meets,
    normalised,
    pairs,
    replication,
    trace_root,
    worst_pair,
)
from search.efficiency.bounds.problem import Problem, problem
from search.efficiency.bounds.spectral import local
from search.efficiency.records import Bound
from search.trial.limits import Limits
from search.trial.records import AimKind, Trial
from search.trial.settled import settled

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
    any_filling : whether it also holds where plots of a block may stay filler
    knows_random_blocks : whether it also holds where what block totals tell is counted
    """

    name: str
    sentence: str
    applies: Callable[[Trial], bool]
    find: Callable[[Problem], Bound | None]
    seconds: float = QUICK
    any_filling: bool = False
    knows_random_blocks: bool = False

    def speaks_of(self, trial: Trial) -> bool:
        """Whether it holds for a trial at all."""
        if trial.may_be_emptier and not self.any_filling:
            return False
        return (trial.blocks_random is None or self.knows_random_blocks) and self.applies(trial)


@dataclass(frozen=True, slots=True)
class Tried:
    """An argument that applies, what it gave, and how long that took."""

    argument: Argument
    bound: Bound | None
    seconds: float


ARGUMENTS = (
    *(
        Argument(
            module.NAME,
            module.SENTENCE,
            module.applies,
            module.find,
            any_filling=True,
            knows_random_blocks=True,
        )
        for module in (first_order, replication, trace_root)
    ),
    *(
        Argument(module.NAME, module.SENTENCE, module.applies, module.find, knows_random_blocks=True)
        for module in (even_pairs, pairs, meets)
    ),
    Argument(
        meets.EVEN,
        meets.SENTENCE,
        meets.applies_to_meetings,
        meets.find_for_meetings,
        knows_random_blocks=True,
    ),
    Argument(worst_pair.NAME, worst_pair.SENTENCE, worst_pair.applies, worst_pair.find),
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

    Where counting settles how many plots of each block are planted, the blocks are taken as exact.

    Parameters
    ----------
    trial : the trial
    limits : the replication that its rules leave, from `search.trial.limits`
    has_time : whether there are so many seconds left; arguments that take longer are left out
    """
    trial, limits = settled(trial, limits)
    given = problem(trial, limits)
    if given is None:
        return
    alike = given
    if trial.aim.kind is AimKind.WORST_PAIR:  # which is not below the average
        alike = replace(given, trial=worst_pair.of_average(trial))
    for argument in ARGUMENTS:
        its = given if argument.speaks_of(trial) else alike
        if argument.speaks_of(its.trial) and (argument.seconds <= QUICK or has_time(argument.seconds)):
            start = time.perf_counter()
            bound = argument.find(its)
            if bound is not None and its is not given:
                bound = worst_pair.by_average(trial, bound)
            # an argument too weak to say anything may end above 1
            if bound is not None and bound.exact > 1 and not trial.aim.kind.counts_meetings:
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
    """The tightest bound of all that apply, the simplest argument on ties; None where there is none."""
    best: Bound | None = None
    for bound in all_bounds(trial, limits):
        best = bound if bound.beats(best) else best
    return best
