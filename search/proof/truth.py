"""The score of a plan as it is: efficiencies, variances and losses, exact or enclosed."""

from __future__ import annotations

from dataclasses import dataclass
from fractions import Fraction
from math import prod

from search.proof import aims, reference
from search.proof.information import Information
from search.proof.intervals import Interval
from search.proof.variances import Variances, variances
from search.trial.records import AimKind, Trial


@dataclass(frozen=True, slots=True)
class Truth:
    """The score of a plan as it is; variances are None where a difference cannot be estimated."""

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
    degrees = trial.n - trial.b - trial.t + plan.components
    if not plan.estimable:
        nothing = Interval.exactly(0)
        lost = _replication_kept(trial, plan).less_than_one_by()
        all_ = Interval.exactly(1)
        connected = plan.components == 1
        return Truth(nothing, nothing, nothing, nothing, None, None, lost, all_, degrees, connected, True)

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


def _replication_kept(trial: Trial, plan: Information) -> Interval:
    """Efficiency of the plan's own replication without blocks, for the trial's aim."""
    if trial.aim.kind is AimKind.OVERALL:
        own = Fraction(prod(plan.replication) * trial.t, trial.n)
        return Interval.exactly(own / reference.best_determinant(trial)).root(trial.t - 1)
    weights = aims.weights(trial)
    own = reference.mean_variance_without_blocks(plan.replication, weights)
    return Interval.exactly(reference.least_mean_variance(trial, weights) / own)


def _blocks_kept(trial: Trial, plan: Information, found: Variances) -> Interval:
    """Efficiency of the plan against its own replication without blocks, for the trial's aim."""
    if trial.aim.kind is AimKind.OVERALL:
        own = Fraction(prod(plan.replication) * trial.t, trial.n)
        return found.determinant.times(1 / own).root(trial.t - 1)
    own = reference.mean_variance_without_blocks(plan.replication, aims.weights(trial))
    return aims.mean_variance(trial, found).under(own)
