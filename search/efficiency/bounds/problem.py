"""What every bound works from, and the one way in which a bound is written down."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass
from fractions import Fraction
from typing import Any

from search.efficiency.balance import greatest_information, greatest_trace
from search.efficiency.records import Bound
from search.efficiency.reference import reference_product, reference_variance
from search.foundation.exact import power_root_above, rounded_down, rounded_up
from search.trial.limits import Limits
from search.trial.records import AimKind, Trial
from search.trial.tables import Tables, tables

VARIANCES = {
    AimKind.ALL_PAIRS: "an average pair variance",
    AimKind.WORST_PAIR: "a largest pair variance",
    AimKind.AGAINST_CONTROL: "an average variance of differences from the controls",
    AimKind.CONTRASTS: "a weighted average variance of the contrasts",
}


@dataclass(frozen=True, slots=True, eq=False)
class Problem:
    """A trial as the bounds see it.

    Parameters
    ----------
    trial, rules : the trial and its rules as arrays
    limits : the replication that all the rules together leave
    trace : the greatest `tr C` that the rules allow, n − b where nothing stands twice
    information : the same of what is scored: C, or C(γ) where blocks are random

    Where plots may stay filler, a bound holds for every plan, however many are planted.
    """

    trial: Trial
    rules: Tables
    limits: Limits
    trace: Fraction
    information: Fraction

    @property
    def m(self) -> int:
        """Number of nonzero eigenvalues of the information matrix of a connected plan."""
        return self.trial.t - 1

    @property
    def n(self) -> int:
        """The most plots that any plan has."""
        return self.limits.planted[1]

    @property
    def cap(self) -> int:
        """No eigenvalue is above this: `C ≼ R`, so the greatest replication is one."""
        return int(self.limits.most.max())


def problem(trial: Trial, limits: Limits) -> Problem | None:
    """The trial as the bounds see it; None where no plan can tell all differences, so that none has worth."""
    rules = tables(trial)
    trace = greatest_trace(rules, limits.planted[1])
    information = greatest_information(trial, rules, limits.planted[1])
    if trace is None or information is None or information <= 0 or (limits.most < 1).any():
        return None
    return Problem(trial, rules, limits, trace, information)


def bound_on_variance(
    given: Problem, argument: str, least: Fraction, multipliers: Mapping[str, Any], kind: str = ""
) -> Bound:
    """The bound of a trace aim: no plan has a mean variance below `least`.

    Parameters
    ----------
    given, argument, least : the trial, the name of the argument, what it shows
    multipliers : what the checker needs to find it again
    kind : of the certificate, where that is not the name of the argument
    """
    aim = given.trial.aim.kind
    shown = float(rounded_down(least, 10**9))
    return _bound(
        aim,
        reference_variance(given.trial) / least,
        argument,
        f"no plan that this trial admits has {VARIANCES[aim]} below {shown:.9f} plot variances",
        multipliers,
        kind or argument,
    )


def bound_on_determinant(
    given: Problem, argument: str, greatest: Fraction, multipliers: Mapping[str, Any], kind: str = ""
) -> Bound:
    """The bound of the overall aim: no plan has a pseudo-determinant above `greatest`."""
    efficiency = power_root_above(greatest / reference_product(given.trial), given.m)
    return _bound(
        AimKind.OVERALL,
        efficiency,
        argument,
        "no plan that this trial admits has an overall efficiency above "
        f"{float(rounded_up(efficiency, 10**9)):.9f}",
        multipliers,
        kind or argument,
    )


def _bound(
    aim: AimKind, exact: Fraction, argument: str, statement: str, multipliers: Mapping[str, Any], kind: str
) -> Bound:
    certificate = {"kind": kind, "statement": statement, "multipliers": dict(multipliers)}
    return Bound(aim, rounded_up(exact), argument, certificate)


def bound_on_spectrum(
    given: Problem,
    argument: str,
    spectrum: list[tuple[Fraction, int]],
    multipliers: Mapping[str, Any],
) -> Bound:
    """The bound of all pairs or overall from the best eigenvalues that any plan could have.

    Parameters
    ----------
    given : the trial
    argument : name of the argument
    spectrum : eigenvalues and how often each stands; a connected plan has no less `Σ 1/x` and no
        greater `Π x`
    multipliers : what the checker needs to find them again
    """
    if given.trial.aim.kind is AimKind.OVERALL:
        product = Fraction(1)
        for x, times in spectrum:
            product *= x**times
        return bound_on_determinant(given, argument, product, multipliers)
    inverses = sum((times / x for x, times in spectrum), Fraction(0))
    return bound_on_variance(given, argument, 2 * inverses / given.m, multipliers)


def text(x: Fraction) -> str:
    """A rational as it stands in a certificate."""
    return f"{x.numerator}/{x.denominator}"
