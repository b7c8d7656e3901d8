"""Gap and standing: how far the plan is from the best possible, in the words that the file may use."""

from __future__ import annotations

from fractions import Fraction

from search.proof.certificates.case import Case
from search.proof.information import Information
from search.proof.intervals import Interval
from search.proof.parts import Part, quoted, told
from search.proof.records import Finding, Refuted
from search.proof.score import PERCENT
from search.proof.truth import Truth
from search.trial.records import AimKind

PROVEN = Fraction(1, 10**6)
"""A gap of at most this part counts as proven optimal."""


def gap_told(file: Part, case: Case, real: Truth, bound: Fraction | None) -> Finding:
    """gap_percent = 100 (1 − efficiency/bound), or 100 (sum/bound − 1) of meetings; null without a bound.

    Parameters
    ----------
    file : the plan file
    case : the trial that it speaks of
    real : the score as it is
    bound : what was proved, None without a bound
    """
    if not bound:
        if file.value("gap_percent") is not None:
            raise Refuted("gap_percent must be null where there is no bound")
        return Finding("gap", True, "none is told, for there is no bound")
    percent = _gap(case, real, bound).times(Fraction(100))
    claimed = file.number("gap_percent")
    if not percent.near(claimed, PERCENT):
        raise Refuted(f"gap_percent is claimed to be {told(claimed)}, but is {told(percent.high)}")
    short = float(max(percent.high, Fraction(0)))
    return Finding("gap", True, f"the plan comes within {short:.4g} per cent of its bound")


def standing_told(file: Part, case: Case, plan: Information, real: Truth, bound: Fraction | None) -> Finding:
    """The file's word for how good the plan is known to be, neither more nor less than is proved."""
    word = file.text("standing")
    possible = _standings(case, plan, real, bound)
    if word not in possible:
        raise Refuted(f"what is proved makes the plan {possible[0]}, not {quoted(word)}")
    return Finding("standing", True, _MEANING[word])


_MEANING = {
    "balanced": "balanced: all pairs are compared alike, and no plan compares them better",
    "proven optimal": "proven optimal: no plan is better by more than one part in a million",
    "bounded": "bounded: a better plan may exist, by no more than the gap",
    "feasible": "feasible: the plan obeys the rules, and nothing more is claimed",
}


def is_balanced(case: Case, plan: Information) -> bool:
    """Whether C is completely symmetric with the greatest trace, for an aim that treats pairs alike.

    No plan has then a smaller average variance, and none a smaller largest one. Meetings of blocks of unlike
    sizes need not be even for that: whether they are is asked of the bound.
    """
    alike = case.aim not in (AimKind.AGAINST_CONTROL, AimKind.CONTRASTS)
    trace = Fraction(plan.trace_scaled, plan.scale)
    return alike and plan.completely_symmetric and trace == case.greatest_trace


def _standings(case: Case, plan: Information, real: Truth, bound: Fraction | None) -> tuple[str, ...]:
    """The words that hold; two only where an enclosure cannot tell a gap from one in a million."""
    if not bound or real.average_pair_variance is None:
        return ("feasible",)
    gap = _gap(case, real, bound)
    if is_balanced(case, plan) and (gap.high <= 0 or not case.aim.counts_meetings):
        return ("balanced",)
    proven = ("proven optimal",) if gap.low <= PROVEN else ()
    return proven + (("bounded",) if gap.high > PROVEN else ())


def _gap(case: Case, real: Truth, bound: Fraction) -> Interval:
    if case.aim.counts_meetings:
        return Interval.exactly(real.aim.low / bound - 1)
    return real.aim.times(1 / bound).less_than_one_by()
