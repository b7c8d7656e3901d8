"""First order: the trace of the information matrix shared out evenly.

Statement. Let S = n − Σ_B q_B / k_B, q_B the least `Σ_i n_iB²` that the rules allow in block B, and let
m = t − 1. Then `Σ 1/x ≥ m² / S` and `Π x ≤ (S/m)^m` over the nonzero eigenvalues x of C.

Proof. `tr C = n − Σ_B Σ_i n_iB² / k_B ≤ S`; the harmonic and the geometric mean are at most the
arithmetic one. Where blocks are random S is the greatest trace of C(γ), see `greatest_information`.

Source. Kempthorne 1956 for the average variance; Kiefer 1958 (from memory).
"""

from __future__ import annotations

from search.efficiency.bounds.problem import Problem, bound_on_spectrum
from search.efficiency.bounds.spectrum import even_spectrum
from search.efficiency.records import Bound
from search.trial.records import Trial

NAME = "first order"
SENTENCE = (
    "Blocks take one degree of freedom each; what is left of the information is at best spread "
    "evenly over all differences."
)


def applies(trial: Trial) -> bool:
    """Whether the aim depends on the eigenvalues alone."""
    return trial.aim.kind.depends_on_eigenvalues


def find(given: Problem) -> Bound | None:
    """The bound; it needs no multipliers."""
    return bound_on_spectrum(given, NAME, even_spectrum(given.m, given.information), {})
