"""The score of a plan as it is: efficiencies, variances and losses, exact or enclosed."""

from __future__ import annotations

from dataclasses import dataclass
from fractions import Fraction
from math import prod

from search.proof import aims, meetings, reference
from search.proof.information import Information
from search.proof.intervals import Interval
from search.proof.variances import Variances, variances
from search.trial.records import AimKind, Trial


@dataclass(frozen=True, slots=True)
class Truth:
    """The score of a plan as it is; variances are None where a difference cannot be told.

    `aim` is the efficiency for the aim, and for even meetings the sum of squared meetings, a whole number.
    """

    aim: Interval
    A: Interval
    D: Interval
    worst_pair_efficiency: Interval
    average_pair_variance: Interval | None
    largest_pair_variance: Interval | None
    loss_to_replication: Interval
    loss_to_blocks: Interval
    residual_df: int
    connected: bool
    exact: bool


def truth(trial: Trial, plan: Information) -> Truth:
    """The score of a plan whose counts obey the trial."""
    degrees = sum(plan.replication) - trial.b - trial.t + plan.components
    if not plan.estimable:
        nothing = Interval.exactly(0)
        lost = _replication_kept(trial, plan).less_than_one_by()
        all_ = Interval.exactly(1)
        aim = _squares(plan) if trial.aim.kind.counts_meetings else nothing
        connected = plan.components == 1
        return Truth(aim, nothing, nothing, nothing, None, None, lost, all_, degrees, connected, True)

    found = variances(plan)
    average, largest = aims.average_pair_variance(found), aims.largest_pair_variance(found)
    A = average.under(reference.least_mean_variance(trial, aims.pair_weights(trial.t)))
    D = found.determinant.times(1 / reference.best_determinant(trial)).root(trial.t - 1)
    worst = largest.under(reference.least_worst_pair(trial))
    match trial.aim.kind:
        case AimKind.ALL_PAIRS:
            aim = A
        case AimKind.OVERALL:
            aim = D
        case AimKind.WORST_PAIR:
            aim = worst
        case AimKind.EVEN_MEETINGS:
            aim = _squares(plan)
        case _:
            aim = aims.mean_variance(trial, found).under(
                reference.least_mean_variance(trial, aims.weights(trial))
            )
    return Truth(
        aim=aim,
        A=A,
        D=D,
        worst_pair_efficiency=worst,
        average_pair_variance=average,
        largest_pair_variance=largest,
        loss_to_replication=_replication_kept(trial, plan).less_than_one_by(),
        loss_to_blocks=_blocks_kept(trial, plan, found).less_than_one_by(),
        residual_df=degrees,
        connected=plan.components == 1,
        exact=found.exact,
    )


def _squares(plan: Information) -> Interval:
    return Interval.exactly(meetings.sum_of_squares(plan))


def _replication_kept(trial: Trial, plan: Information) -> Interval:
    """Efficiency of the plan's own replication without blocks, for the trial's aim.

    For even meetings, which mean nothing without blocks, that of all pairs.
    """
    if trial.aim.kind is AimKind.OVERALL:
        own = Fraction(prod(plan.replication) * trial.t, sum(plan.replication))
        return Interval.exactly(own / reference.best_determinant(trial)).root(trial.t - 1)
    if trial.aim.kind is AimKind.WORST_PAIR:
        own = reference.worst_pair_without_blocks(plan.replication)
        return Interval.exactly(reference.least_worst_pair(trial) / own)
    weights = aims.weights(trial)
    own = reference.mean_variance_without_blocks(plan.replication, weights)
    return Interval.exactly(reference.least_mean_variance(trial, weights) / own)


def _blocks_kept(trial: Trial, plan: Information, found: Variances) -> Interval:
    """Efficiency of the plan against its own replication without blocks, for the trial's aim."""
    if trial.aim.kind is AimKind.OVERALL:
        own = Fraction(prod(plan.replication) * trial.t, sum(plan.replication))
        return found.determinant.times(1 / own).root(trial.t - 1)
    if trial.aim.kind is AimKind.WORST_PAIR:
        return aims.largest_pair_variance(found).under(reference.worst_pair_without_blocks(plan.replication))
    own = reference.mean_variance_without_blocks(plan.replication, aims.weights(trial))
    return aims.mean_variance(trial, found).under(own)
