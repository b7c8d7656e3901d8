"""How small Σ 1/x and how large Π x can be for the non-zero eigenvalues x of an information matrix."""

from __future__ import annotations

from dataclasses import dataclass
from fractions import Fraction

from search.foundation.exact import root_above, root_below
from search.proof.certificates.case import Case, greatest_trace
from search.proof.records import Refuted


@dataclass(frozen=True, slots=True)
class Spectrum:
    """Values above 0 with multiplicities, such that no plan has a smaller Σ 1/x or a larger Π x.

    Parameters
    ----------
    parts : pairs of a value and how often it stands
    """

    parts: tuple[tuple[Fraction, int], ...]

    @property
    def vanishes(self) -> bool:
        """Whether some value is 0, so that no plan is connected."""
        return any(x <= 0 for x, times in self.parts if times)

    @property
    def sum_of_inverses(self) -> Fraction:
        """Σ 1/x."""
        return sum((times / x for x, times in self.parts), Fraction(0))

    @property
    def product(self) -> Fraction:
        """Π x."""
        found = Fraction(1)
        for x, times in self.parts:
            found *= x**times
        return found


def even_spectrum(number: int, total: Fraction) -> Spectrum:
    """All eigenvalues equal: the best there is for a given sum, by convexity."""
    return Spectrum(((total / number, number),))


def extreme_spectrum(number: int, total: Fraction, squares: Fraction, cap: Fraction) -> Spectrum:
    """The best spectrum of `number` values with Σx = total, Σx² ≥ squares and 0 < x ≤ cap.

    Let one value grow and the others shrink alike; when it reaches the cap let the next one grow, and so
    on. Along this path Σx² rises and the spectrum gets worse, and by the equal variable theorem (Cirtoaje
    2007; f''' of 1/x and log x has one sign) no spectrum with the same Σx and Σx² is better than the one
    on the path. Roots are rounded so that the spectrum told is never worse than the true one.

    Parameters
    ----------
    number : how many values, at least 1
    total, squares, cap : as above, total above 0

    Returns
    -------
    the spectrum; all values equal where no spectrum meets the conditions, as no plan does then
    """
    even = even_spectrum(number, total)
    capped = 0
    while True:
        mean = total / number
        if number == 1 or squares <= total * mean or cap < mean:
            return Spectrum(((cap, capped), (mean, number)))
        variance = squares - total * mean
        if cap == mean or variance * (number - 1) / number <= (cap - mean) ** 2:
            break
        capped, number = capped + 1, number - 1
        total, squares = total - cap, squares - cap**2
        if total <= 0:
            return even
    large = mean + root_above(variance * (number - 1) / number)
    small = mean - root_below(variance / (number * (number - 1)))
    if small <= 0:
        return even
    return Spectrum(((cap, capped), (large, 1), (small, number - 1)))


def second_moment_spectrum(case: Case, squares: Fraction) -> Spectrum:
    """The best spectrum of any plan of the trial, given that tr C² is nowhere below `squares`.

    With one replication r for all, every z with N'z = 0 is an eigenvector of C for r; there are t − b such
    dimensions at least, and more where whole replicates make columns of N depend on each other.
    Where blocks are random, of k plots each, C(γ) = (1−φ) r + φ C on contrasts with φ = γk/(1+γk).
    """
    found = _fixed_blocks_spectrum(case, squares)
    if case.trial.blocks_random is None:
        return found
    sizes = {block.plots for block in case.trial.blocks}
    if len({*case.least, *case.most}) > 1 or len(sizes) > 1:
        raise Refuted("second moments say nothing of random blocks where sizes or replications differ")
    r, ratio = case.most[0], case.trial.blocks_random * sizes.pop()
    taken = ratio / (1 + ratio)
    return Spectrum(tuple(((1 - taken) * r + taken * x, times) for x, times in found.parts))


def _fixed_blocks_spectrum(case: Case, squares: Fraction) -> Spectrum:
    number, total = case.rank, greatest_trace(case.rules)
    cap = Fraction(max(case.most))
    if total <= 0:
        return even_spectrum(number, total)
    known = _dimensions_without_loss(case)
    total_left = total - known * cap
    if known == 0 or number - known <= 0 or total_left <= 0:
        return extreme_spectrum(number, total, squares, cap)
    rest = extreme_spectrum(number - known, total_left, squares - known * cap**2, cap)
    return Spectrum(((cap, known), *rest.parts))


def _dimensions_without_loss(case: Case) -> int:
    """Dimensions in which every plan keeps the whole replication r; 0 where r is not one number."""
    if len({*case.least, *case.most}) > 1:
        return 0
    group, b = case.rules.group, case.rules.b
    replicates = int(group.max()) + 1
    independent = b - replicates + 1 if (group >= 0).all() else b
    return max(0, case.trial.t - independent)
