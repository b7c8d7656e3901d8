"""What a row's plan is expected to show in the field, and what a planner should be warned of."""

from __future__ import annotations

from collections import Counter
from collections.abc import Iterator
from dataclasses import dataclass
from functools import lru_cache

from search.efficiency.precision import detectable_multiple, plot_deviation, standard_error
from search.runs.cautions import ENOUGH_DF, MANY_PLOTS
from search.runs.plan import Plan
from search.trial.records import AimKind

WIDE_GAP_PERCENT = 1.0
COMPARED = {
    AimKind.AGAINST_CONTROL: "differences from the control",
    AimKind.CONTRASTS: "contrasts of the aim",
}
"""Which differences the figures speak of; of pairs on average under every other aim."""


@dataclass(frozen=True, slots=True)
class Shows:
    """Differences that a plan can tell.

    Parameters
    ----------
    compared : which differences the first two figures speak of
    unit : of all figures
    standard_error : expected, of a difference, on average
    detectable : true difference that is found with the power asked for; None without residual degrees of
        freedom
    standard_error_worst_pair, detectable_worst_pair : the same for the pair that compares worst
    """

    compared: str
    unit: str
    standard_error: float
    detectable: float | None
    standard_error_worst_pair: float
    detectable_worst_pair: float | None


@dataclass(frozen=True, slots=True)
class Flag:
    """A warning about a plan: in two or three words, and in a sentence."""

    short: str
    told: str


def shows(plan: Plan) -> Shows | None:
    """What a plan is expected to show; None where it is disconnected.

    The trial's `precision` gives variation, level and power. Where it names no variation, all figures are in
    standard deviations between plots.
    """
    aim, found = plan.trial.aim.kind, plan.score
    variance = found.aim_variance if aim in COMPARED else found.average_pair_variance
    if variance is None or found.largest_pair_variance is None:
        return None
    deviation, unit = plot_deviation(plan.trial.precision)
    asked, df = plan.trial.precision, found.residual_df
    multiple = _multiple(df, asked.level_percent, asked.power_percent) if df > 0 else None
    mean = standard_error(variance, deviation)
    worst = standard_error(found.largest_pair_variance, deviation)
    return Shows(
        compared=COMPARED.get(aim, "pairs, on average"),
        unit=unit,
        standard_error=mean,
        detectable=None if multiple is None else multiple * mean,
        standard_error_worst_pair=worst,
        detectable_worst_pair=None if multiple is None else multiple * worst,
    )


@lru_cache(maxsize=4096)
def _multiple(df: int, level_percent: float, power_percent: float) -> float:
    """Rows of a sweep share their degrees of freedom, and each takes an integral many times over."""
    return detectable_multiple(df, level_percent, power_percent)


def plots_of(plan: Plan) -> list[int]:
    """Plots of each treatment."""
    counted = Counter(i for block in plan.contents for i in block)
    return [counted[i] for i in range(plan.trial.t)]


def flags(plan: Plan) -> tuple[Flag, ...]:
    """What a planner should be warned of before choosing a plan."""
    return tuple(_flags(plan))


def _flags(plan: Plan) -> Iterator[Flag]:
    trial, found, gap = plan.trial, plan.score, plan.gap_percent
    if not found.connected:
        yield Flag("disconnected", "Not every difference between treatments can be estimated.")
    if found.residual_df < ENOUGH_DF:
        yield Flag(
            f"{found.residual_df} df",
            f"{found.residual_df} residual degrees of freedom: fewer than the {ENOUGH_DF} that EPPO standard "
            "PP 1/152 asks of efficacy trials, a good habit elsewhere.",
        )
    if gap is not None and found.connected and gap > WIDE_GAP_PERCENT:
        yield Flag(
            f"gap over {WIDE_GAP_PERCENT:g} %",
            f"The gap is {gap:.2f} %: a longer search may find a better plan, or the bound may be loose.",
        )
    if plan.bound is None:
        yield Flag("no bound", "How much better another plan could be is not known.")
    plots = plots_of(plan)
    alone = plots.count(1)
    if alone:
        names = f"{alone} treatments stand" if alone > 1 else "One treatment stands"
        yield Flag("one plot only", f"{names} on one plot only: one lost plot loses the treatment.")
    if trial.aim.kind is AimKind.AGAINST_CONTROL:
        rest = [plots[i] for i in range(trial.t) if i not in trial.controls]
        if rest and min(plots[i] for i in trial.controls) < sum(rest) / len(rest):
            yield Flag(
                "control short of plots",
                "A control has fewer plots than the others on average, though all are compared with it.",
            )
    largest = max(block.plots for block in trial.blocks)
    if largest > MANY_PLOTS:
        yield Flag(
            f"blocks over {MANY_PLOTS} plots",
            f"The largest block has {largest} plots: soil is seldom even over so wide a block.",
        )
