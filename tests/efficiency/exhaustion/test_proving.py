"""Proof by exhaustion: true against all plans of tiny trials, and as found by an earlier prototype."""

from __future__ import annotations

import random
from collections.abc import Iterator
from fractions import Fraction
from itertools import combinations, combinations_with_replacement

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from search.efficiency.bounds.problem import problem
from search.efficiency.bounds.spectral.below import Cost
from search.efficiency.bounds.spectral.side import Half
from search.efficiency.evaluator import score
from search.efficiency.exhaustion.proving import Case, Exhausted, case_of, exhausted, worth_of
from search.efficiency.exhaustion.realising import By, Effort, realised
from search.efficiency.exhaustion.worth import determinant, estimates, worth
from search.trial.checker import broken_rules
from search.trial.limits import limits
from search.trial.records import Aim, Contents, Trial
from search.trial.tables import incidence
from tests.efficiency.plans import ALL_PAIRS, FANO, OVERALL, dual, equal_trial, improved
from tests.equal_plans import random_plan


def case(trial: Trial) -> Case:
    """What there is to list for a trial."""
    given_ = problem(trial, limits(trial))
    assert given_ is not None
    found = case_of(given_)
    assert found is not None
    return found


def proved(trial: Trial, contents: Contents) -> Exhausted:
    """What exhaustion makes of a plan."""
    given_ = problem(trial, limits(trial))
    assert given_ is not None
    found = exhausted(given_, case(trial), worth_of(case(trial), contents))
    assert found is not None
    return found


def best_of(trial: Trial, contents: Contents) -> tuple[float, Exhausted]:
    """The efficiency of the best plan that is known in the end, and the last word of the proof."""
    found = proved(trial, contents)
    if found.contents is not None:
        assert not broken_rules(trial, found.contents)
        assert score(trial, found.contents).aim > score(trial, contents).aim
        contents = found.contents
    return score(trial, contents).aim, found


def plans_of(trial: Trial, k: int) -> Iterator[Contents]:
    """Every plan of a trial, but for the order of its blocks."""
    columns = list(combinations(range(trial.t), k))
    for contents in combinations_with_replacement(columns, trial.b):
        if not broken_rules(trial, contents):
            yield contents


TINY = [(4, 4, 3), (5, 5, 3), (4, 6, 2), (6, 3, 4), (5, 5, 4)]


@pytest.mark.parametrize("aim", [ALL_PAIRS, OVERALL], ids=["all pairs", "overall"])
@pytest.mark.parametrize("shape", TINY)
def test_no_plan_of_a_tiny_trial_is_better(shape: tuple[int, int, int], aim: Aim) -> None:
    """What is proved is not below the best of all plans, and what is found not above."""
    t, b, k = shape
    trial = equal_trial(t, b, k, aim)
    given_ = problem(trial, limits(trial))
    assert given_ is not None
    if case_of(given_) is None:
        assert b * k // t == k == 2
        return
    best = max(score(trial, contents).aim for contents in plans_of(trial, k))
    start = improved(trial, random_plan(random.Random(1), t, b, k), 1, tries=20)
    reached, found = best_of(trial, start)
    assert reached <= best + 1e-12
    assert found.bound is None or found.bound.value >= best - 1e-12


@settings(deadline=None, max_examples=5)
@given(st.sampled_from([(6, 9, 2), (7, 7, 3), (6, 8, 3), (7, 7, 4), (8, 6, 4)]), st.integers(0, 999))
def test_nothing_that_is_found_beats_what_is_proved(shape: tuple[int, int, int], seed: int) -> None:
    """Whatever plan it starts from, no plan that a walk comes upon is above the bound."""
    t, b, k = shape
    trial = equal_trial(t, b, k)
    start = random_plan(random.Random(seed), t, b, k)
    if score(trial, start).connected:
        reached, found = best_of(trial, start)
        good = improved(trial, random_plan(random.Random(seed + 1), t, b, k), seed, tries=60)
        assert found.bound is None or max(reached, score(trial, good).aim) <= found.bound.value + 1e-12


PROVEN = [(9, 18, 2, 0.511140236), (8, 8, 4, 0.849761621), (8, 12, 2, 0.487562189), (8, 6, 4, 0.838475499)]
LONG = [
    (12, 18, 2, 0.424125585), (12, 15, 4, 0.810164746),
    (16, 24, 2, 0.389610390), (12, 18, 4, 0.812807882),
]  # fmt: skip
"""(t, b, k, best A): the best of long searches by an earlier prototype of this project."""


def _is_proven(t: int, b: int, k: int, best: float) -> None:
    trial = equal_trial(t, b, k)
    contents = improved(trial, random_plan(random.Random(3), t, b, k), 3, tries=100)
    for _ in range(9):
        found = proved(trial, contents)
        if found.contents is None:
            break
        contents = found.contents
    assert found.bound is not None
    reached = score(trial, contents).aim
    assert 1 - reached / found.bound.value < 1e-9
    assert abs(reached - best) < 2e-9
    counts = found.bound.certificate["multipliers"]
    assert counts["better"] == sum(counts["refuted"].values()) <= counts["graphs"]


@pytest.mark.parametrize(("t", "b", "k", "best"), PROVEN)
def test_small_cases_are_proven(t: int, b: int, k: int, best: float) -> None:
    """From a middling plan the best one is found and proved to be that."""
    _is_proven(t, b, k, best)


@pytest.mark.slow
@pytest.mark.parametrize(("t", "b", "k", "best"), LONG)
def test_larger_cases_are_proven(t: int, b: int, k: int, best: float) -> None:
    """The same where thousands of graphs are listed or the solver must refute some."""
    _is_proven(t, b, k, best)


def test_the_worth_of_a_plan_is_its_variance() -> None:
    """−Σ 1/(1 − x) is the average variance but for a factor, from either side, and in floats."""
    for t, b, k in ((6, 8, 3), (8, 6, 4), (9, 18, 2)):
        plan = random_plan(random.Random(5), t, b, k)
        trial, r = equal_trial(t, b, k), b * k // t
        variance = score(trial, plan).average_pair_variance
        assert variance is not None
        counts = incidence(plan, t).astype(np.int64)
        primal = worth(counts @ counts.T, r * k, 0, Cost.INVERSE)
        assert float(-primal) == pytest.approx(variance * r * (t - 1) / 2)
        assert worth(counts.T @ counts, r * k, t - b, Cost.INVERSE) == primal
        assert estimates((counts @ counts.T)[None], r * k, 0, Cost.INVERSE)[0] == pytest.approx(float(primal))
        overall = worth(counts @ counts.T, r * k, 0, Cost.LOGARITHM)
        assert worth(counts.T @ counts, r * k, t - b, Cost.LOGARITHM) == overall
        assert float(overall) == pytest.approx((score(trial, plan).D) ** (t - 1))


def test_the_determinant_is_exact() -> None:
    """Against fractions of a matrix that can be checked by hand."""
    assert determinant(np.array([[2, 1], [1, 2]])) == 3
    assert determinant(np.array([[1, 2], [2, 4]])) == 0


def test_a_plan_that_is_cut_off_has_no_worth() -> None:
    """Two triangles: nothing compares them."""
    plan = ((0, 1), (1, 2), (0, 2), (3, 4), (4, 5), (3, 5))
    counts = incidence(plan, 6).astype(np.int64)
    assert worth(counts @ counts.T, 4, 0, Cost.INVERSE) < -(10**9)
    assert worth(counts @ counts.T, 4, 0, Cost.LOGARITHM) == Fraction(0)


@pytest.mark.parametrize("contents", [FANO, dual(FANO, 7), ((0, 1, 2, 3), (0, 1, 4, 5), (2, 3, 4, 5)) * 2])
def test_a_plan_is_found_from_its_own_meetings(contents: Contents) -> None:
    """The lines that are handed back have the meetings that were asked for."""
    t = 1 + max(max(block) for block in contents)
    counts = incidence(contents, t).astype(np.int64)
    meetings = counts @ counts.T
    half, other = Half("primal", t, int(meetings[0, 0]), len(contents[0]), 1), None
    other = Half("dual", len(contents), len(contents[0]), int(meetings[0, 0]), 1)
    found = realised(meetings, half, other, False, Effort(60.0, 10.0), None)
    assert found.by is By.REALISED
    again = incidence(found.lines, t).astype(np.int64)
    assert (again @ again.T == meetings).all()


def test_counting_rules_out_what_has_no_square() -> None:
    """With 22 treatments in 22 blocks of 7 every two cannot meet twice (Schützenberger 1949, from memory)."""
    # det NN' = 49 · 5²¹ is no square
    meetings = 5 * np.eye(22, dtype=np.int64) + 2
    half = Half("primal", 22, 7, 7, 1)
    assert realised(meetings, half, Half("dual", 22, 7, 7, 1), True, Effort(1.0, 1.0), None).by is By.COUNTING
