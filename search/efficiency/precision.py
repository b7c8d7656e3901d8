"""What a plan's variances mean in the field: standard errors and differences that can be found."""

from __future__ import annotations

from dataclasses import dataclass
from math import exp, pi, sqrt

from search.efficiency.records import Score
from search.efficiency.reference import reference_variance
from search.trial.records import Precision, Trial

FAR = 9.5
"""No standard normal value lies beyond, but for two in 10²¹."""
IN_DEVIATIONS = "plot standard deviations"


@dataclass(frozen=True, slots=True)
class Detectable:
    """What one kind of difference can tell, in the unit of the trial (or in percent of the mean).

    Parameters
    ----------
    standard_error : standard error of the difference
    least_significant : the least observed difference that is significant at the level
    detectable : the true difference that is found significant with the power asked for
    power_percent : the power at the difference that the trial names, where it names one
    """

    standard_error: float
    least_significant: float
    detectable: float
    power_percent: float | None = None


@dataclass(frozen=True, slots=True)
class Expected:
    """What a plan is expected to show; `unit` is "% of the mean" where no mean is known."""

    unit: str
    plot_standard_deviation: float
    residual_df: int
    average_pair: Detectable
    worst_pair: Detectable


@dataclass(frozen=True, slots=True)
class BreakEven:
    """When blocks pay: they must cut the plot variance by more than `variance_cut_percent`.

    Parameters
    ----------
    variance_cut_percent : the loss to blocks
    residual_df : residual degrees of freedom of the plan
    residual_df_without_blocks : those of the same replication without blocks
    """

    variance_cut_percent: float
    residual_df: int
    residual_df_without_blocks: int


def plot_deviation(asked: Precision) -> tuple[float, str]:
    """Standard deviation between plots of a block and its unit; 1 where the trial says nothing of it.

    Parameters
    ----------
    asked : what the trial says of its field
    """
    if asked.cv_percent is None:
        return 1.0, IN_DEVIATIONS
    if asked.mean is None:
        return asked.cv_percent, "% of the mean"
    return asked.cv_percent / 100 * asked.mean, asked.unit


def standard_error(variance: float, plot_standard_deviation: float) -> float:
    """Standard error of a difference: `s √v` for a pair variance v in units of the plot variance."""
    return plot_standard_deviation * sqrt(variance)


def least_significant_multiple(df: int, level_percent: float = 5.0) -> float:
    """Standard errors that an observed difference needs to be significant, two-sided."""
    from scipy.stats import t as student

    return float(student.ppf(1 - level_percent / 200, df))


def power(multiple: float, df: int, level_percent: float = 5.0) -> float:
    """Chance that a true difference of so many standard errors is found significant, two-sided.

    The test statistic is noncentral t, (Z + m) / S with m the multiple and S² a mean square over its
    expectation; so the power is `∫ φ(z) P(S < |z + m| / critical) dz`. Done as this integral, because
    library routines for noncentral t give nothing for few degrees of freedom or large multiples.
    """
    from scipy.integrate import quad
    from scipy.special import chdtr

    critical = least_significant_multiple(df, level_percent)

    def at(z: float) -> float:
        return exp(-z * z / 2) * float(chdtr(df, df * ((z + multiple) / critical) ** 2))

    turns = [z for z in (-multiple - critical, -multiple, -multiple + critical) if abs(z) < FAR]
    value, _ = quad(at, -FAR, FAR, points=turns or None, limit=200, epsabs=1e-12)
    return min(1.0, float(value) / sqrt(2 * pi))


def detectable_multiple(df: int, level_percent: float = 5.0, power_percent: float = 80.0) -> float:
    """Standard errors that a true difference needs to be found with the power asked for.

    Parameters
    ----------
    df : residual degrees of freedom, at least 1
    level_percent : two-sided level of the test
    power_percent : chance of finding the difference, above the level and below 100

    Raises
    ------
    ValueError : no degrees of freedom, or a power that any difference (or none) has
    """
    from scipy.optimize import brentq

    if df < 1:
        raise ValueError("no residual degrees of freedom: nothing can be tested")
    if not 0 < level_percent < power_percent < 100:
        raise ValueError("the power must lie above the level and below 100%")
    wanted = power_percent / 100
    above = 1.0
    while power(above, df, level_percent) < wanted:
        above *= 2
    return float(brentq(lambda m: power(m, df, level_percent) - wanted, 0, above, xtol=1e-10))


def expected(trial: Trial, plan: Score) -> Expected | None:
    """Standard errors and detectable differences of a plan, for the average and the worst pair.

    Returns None where the trial says nothing about the variation between plots, where the plan is
    disconnected, or where no residual degrees of freedom are left.
    """
    return expected_of(
        trial.precision, plan.average_pair_variance, plan.largest_pair_variance, plan.residual_df
    )


def expected_of(asked: Precision, average: float | None, largest: float | None, df: int) -> Expected | None:
    """The same from the figures of a plan file.

    Parameters
    ----------
    asked : what the trial says of its field
    average, largest : average and largest pair variance in units of the plot variance
    df : residual degrees of freedom
    """
    if asked.cv_percent is None or average is None or largest is None or df < 1:
        return None
    mean = 100.0 if asked.mean is None else asked.mean
    deviation = asked.cv_percent / 100 * mean
    return Expected(
        unit="% of the mean" if asked.mean is None else asked.unit,
        plot_standard_deviation=deviation,
        residual_df=df,
        average_pair=_detectable(standard_error(average, deviation), df, asked),
        worst_pair=_detectable(standard_error(largest, deviation), df, asked),
    )


def expected_for_aim(trial: Trial, efficiency: float, df: int) -> Detectable | None:
    """The same for the differences that the aim speaks of, where it does not treat all pairs alike.

    Parameters
    ----------
    trial : the trial
    efficiency : of the plan, for the trial's aim: its mean variance is the reference's over it
    df : residual degrees of freedom
    """
    if trial.aim.kind.treats_pairs_alike or efficiency <= 0:
        return None
    variance = float(reference_variance(trial)) / efficiency
    found = expected_of(trial.precision, variance, variance, df)
    return None if found is None else found.average_pair


def _detectable(error: float, df: int, asked: Precision) -> Detectable:
    level = asked.level_percent
    return Detectable(
        standard_error=error,
        least_significant=error * least_significant_multiple(df, level),
        detectable=error * detectable_multiple(df, level, asked.power_percent),
        power_percent=None
        if asked.difference is None
        else 100 * power(abs(asked.difference) / error, df, level),
    )


def break_even(trial: Trial, plan: Score) -> BreakEven:
    """When the plan beats its own replication without blocks.

    The mean variance is `σ² f` with blocks and `σ₀² f₀` without, and `f₀ / f = 1 − loss to blocks`,
    so blocks win when `σ² / σ₀² < 1 − loss`.
    """
    return BreakEven(
        variance_cut_percent=plan.loss_to_blocks_percent,
        residual_df=plan.residual_df,
        # A connected plan loses b − 1 of them to blocks, however many plots are filler.
        residual_df_without_blocks=plan.residual_df + trial.b - 1 if plan.connected else trial.n - trial.t,
    )
