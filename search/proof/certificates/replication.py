"""Kind "replication": no plan is better than its own replication without blocks."""

from __future__ import annotations

from fractions import Fraction
from math import isqrt

from search.proof.aims import weights
from search.proof.certificates.case import Case
from search.proof.certificates.claims import Claim, claim_of_determinant, claim_of_variance
from search.proof.certificates.multipliers import known, sum_prices
from search.proof.parts import Part
from search.proof.records import Refuted
from search.proof.reference import greatest_product
from search.trial.records import AimKind

AIMS = (AimKind.ALL_PAIRS, AimKind.OVERALL, AimKind.AGAINST_CONTROL, AimKind.CONTRASTS)


def derive(case: Case, multipliers: Part) -> Claim:
    """C ≼ R − rr'/n, so tr(WC⁺) ≥ Σ W_ii/r_i, and the product of eigenvalues is at most Π r_i · t/n.

    The least of Σ W_ii/r_i under Σ r_i = n is not below Σ_i min_r (W_ii/r + μ r) − μ n for any price μ; under
    Σ r_i ≤ n, where plots may stay filler, for any μ that is not below 0. Π r_i/Σ r_i rises with each r_i.
    """
    if case.aim is AimKind.OVERALL:
        known(multipliers, ())
        product = greatest_product(case.least, case.most, case.n)
        return claim_of_determinant(case, Fraction(product * case.trial.t, case.n))
    known(multipliers, ("price", "sums"))
    price = multipliers.ratio("price")
    if price < 0 and not case.rules.exact:
        raise Refuted("a price below 0 proves nothing where plots may stay filler")
    each, total = sum_prices(multipliers, case)
    least = -price * case.n - total
    for i, weight in enumerate(weights(case.trial)):
        least += _cheapest(weight, price + each[i], max(1, case.least[i]), case.most[i])
    return claim_of_variance(case, least)


def _cheapest(weight: Fraction, price: Fraction, least: int, most: int) -> Fraction:
    """The least of weight/r + price·r over whole r in the range; convex where the price is above 0."""
    if least > most:
        raise Refuted("the rules leave a treatment no number of plots")
    candidates = {least, most}
    if price > 0:
        # Whole numbers beside the lowest point √(weight/price) of the curve.
        lowest = isqrt(int(weight / price))
        candidates |= {r for r in (lowest, lowest + 1) if least <= r <= most}
    return min(weight / r + price * r for r in candidates)
