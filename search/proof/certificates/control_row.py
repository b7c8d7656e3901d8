"""Kind "all pairs and the control's own row": a certificate for all pairs, and one row of C."""

from __future__ import annotations

from dataclasses import replace
from fractions import Fraction
from types import ModuleType

from search.proof.aims import pair_weights
from search.proof.certificates import by_meets, by_pairs, first_order, local_spectral, normalised
from search.proof.certificates.case import Case
from search.proof.certificates.claims import Claim, claim_of_variance
from search.proof.certificates.multipliers import known
from search.proof.parts import Part
from search.proof.records import Refuted
from search.proof.reference import least_mean_variance
from search.trial.records import Aim, AimKind

AIMS = (AimKind.AGAINST_CONTROL,)
FOR_ALL_PAIRS: dict[str, ModuleType] = {
    "first order": first_order,
    "second moment by pairs": by_pairs,
    "second moment by block meets": by_meets,
    "normalised moment": normalised,
    "local spectral": local_spectral,
}


def derive(case: Case, multipliers: Part) -> Claim:
    """Σ_j v_cj = tr C⁺ + t·C⁺_cc, as the rows of C⁺ add up to 0; both from below."""
    if not case.nothing_twice:
        raise Refuted("this kind of certificate is for trials in which nothing stands twice in a block")
    known(multipliers, ("pairs",))
    inner = multipliers.part("pairs")
    kind = FOR_ALL_PAIRS.get(inner.text("kind"))
    if kind is None or inner.content.keys() - {"kind", "multipliers"}:
        raise Refuted(f"{inner.where} is no certificate for all pairs")
    trial = replace(case.trial, aim=Aim(AimKind.ALL_PAIRS))
    claim: Claim = kind.derive(replace(case, trial=trial), inner.part("multipliers"))
    if claim.ratio <= 0 or claim.power != 1:
        raise Refuted(f"{inner.where} says nothing of tr C⁺")
    t, controls = trial.t, trial.controls
    # the average over pairs is 2 tr C⁺/(t − 1)
    trace = least_mean_variance(trial, pair_weights(t)) / claim.ratio * case.rank / 2
    own = sum((_own(case, c) for c in controls), Fraction(0)) / len(controls)
    return claim_of_variance(case, (trace + t * own) / case.rank)


def _own(case: Case, c: int) -> Fraction:
    low, high = max(1, case.least[c]), case.most[c]
    if low > high:
        raise Refuted("the rules leave a control no number of plots")
    return min(_with_plots(case, c, r) for r in range(low, high + 1))


def _with_plots(case: Case, c: int, r: int) -> Fraction:
    """What C⁺_cc is not below where c has r plots.

    e_c has the weight 1 − 1/t outside the vector of ones; in the eigenvalues e of C its first moment is C_cc,
    its second (C²)_cc. With a parabola h(e) below 1/e up to ρ, C⁺_cc ≥ h₀(1 − 1/t) + h₁C_cc + h₂(C²)_cc.
    """
    rules = case.rules
    sizes = sorted((int(k) for k in rules.sizes), reverse=True)
    weight = Fraction(case.rank, case.trial.t)
    diagonal = r - sum((Fraction(1, k) for k in sizes[:r]), Fraction(0))
    cap = max(case.most)
    found = [weight / cap] if diagonal <= 0 else [weight * weight / diagonal]
    if len(set(sizes)) == 1 and diagonal > 0:
        k = sizes[0]
        may_meet = [j for j in range(case.trial.t) if j != c and not rules.apart[c, j]]
        meetings, squares = r * (k - 1), 0
        for left in range(len(may_meet), 0, -1):
            # one partner after another takes its even share of what is left
            own = meetings // left
            meetings, squares = meetings - own, squares + own * own
        of_square = diagonal * diagonal + Fraction(squares, k * k)
        touch = _touching(weight, diagonal, of_square, cap)
        if touch is not None:
            # h = 1/e − (e − touch)²(cap − e)/(e·touch²·cap), by its coefficients
            h0 = 2 / touch + Fraction(1) / cap
            h1 = -1 / touch**2 - 2 / (touch * cap)
            h2 = 1 / (touch**2 * cap)
            found.append(h0 * weight + h1 * diagonal + h2 * of_square)
    return max(found)


def _touching(weight: Fraction, first: Fraction, second: Fraction, cap: int) -> Fraction | None:
    """Where the best parabola through (cap, 1/cap) touches 1/e; any place above 0 is allowed."""
    below = cap * weight - first
    if below <= 0:
        return None
    place = cap - (cap * cap * weight - 2 * cap * first + second) / below
    return place if place > 0 else None
