"""Worst pair: the largest variance is not below the average, nor below what two treatments alone can carry.

**By the average.** Every number that the average pair variance of no plan is below is one for the largest.

**Shorted pair.** Statement. Where nothing stands twice in a block, let `g_i = C_ii` and `c = −C_ij`; then
`v_ij ≥ 1 / (c + (g_i − c)(g_j − c)/(g_i + g_j − 2c))`.

Proof. v_ij is the resistance between i and j in the network with conductances −C_ij. Joining all other
treatments into one point lowers it (Rayleigh), and leaves the value above, which falls in g_i, g_j and c.
With r_i plots `g_i ≤ r_i (1 − 1/k)` for the largest block that may hold i, and `c ≤ λ_ij/k` for the smallest
that may hold anything. In every plan (a) a pair that may meet in m blocks at most has λ ≤ m, and such sums of
plots as the rules imply; (b) some treatment has at most ⌊n/t⌋ plots, and (c) each treatment i meets some
other at most `⌊r_i (k − 1)/(t − 1)⌋` times.

Source. Doyle and Snell 1984 (electric networks; from memory).
"""

from __future__ import annotations

from dataclasses import replace
from fractions import Fraction

import numpy as np

from search.efficiency.bounds.lattice import alike
from search.efficiency.bounds.problem import Problem, bound_on_variance
from search.efficiency.records import Bound
from search.efficiency.reference import least_worst_pair, reference_variance
from search.foundation.exact import rounded_up
from search.trial.records import Aim, AimKind, Trial

NAME = "shorted pair"
SENTENCE = (
    "Some two treatments meet seldom and have few plots, and their difference could not be better even if "
    "all other differences were known exactly."
)


def applies(trial: Trial) -> bool:
    """Whether the aim is the worst pair and nothing stands twice in a block."""
    return trial.aim.kind is AimKind.WORST_PAIR and not trial.rules.twice_in_block


def find(given: Problem) -> Bound | None:
    """The bound; it needs no multipliers."""
    least = max(_of_pairs(given), _of_some_pair(given))
    return bound_on_variance(given, NAME, least, {}) if least > 0 else None


def of_average(trial: Trial) -> Trial:
    """The same trial for the average of all pairs."""
    return replace(trial, aim=Aim(AimKind.ALL_PAIRS))


def by_average(trial: Trial, average: Bound) -> Bound:
    """The bound of the worst pair that a bound of all pairs gives."""
    exact = average.exact * least_worst_pair(trial) / reference_variance(of_average(trial))
    statement = f"{average.certificate['statement']}, and the largest is not below the average"
    return Bound(
        AimKind.WORST_PAIR,
        rounded_up(exact),
        average.argument,
        {**average.certificate, "statement": statement},
    )


def shorted(mine: Fraction, other: Fraction, between: Fraction) -> Fraction:
    """What v_ij is not below, from g_i, g_j and c; 0 where nothing joins the two, in no connected plan."""
    between = min(between, mine, other)
    mine, other = mine - between, other - between
    joined = between + (mine * other / (mine + other) if mine and other else 0)
    return 1 / joined if joined else Fraction(0)


def _of_pairs(given: Problem) -> Fraction:
    """The greatest bound on any one pair whose meetings the rules limit; 0 where there is none."""
    rules, limits = given.rules, given.limits
    together = np.minimum(rules.meet_most, rules.high @ rules.high.T)
    together[rules.apart] = 0
    seldom = np.triu(together < np.minimum.outer(limits.most, limits.most), 1)
    widest = np.array([_widest(given, i) for i in range(given.trial.t)])
    if not seldom.any():
        return Fraction(0)
    i, j = np.nonzero(seldom)
    found = np.stack([limits.most[i], limits.most[j], widest[i], widest[j], together[i, j]], axis=1)
    _, examples = np.unique(alike(found), return_index=True)
    alone = [(*kind, kind[0] + kind[1]) for kind in found[examples].tolist()]
    summed = [
        (
            int(limits.most[a]),
            int(limits.most[b]),
            int(widest[a]),
            int(widest[b]),
            int(together[a, b]),
            s.most,
        )
        for s in limits.sums
        if len(s.treatments) == 2
        for a, b in [sorted(s.treatments)]
        if seldom[a, b]
    ]
    return max((_of_pair(given, *kind) for kind in (*alone, *summed)), default=Fraction(0))


def _of_pair(
    given: Problem, most_i: int, most_j: int, widest_i: int, widest_j: int, meets: int, total: int
) -> Fraction:
    """What v_ij is not below, with so many plots each and so many together at most."""
    found = []
    for r in range(1, min(most_i, total - 1) + 1):
        s = min(most_j, total - r)
        between = Fraction(min(meets, r, s), _narrowest(given))
        found.append(shorted(_held(r, widest_i), _held(s, widest_j), between))
    return min(found, default=Fraction(0))


def _of_some_pair(given: Problem) -> Fraction:
    """A bound on the pair of a treatment with those that it meets least often."""
    t, limits = given.trial.t, given.limits
    few = given.trial.n // t
    widest = max(_widest(given, j) for j in range(t))
    most = int(limits.most.max())

    def of(i: int, r: int) -> Fraction:
        meets = r * (_widest(given, i) - 1) // (t - 1)
        return shorted(_held(r, _widest(given, i)), _held(most, widest), Fraction(meets, _narrowest(given)))

    own = [of(i, int(limits.most[i])) for i in range(t)]
    scarce = [of(i, min(few, int(limits.most[i]))) for i in range(t)]
    return max(max(own), min(scarce))


def _held(plots: int, size: int) -> Fraction:
    """g of a treatment with so many plots in blocks of that size."""
    return plots * (1 - Fraction(1, size))


def _widest(given: Problem, i: int) -> int:
    return int(given.rules.sizes[given.rules.high[i] > 0].max())


def _narrowest(given: Problem) -> int:
    """The smallest block in which anybody can meet."""
    sizes = given.rules.sizes
    return int(sizes[sizes > 1].min()) if (sizes > 1).any() else 1
