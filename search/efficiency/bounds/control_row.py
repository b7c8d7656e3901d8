"""All pairs and the control's own row: a control is one of the treatments whose average is bounded.

Statement. The average variance against controls is `(tr C⁺ + t·g) / (t − 1)`, g the mean of C⁺_cc over
controls; tr C⁺ is bounded by any argument for all pairs, and `C⁺_cc ≥ (1 − 1/t)² / C_cc`. Where blocks
have k plots and no treatment more than ρ, with `n₀ = 1 − 1/t`, `n₁ = ρ n₀ − m₁`, `n₂ = ρ² n₀ − 2ρ m₁ +
m₂`, `m₁ = C_cc = r(1 − 1/k)` and m₂ the least of `(C²)_cc = C_cc² + Σ λ_cj²/k²` over whole numbers of
meetings, `C⁺_cc ≥ (n₀ − w)/ρ + w/(ρ − n₂/n₁)`, `w = n₁²/n₂`, whenever n₂ < ρ n₁.

Proof. C⁺ 1 = 0, so that Σ_j v_cj = t C⁺_cc + tr C⁺. The rest is about the spectral measure of e_c, of
weight n₀ on eigenvalues from 0 to ρ (C ≼ R) and moments m₁ and m₂: Cauchy and Schwarz, and for y = ρ − e
the parabola that lies below 1/(ρ − y), meets it at 0 and touches it at y₀ = n₂/n₁ (the quadrature of
Radau). Its square has a weight above 0, so that m₂ may be taken from below.

Source. Spectral measures of a vertex: Godsil 1993 (from memory).
"""

from __future__ import annotations

from dataclasses import replace
from fractions import Fraction

from search.efficiency.bounds import first_order, meets, normalised, pairs
from search.efficiency.bounds.problem import Problem, bound_on_variance, problem
from search.efficiency.bounds.spectral import local
from search.efficiency.records import Bound
from search.efficiency.reference import reference_variance
from search.trial.records import Aim, AimKind, Trial

NAME = "all pairs and the control's own row"
SENTENCE = (
    "A control is one of the treatments: what bounds the average over all pairs bounds much of the "
    "comparisons with it, and the control's own meetings bound the rest."
)
FOR_ALL_PAIRS = (first_order, pairs, meets, normalised, local)


def applies(trial: Trial) -> bool:
    """Whether treatments are compared with controls and nothing may stand twice in a block."""
    return trial.aim.kind is AimKind.AGAINST_CONTROL and not trial.rules.twice_in_block


def find(given: Problem) -> Bound | None:
    """The bound from the best argument for all pairs; None where something may stand twice after all."""
    trial = replace(given.trial, aim=Aim(AimKind.ALL_PAIRS))
    start = problem(trial, given.limits)
    if start is None or (given.rules.high > 1).any():
        return None
    found = [bound for module in FOR_ALL_PAIRS if (bound := module.find(start)) is not None]
    best = min(found, key=lambda bound: bound.exact)
    trace = reference_variance(trial) / best.exact * given.m / 2
    controls = trial.controls
    own = sum((_own(given, c) for c in controls), Fraction(0)) / len(controls)
    certificate = {key: best.certificate[key] for key in ("kind", "multipliers")}
    return bound_on_variance(given, NAME, (trace + trial.t * own) / given.m, {"pairs": certificate})


def _own(given: Problem, c: int) -> Fraction:
    """What C⁺_cc is not below, over all numbers of plots that the control can have."""
    low, high = max(1, int(given.limits.least[c])), int(given.limits.most[c])
    return min(_with_plots(given, c, r) for r in range(low, high + 1))


def _with_plots(given: Problem, c: int, r: int) -> Fraction:
    t, sizes, rho = given.trial.t, sorted(given.rules.sizes.tolist(), reverse=True), given.cap
    weight = 1 - Fraction(1, t)
    # largest blocks keep most
    kept = sum((1 - Fraction(1, k) for k in sizes[:r]), Fraction(0))
    simple = weight**2 / kept if kept else weight / rho
    if sizes[0] != sizes[-1]:
        return simple
    k, partners = sizes[0], t - 1 - int(given.rules.apart[c].sum())
    # even meetings have the least squares
    each, over = divmod(r * (k - 1), max(partners, 1))
    squares = partners * each**2 + over * (2 * each + 1)
    first = rho * weight - kept
    second = rho**2 * weight - 2 * rho * kept + kept**2 + Fraction(squares, k * k)
    if first <= 0 or not 0 < second < rho * first:
        return simple
    part = first**2 / second
    return max(simple, (weight - part) / rho + part / (rho - second / first))
