"""Kind "first order": tr C has a limit, and equal eigenvalues are the best way to share it out."""

from __future__ import annotations

from search.proof.certificates.case import Case
from search.proof.certificates.claims import Claim, claim_of_spectrum
from search.proof.certificates.multipliers import known
from search.proof.certificates.spectrum import even_spectrum
from search.proof.parts import Part
from search.trial.records import AimKind

AIMS = (AimKind.ALL_PAIRS, AimKind.OVERALL)


def derive(case: Case, multipliers: Part) -> Claim:
    """Σ 1/x ≥ (t−1)²/tr C and Π x ≤ (tr C/(t−1))^(t−1)."""
    known(multipliers, ())
    return claim_of_spectrum(case, even_spectrum(case.rank, case.greatest_trace))
