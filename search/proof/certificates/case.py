"""What every certificate starts from: the trial, its rules as arrays, and what they imply."""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import dataclass
from fractions import Fraction

from search.trial.limits import Limits
from search.trial.records import AimKind, Trial
from search.trial.tables import Tables


@dataclass(frozen=True, slots=True, eq=False)
class Case:
    """A trial about which something is to be proved.

    Parameters
    ----------
    trial : the trial of the file
    rules : its rules as arrays
    implied : what the rules leave of the replication
    """

    trial: Trial
    rules: Tables
    implied: Limits

    @property
    def aim(self) -> AimKind:
        """The aim of the trial."""
        return self.trial.aim.kind

    @property
    def least(self) -> list[int]:
        """Fewest plots of each treatment under all rules."""
        return [int(x) for x in self.implied.least]

    @property
    def most(self) -> list[int]:
        """Most plots of each treatment under all rules."""
        return [int(x) for x in self.implied.most]

    def plots_of(self, i: int) -> tuple[int, int]:
        """Fewest and most plots of one treatment under all rules."""
        return int(self.implied.least[i]), int(self.implied.most[i])

    @property
    def nothing_twice(self) -> bool:
        """Whether no treatment can stand more than once in a block."""
        return bool((self.rules.high <= 1).all())

    @property
    def greatest_trace(self) -> Fraction:
        """A number that the trace of the information matrix does not pass in any plan."""
        ratio = self.trial.blocks_random
        if ratio is None:
            return greatest_trace(self.rules)
        # tr C(γ) = n − Σ_B γ Σ_i n_iB²/(1+γk_B) − Σ_i s_i²/Σs, and Σ_i s_i² ≥ (Σs)²/t
        trace = Fraction(self.rules.n)
        for squares, size in zip(least_squares(self.rules), self.rules.sizes, strict=True):
            k = int(size)
            trace -= ratio * squares / (1 + ratio * k) + Fraction(k, self.trial.t) / (1 + ratio * k)
        return trace

    @property
    def rank(self) -> int:
        """Number of non-zero eigenvalues of C in a connected plan."""
        return self.trial.t - 1


def greatest_trace(rules: Tables) -> Fraction:
    """A number that tr C = n − Σ_B Σ_i n_iB²/k_B does not pass; attained where nothing stands twice."""
    trace = Fraction(rules.n)
    for squares, size in zip(least_squares(rules), rules.sizes, strict=True):
        trace -= Fraction(squares, int(size))
    return trace


def least_squares(rules: Tables) -> Iterator[int]:
    """For each block a number that Σ_i n_iB² is not below.

    It is least where plots go one by one to the treatment that has fewest there.
    """
    for low, high, size in zip(rules.low.T, rules.high.T, rules.sizes, strict=True):
        squares, left, level = int((low**2).sum()), int(size - low.sum()), 0
        while left > 0:
            steps = int(((low <= level) & (level < high)).sum())
            if steps == 0 and level >= high.max():
                break
            taken = min(left, steps)
            squares, left, level = squares + taken * (2 * level + 1), left - taken, level + 1
        yield squares
