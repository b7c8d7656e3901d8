"""Every number of the score, computed again and compared with what the file claims."""

from __future__ import annotations

from collections.abc import Iterator
from fractions import Fraction

from search.proof import meetings
from search.proof.certificates.case import Case
from search.proof.information import Information
from search.proof.parts import Part, quoted, told
from search.proof.records import Finding, Refuted
from search.proof.truth import Truth
from search.trial.records import AimKind

RELATIVE = Fraction(1, 10**9)
"""Efficiencies and variances of the file may differ from the truth by this part of their size."""
PERCENT = Fraction(1, 10**7)
"""Percentages of the file may differ from the truth by so many points."""


def compared(claims: Part, real: Truth, aim: AimKind) -> Iterator[Finding]:
    """The numbers of the score against the truth: a finding for each that is wrong, or one for all."""
    faults = list(_mismatches(claims, real, aim))
    for fault in faults:
        yield Finding("score", False, fault)
    if not faults:
        how = "in exact arithmetic" if real.exact else "by rigorous enclosures"
        yield Finding(
            "score",
            True,
            f"every number derived again {how} and found true to one part in 10^9; "
            f"{_measure(aim)} {told(real.aim.low)}",
        )


def _measure(aim: AimKind) -> str:
    return "sum of squared meetings" if aim.counts_meetings else "efficiency for the aim"


def _mismatches(claims: Part, real: Truth, aim: AimKind) -> Iterator[str]:
    if aim.counts_meetings:
        if (counted := claims.whole("aim")) != real.aim.low:
            yield f"the sum of squared meetings is claimed to be {counted}, but is {told(real.aim.low)}"
    elif not real.aim.agrees(claimed := claims.number("aim"), RELATIVE):
        yield f"aim is claimed to be {told(claimed)}, but is {told(real.aim.low)}"
    for key, exact in (
        ("A", real.A),
        ("D", real.D),
        ("worst_pair_efficiency", real.worst_pair_efficiency),
        ("average_pair_variance", real.average_pair_variance),
        ("largest_pair_variance", real.largest_pair_variance),
    ):
        if exact is None:
            if claims.value(key) is not None:
                yield f"{key} must be null: some difference cannot be estimated"
        elif not exact.agrees(claimed := claims.number(key), RELATIVE):
            yield f"{key} is claimed to be {told(claimed)}, but is {told(exact.low)}"
    for key, exact in (
        ("loss_to_replication_percent", real.loss_to_replication),
        ("loss_to_blocks_percent", real.loss_to_blocks),
    ):
        percent = exact.times(Fraction(100))
        if not percent.near(claimed := claims.number(key), PERCENT):
            yield f"{key} is claimed to be {told(claimed)}, but is {told(percent.low)}"
    if claims.whole("residual_df") != real.residual_df:
        yield f"residual_df must be {real.residual_df}"
    if claims.flag("connected") != real.connected:
        yield f"the plan is {'connected' if real.connected else 'disconnected'}, the file says otherwise"


def met(claims: Part, case: Case, plan: Information) -> Finding:
    """How often treatments meet, and whether that is as even as it can be."""
    least, most = meetings.blocks_shared(plan)
    if (claims.whole("least"), claims.whole("most")) != (least, most):
        raise Refuted(f"two treatments share {least} to {most} blocks, the file says otherwise")
    word = claims.text("near_balanced")
    if word == "yes":
        has, bound = meetings.sum_of_squares(plan), meetings.least_sum_of_squares(case.rules, case.implied)
        if has != bound:
            raise Refuted(
                f"near balance is not proven: the concurrences have the sum of squares {has}, "
                f"and what can be shown is only that no plan is below {bound}"
            )
    elif word == "no":
        raise Refuted("the file says that a plan nearer to balance exists, but shows none")
    elif word != "unknown":
        raise Refuted(f"near balance is yes, no or unknown, not {quoted(word)}")
    proven = {
        "yes": "as even as they can be",
        "unknown": "whether that is as even as can be is not claimed",
    }
    return Finding("meetings", True, f"two treatments share {least} to {most} blocks; {proven[word]}")
