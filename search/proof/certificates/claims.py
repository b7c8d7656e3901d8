"""What a certificate proves, and the efficiency that follows from it."""

from __future__ import annotations

from dataclasses import dataclass
from fractions import Fraction

from search.proof.aims import weights
from search.proof.certificates.case import Case
from search.proof.certificates.spectrum import Spectrum
from search.proof.intervals import Interval
from search.proof.records import Refuted
from search.proof.reference import best_determinant, least_mean_variance
from search.trial.records import AimKind


@dataclass(frozen=True, slots=True)
class Claim:
    """No connected plan of the trial has an efficiency e for its aim with e^power above `ratio`."""

    ratio: Fraction
    power: int = 1

    def supports(self, efficiency: Fraction) -> bool:
        """Whether an efficiency may be told as one that no plan passes."""
        return efficiency >= 0 and efficiency**self.power >= self.ratio

    @property
    def derived(self) -> Fraction:
        """The least efficiency that may be told, or a hair above."""
        return Interval.exactly(self.ratio).root(self.power).high


@dataclass(frozen=True, slots=True)
class LeastSum:
    """No plan of the trial has a sum of squared meetings below `least`."""

    least: int

    def supports(self, bound: Fraction) -> bool:
        """Whether a number may be told as one that no plan is below."""
        return 0 < bound <= self.least and bound.denominator == 1

    @property
    def derived(self) -> Fraction:
        """The most that may be told."""
        return Fraction(self.least)


def claim_of_meetings(case: Case, squares: Fraction) -> LeastSum:
    """From a number that Σ λ² is not below in any plan in which nothing stands twice in a block.

    λ² is odd where λ is, so the sum is odd where all meetings together, Σ k(k−1)/2 over the blocks, are.
    """
    meetings = sum(int(k) * (int(k) - 1) // 2 for k in case.rules.sizes)
    least = max(0, -(-squares.numerator // squares.denominator))
    return LeastSum(least + (least - meetings) % 2)


def claim_of_variance(case: Case, least: Fraction) -> Claim:
    """From a number that the aim's mean variance is not below in any plan."""
    if least <= 0:
        raise Refuted("the certificate proves no more than that variances are above 0")
    return Claim(least_mean_variance(case.trial, weights(case.trial)) / least)


def claim_of_determinant(case: Case, greatest: Fraction) -> Claim:
    """From a number that the product of the non-zero eigenvalues of C does not pass in any plan."""
    return Claim(greatest / best_determinant(case.trial), case.rank)


def claim_of_spectrum(case: Case, best: Spectrum) -> Claim:
    """From the best spectrum that any plan could have; for aims that treat all pairs alike."""
    if best.vanishes:
        return Claim(Fraction(0))
    if case.aim is AimKind.OVERALL:
        return claim_of_determinant(case, best.product)
    return claim_of_variance(case, 2 * best.sum_of_inverses / case.rank)


def exponential_above(x: Fraction) -> Fraction:
    """A number not below e^x; for x < 0 by the series of e^−x, all of whose terms are above 0."""
    if x > 0:
        return Fraction(3) ** (int(x) + 1)
    grain = 10**40
    power = Fraction(int(-x * grain), grain)
    term = total = Fraction(1)
    for n in range(1, 40 + 4 * int(power)):
        term = Fraction(int(term * power / n * grain), grain)
        total += term
    return 1 / total
