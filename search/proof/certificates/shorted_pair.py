"""Kind "shorted pair": the largest pair variance from below, through what two treatments alone can carry."""

from __future__ import annotations

from fractions import Fraction

import numpy as np

from search.proof.certificates.case import Case
from search.proof.certificates.claims import Claim
from search.proof.certificates.multipliers import known
from search.proof.parts import Part
from search.proof.records import Refuted
from search.proof.reference import least_worst_pair
from search.trial.records import AimKind

AIMS = (AimKind.WORST_PAIR,)


def derive(case: Case, multipliers: Part) -> Claim:
    """v_ij is a resistance, and joining all other treatments into one point does not raise it.

    What is left are three conductances: c between i and j, and what each of them has besides. With r plots in
    blocks of k at most a treatment has r (1 − 1/k) in all; c is the blocks shared over the smallest size.
    """
    if not case.nothing_twice:
        raise Refuted("this kind of certificate is for trials in which nothing stands twice in a block")
    known(multipliers, ())
    least = max(_limited_pairs(case), _seldom_met(case), _scarcest(case))
    if least <= 0:
        raise Refuted("the certificate proves no more than that variances are above 0")
    return Claim(least_worst_pair(case.trial) / least)


def _resistance(one: Fraction, other: Fraction, between: Fraction) -> Fraction:
    """Of c beside the two others in a row, where `one` and `other` are all that i and j have; 0 for none."""
    between = min(one, other, between)
    rest = [one - between, other - between]
    conductance = between + (rest[0] * rest[1] / sum(rest) if all(rest) else 0)
    return 1 / conductance if conductance else Fraction(0)


def _conductance(case: Case, i: int, plots: int) -> Fraction:
    return plots - Fraction(plots, _largest_block(case, i))


def _largest_block(case: Case, i: int) -> int:
    return max(int(k) for k, high in zip(case.rules.sizes, case.rules.high[i], strict=True) if high)


def _smallest_block(case: Case) -> int:
    return min((int(k) for k in case.rules.sizes if k > 1), default=1)


def _with_whomever(case: Case, i: int, plots: int) -> Fraction:
    """The variance against the treatment that i meets least often, if i has so many plots at most."""
    others = case.trial.t - 1
    partners = plots * (_largest_block(case, i) - 1)
    most = max(_conductance(case, j, max(case.most)) for j in range(case.trial.t))
    return _resistance(
        _conductance(case, i, plots), most, Fraction(partners // others, _smallest_block(case))
    )


def _seldom_met(case: Case) -> Fraction:
    """Every treatment meets somebody no more often than it meets all others on average."""
    return max(_with_whomever(case, i, case.most[i]) for i in range(case.trial.t))


def _scarcest(case: Case) -> Fraction:
    """Some treatment has no more plots than the average."""
    average = case.trial.n // case.trial.t
    return min(_with_whomever(case, i, min(average, case.most[i])) for i in range(case.trial.t))


def _limited_pairs(case: Case) -> Fraction:
    """A pair that the rules let meet in fewer blocks than it could otherwise; 0 where there is none."""
    rules, most = case.rules, np.array(case.most)
    meets = np.where(rules.apart, 0, np.minimum(rules.high @ rules.high.T, rules.meet_most))
    blocks = np.array([_largest_block(case, i) for i in range(case.trial.t)])
    limited = [tuple(pair) for pair in np.argwhere(np.triu(meets < np.minimum.outer(most, most), 1)).tolist()]
    together = {frozenset(limit.treatments): limit.most for limit in case.implied.sums}
    best, solved = Fraction(0), dict[tuple[int, ...], Fraction]()
    for i, j in limited:
        sum_of_both = together.get(frozenset((i, j)), case.most[i] + case.most[j])
        kind = (case.most[i], case.most[j], int(blocks[i]), int(blocks[j]), int(meets[i, j]), sum_of_both)
        if kind not in solved:
            solved[kind] = _limited_pair(case, i, j, int(meets[i, j]), sum_of_both)
        best = max(best, solved[kind])
    return best


def _limited_pair(case: Case, i: int, j: int, meets: int, sum_of_both: int) -> Fraction:
    """The least over the plots that the two may have; more plots never raise it."""
    found = []
    for r in range(1, case.most[i] + 1):
        s = min(case.most[j], sum_of_both - r)
        if s >= 1:
            between = Fraction(min(meets, r, s), _smallest_block(case))
            found.append(_resistance(_conductance(case, i, r), _conductance(case, j, s), between))
    return min(found, default=Fraction(0))
