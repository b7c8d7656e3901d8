"""Replication: no plan is better than its own replication would be without blocks.

Statement. `tr(W C⁺) ≥ min Σ W_ii / r_i` and `pdet C ≤ max Π r_i · t / n` over the replications that the
rules leave.

Proof. `C ≼ R − rr'/n`, of which `R⁻¹` is a generalised inverse and `Π r_i · t / n` the
pseudo-determinant; so is C(γ), since random blocks too only add variance. The least `Σ W_ii / r_i` with
`Σ r = n` and further sums `Σ_S r ≤ most` is not below
`Σ_i min_r [W_ii / r + μ r + Σ_{S∋i} π_S r] − μ n − Σ π_S most_S` for any price μ and any π ≥ 0. Where plots
may stay filler, n is the most that can be planted, Σ r ≤ n, and μ ≥ 0; `Π r_i / Σ r` rises with each r_i.

Source. Shah and Sinha 1989, section 1 (from memory); the prices are Lagrange's.
"""

from __future__ import annotations

from fractions import Fraction

import numpy as np

from search.efficiency.aims import exact_diagonal, is_trace
from search.efficiency.bounds.problem import Problem, bound_on_determinant, bound_on_variance, text
from search.efficiency.bounds.program import Program
from search.efficiency.bounds.second_moment import MOST_COLUMNS
from search.efficiency.bounds.sums import Sums
from search.efficiency.records import Bound
from search.efficiency.reference import best_for_product, best_for_trace, product
from search.foundation.exact import near
from search.trial.records import AimKind, Trial

NAME = "replication"
SENTENCE = (
    "No plan is better than its own replication would be on ground without blocks, and the rules "
    "limit replication."
)
Prices = tuple[Fraction, list[Fraction]]
"""The price of a plot, and that of each type of sum limit."""


def applies(trial: Trial) -> bool:
    """Whether the aim means something without blocks, and is a sum or a product over treatments there."""
    return trial.aim.kind not in (AimKind.EVEN_MEETINGS, AimKind.WORST_PAIR)


def find(given: Problem) -> Bound | None:
    """The better of the bound from the ranges alone and the one that knows the sums too."""
    least, most = given.limits.least.tolist(), given.limits.most.tolist()
    if not is_trace(given.trial):
        return bound_on_determinant(given, NAME, product(best_for_product(least, most, given.n)), {})
    diagonal, sums = exact_diagonal(given.trial), Sums.of(given)
    candidates = [_prices_of_ranges(diagonal, least, most, given.n, sums)]
    if sums.types:
        candidates.extend(_prices_with_sums(given, diagonal, sums))
    variance, (price, pi) = max((_least_variance(given, diagonal, sums, p), p) for p in candidates)
    multipliers = {"price": text(price), "sums": sums.multipliers(pi)}
    return bound_on_variance(given, NAME, variance, multipliers)


def _prices_of_ranges(
    diagonal: tuple[Fraction, ...], least: list[int], most: list[int], plots: int, sums: Sums
) -> Prices:
    """The greatest gain that one plot more would bring: the price at which the best is stable."""
    r = best_for_trace(diagonal, least, most, plots)
    gains = [w / (x * (x + 1)) for w, x, top in zip(diagonal, r, most, strict=True) if x < top]
    return max(gains, default=Fraction(0)), [Fraction(0)] * len(sums.types)


def _prices_with_sums(given: Problem, diagonal: tuple[Fraction, ...], sums: Sums) -> list[Prices]:
    """Prices from the linear program over distributions of each treatment's replication, if it is solved."""
    ranges = [
        np.arange(max(1, low), high + 1)
        for low, high in zip(given.limits.least.tolist(), given.limits.most.tolist(), strict=True)
    ]
    if sum(len(r) for r in ranges) > MOST_COLUMNS:
        return []
    program = Program()
    program.equal("plots", given.n)
    sums.add_rows(program)
    for i, r in enumerate(ranges):
        program.equal(("treatment", i), 1)
        rows = {("treatment", i): 1, "plots": r, **sums.entries(sums.memberships[i].tolist(), r)}
        program.add(float(diagonal[i]) / r, rows)
    prices = program.prices()
    if prices is None:
        return []
    price = near(-prices["plots"])
    if not given.rules.exact:
        price = max(price, Fraction(0))
    return [(price, [near(pi) for pi in sums.values(prices)])]


def _least_variance(given: Problem, diagonal: tuple[Fraction, ...], sums: Sums, prices: Prices) -> Fraction:
    """The Lagrangian at the prices, exactly."""
    price, pi = prices
    total = -price * given.n - sums.constant(pi)
    for i, w in enumerate(diagonal):
        each = price + sums.each(sums.memberships[i].tolist(), pi)
        low, high = max(1, int(given.limits.least[i])), int(given.limits.most[i])
        total += min(w / r + each * r for r in range(low, high + 1))
    return total
