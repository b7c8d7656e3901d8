"""Is the bound true? Its certificate is derived again from the trial and its multipliers."""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import replace
from fractions import Fraction
from types import ModuleType
from typing import Any

from search.proof.aims import pair_weights
from search.proof.certificates import KINDS, KNOW_RANDOM_BLOCKS, OF_ANY_FILLING, exhaustion
from search.proof.certificates.case import Case
from search.proof.certificates.claims import Claim, LeastSum
from search.proof.intervals import Interval
from search.proof.parts import Part, quoted, told
from search.proof.records import Finding, Refuted
from search.proof.reference import least_mean_variance, least_worst_pair
from search.proof.score import RELATIVE
from search.trial.records import Aim, AimKind


def bounded(value: Any, case: Case, exhaust: bool = False) -> tuple[list[Finding], Fraction | None]:
    """The bound of the file, derived again from trial and multipliers.

    Parameters
    ----------
    value : the bound as the file has it, None where it claims none
    case : the trial that it speaks of
    exhaust : repeat a proof by exhaustion, instead of taking its listing on the word of the file

    Returns
    -------
    the findings, and the bound as the rational that was proved
    """
    if value is None:
        return [Finding("bound", True, "none is claimed")], None
    claims = Part.of("bound", value)
    aim = claims.text("aim")
    if aim != case.aim.value:
        raise Refuted(f"it speaks of the aim {quoted(aim)}, the trial's is {case.aim.value}")
    claims.text("argument")
    exact, value = claims.ratio("exact"), claims.number("value")
    certificate = claims.part("certificate")
    certificate.text("statement")
    claim = _derived(certificate, case)
    if not claim.supports(exact):
        raise Refuted(f"the certificate proves no more than {told(claim.derived)}, not {told(exact)}")
    counts = case.aim.counts_meetings
    if value != exact if counts else not Interval.exactly(exact).agrees(value, RELATIVE):
        raise Refuted(f"its value {told(value)} is not the exact {told(exact)}")
    what = "a sum of squared meetings below" if counts else "an efficiency above"
    trusting = certificate.text("kind") == exhaustion.KIND and not exhaust
    sentence = (
        f"no plan that this trial admits has {what} {told(exact)}; "
        f"derived again{', from what the file says of graphs' if trusting else ''}: {told(claim.derived)}"
    )
    findings = [Finding("bound", True, sentence)]
    if certificate.text("kind") == exhaustion.KIND:
        findings += _exhausted(claims, case, exact, exhaust)
    elif claims.has("otherwise"):
        raise Refuted(f"{claims.at('otherwise')} stands beside a bound that needs no other")
    return findings, exact


def _exhausted(claims: Part, case: Case, exact: Fraction, exhaust: bool) -> Iterator[Finding]:
    """What is to be said of a proof by exhaustion, and of the bound that needs none."""
    listing = exhaustion.listing_of(case, claims.part("certificate").part("multipliers"))
    if exhaust:
        from search.proof.exhaustion.repeat import repeated

        yield repeated(case, listing)
    else:
        yield Finding(
            "exhaustion",
            True,
            f"{listing.told}: not proved again here but taken on the word of the file; --exhaust repeats it",
            on_trust=True,
        )
    if claims.has("otherwise"):
        below = claims.part("otherwise")
        if below.has("otherwise") or below.part("certificate").text("kind") == exhaustion.KIND:
            raise Refuted(f"{below.where} must be a bound without exhaustion")
        findings, other = bounded(below.content, case)
        if other is None or other < exact:
            raise Refuted(f"{below.where} proves more than the exhaustion does")
        yield Finding("bound without exhaustion", True, findings[0].detail)


def _derived(certificate: Part, case: Case) -> Claim | LeastSum:
    word = certificate.text("kind")
    kind = KINDS.get(word)
    if kind is None:
        raise Refuted(f"a certificate of a kind that this version cannot check: {quoted(word)}")
    if word not in OF_ANY_FILLING and not case.rules.exact:
        raise Refuted(f"a certificate of the kind {word} says nothing of blocks that may stay partly empty")
    if case.trial.blocks_random is not None and word not in KNOW_RANDOM_BLOCKS:
        raise Refuted(f"a certificate of the kind {word} says nothing where blocks are random")
    if case.aim is AimKind.WORST_PAIR and AimKind.ALL_PAIRS in kind.AIMS:
        return _by_average(kind, certificate, case)
    if case.aim not in kind.AIMS:
        raise Refuted(f"a certificate of the kind {word} says nothing about the aim {case.aim.value}")
    claim: Claim | LeastSum = kind.derive(case, certificate.part("multipliers"))
    return claim


def _by_average(kind: ModuleType, certificate: Part, case: Case) -> Claim:
    """What a certificate for the average pair variance says of the largest, which is not below it."""
    trial = replace(case.trial, aim=Aim(AimKind.ALL_PAIRS))
    average: Claim = kind.derive(replace(case, trial=trial), certificate.part("multipliers"))
    yardsticks = least_worst_pair(trial) / least_mean_variance(trial, pair_weights(trial.t))
    return Claim(average.ratio * yardsticks)
