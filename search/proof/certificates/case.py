"""What every certificate starts from: the trial, its rules as arrays, and what they imply."""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import dataclass
from fractions import Fraction

import numpy as np

from search.proof.records import Refuted
from search.trial.limits import Limits, limits
from search.trial.records import AimKind, Trial
from search.trial.settled import settled
from search.trial.tables import Ints, Tables, tables


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
    def n(self) -> int:
        """The most plots that any plan has."""
        return self.implied.planted[1]

    @property
    def greatest_trace(self) -> Fraction:
        """A number that the trace of the information matrix does not pass in any plan."""
        ratio = self.trial.blocks_random
        if ratio is None:
            return greatest_trace(self.rules, self.n)
        # tr C(γ) = n − Σ_B γ Σ_i n_iB²/(1+γk_B) − Σ_i s_i²/Σs, and Σ_i s_i² ≥ (Σs)²/t. A plan with filler
        # tells less than one with anything in its place, whose Σ_i n_iB² are at least its blocks' sizes.
        sizes = [int(k) for k in self.rules.sizes]
        squares = list(least_squares(self.rules, self.rules.sizes)) if self.rules.exact else sizes
        trace = Fraction(sum(sizes))
        for q, k in zip(squares, sizes, strict=True):
            trace -= (ratio * q + Fraction(k, self.trial.t)) / (1 + ratio * k)
        return trace

    @property
    def rank(self) -> int:
        """Number of non-zero eigenvalues of C in a connected plan."""
        return self.trial.t - 1


def case_of(trial: Trial) -> Case:
    """What is to be proved of a trial, its blocks exact where counting settles what is planted in them.

    Raises
    ------
    Impossible : counts that cannot all hold
    """
    trial, implied = settled(trial, limits(trial))
    return Case(trial, tables(trial), implied)


def greatest_trace(rules: Tables, planted: int | None = None) -> Fraction:
    """A number that tr C = n − Σ_B Σ_i n_iB²/k_B does not pass; attained where nothing stands twice.

    A block that may stay partly empty counts as full, for a plot more adds to C; and each block takes at
    least one.

    Parameters
    ----------
    rules : tables of the trial
    planted : no plan has more plots; what sizes and stated ranges allow where left out
    """
    full = np.minimum(rules.sizes, rules.high.sum(axis=0))
    if not full.all():
        raise Refuted("the rules leave a block that no treatment may enter")
    trace = Fraction(int(full.sum()))
    for squares, size in zip(least_squares(rules, full), full, strict=True):
        trace -= Fraction(squares, int(size))
    return min(trace, Fraction((rules.n if planted is None else planted) - rules.b))


def least_squares(rules: Tables, sizes: Ints) -> Iterator[int]:
    """For each block, of so many plots, a number that Σ_i n_iB² is not below.

    It is least where plots go one by one to the treatment that has fewest there.
    """
    for low, high, size in zip(rules.low.T, rules.high.T, sizes, strict=True):
        squares, left, level = int((low**2).sum()), int(size - low.sum()), 0
        while left > 0:
            steps = int(((low <= level) & (level < high)).sum())
            if steps == 0 and level >= high.max():
                break
            taken = min(left, steps)
            squares, left, level = squares + taken * (2 * level + 1), left - taken, level + 1
        yield squares
