"""Kind "even meetings by block meets": Σ λ² from below through the treatments that pairs of blocks share."""

from __future__ import annotations

from fractions import Fraction

from search.proof.certificates.by_meets import Costs, least_squares
from search.proof.certificates.case import Case
from search.proof.certificates.claims import LeastSum, claim_of_meetings
from search.proof.certificates.multipliers import known
from search.proof.parts import Part
from search.proof.records import Refuted
from search.trial.records import AimKind

AIMS = (AimKind.EVEN_MEETINGS,)

TWICE_THE_SUM = Costs(-1, lambda k: Fraction(0), lambda k, other: Fraction(2), lambda k: k * k)


def derive(case: Case, multipliers: Part) -> LeastSum:
    """2 Σ_{i<j} λ_ij² = Σ_B k_B² + 2 Σ_{B<B'} x_BB'² − Σ_i r_i².

    Both sides are the sum of all squares in NN', which is that in N'N, less its diagonal of replications.
    The prices are those of the second moment by block meets.
    """
    if not case.nothing_twice:
        raise Refuted("this kind of certificate is for trials in which nothing stands twice in a block")
    known(multipliers, ("meets", "plots", "sums"))
    return claim_of_meetings(case, least_squares(case, multipliers, TWICE_THE_SUM) / 2)
