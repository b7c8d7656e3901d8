"""The local spectral program: never below a plan, and as tight as what was measured."""

from __future__ import annotations

import csv
import random
from dataclasses import replace
from fractions import Fraction
from pathlib import Path

import numpy as np
import pytest

from search.api import plan
from search.efficiency.bounds import all_bounds
from search.efficiency.bounds.problem import problem
from search.efficiency.bounds.spectral import local
from search.efficiency.bounds.spectral.below import Cost, stays_below
from search.efficiency.bounds.spectral.side import Shape, halves, shape_of, variants
from search.efficiency.bounds.spectral.walks import walk_polynomial
from search.efficiency.evaluator import score
from search.trial.limits import limits
from search.trial.records import Rules, Trial
from search.trial.tables import incidence
from tests.efficiency.plans import (
    FANO,
    OVERALL,
    affine_plane,
    equal_trial,
    improved,
    square_lattice,
    trial_of,
)
from tests.equal_plans import SHAPES, random_plan


def _bound(trial: Trial, finer: bool = False) -> float:
    given = problem(trial, limits(trial))
    assert given is not None
    bound = (local.find_finer if finer else local.find)(given)
    assert bound is not None
    return bound.value


@pytest.mark.parametrize("shape", SHAPES)
def test_no_good_plan_beats_it(shape: tuple[int, int, int]) -> None:
    """Random plans made better by exchanges, average variance and overall."""
    t, b, k = shape
    for aim in (None, OVERALL):
        trial = equal_trial(t, b, k) if aim is None else equal_trial(t, b, k, aim)
        contents = improved(trial, random_plan(random.Random(t), t, b, k), 1, tries=200)
        assert score(trial, contents).aim <= _bound(trial) + 1e-12


TIGHT = [
    (9, 18, 2, 0.516728254), (11, 11, 3, 0.695096937), (18, 9, 4, 0.694386990), (16, 24, 2, 0.392156863),
    (21, 35, 3, 0.674223294),
]  # fmt: skip
"""(t, b, k, bound) of an earlier prototype of this project."""


@pytest.mark.parametrize(("t", "b", "k", "value"), TIGHT)
def test_as_tight_as_the_prototype(t: int, b: int, k: int, value: float) -> None:
    """One level and all further ones give what was measured before."""
    assert _bound(equal_trial(t, b, k)) == pytest.approx(value, rel=2e-7)


def test_more_levels_prove_optimal_plans() -> None:
    """(10, 20, 3): A = 0.7317073 is reached, and once one step from even is looked at, proven."""
    trial = equal_trial(10, 20, 3)
    assert _bound(trial) > 0.7318
    assert _bound(trial, finer=True) == pytest.approx(0.731707318, rel=1e-7)


@pytest.mark.parametrize("replicates", [2, 3])
def test_square_lattices_are_met(replicates: int) -> None:
    """Among resolvable plans square lattices are optimal (Cheng & Bailey 1991)."""
    trial, contents = square_lattice(3, replicates)
    reached = score(trial, contents).A
    assert reached * (1 - 1e-12) <= _bound(trial) <= reached * (1 + 1e-5)


def test_trials_of_another_kind_have_none() -> None:
    """Unequal replications or complete blocks: no numbers to speak of."""
    for trial in (trial_of(((0, 1, 2), (0, 1, 3), (0, 2, 4)), 5), equal_trial(3, 4, 3)):
        given = problem(trial, limits(trial))
        assert given is not None
        assert shape_of(given) is None
        assert local.find(given) is None


def test_walks_of_the_plane() -> None:
    """In the projective plane of order 2 any two points share one line: 3·2·(3−1) walks of length 2 back."""
    n = incidence(FANO, 7)
    a = n @ n.T - 3 * np.eye(7, dtype=int)
    powers = [np.linalg.matrix_power(a, p) for p in range(9)]
    for length in range(1, 9):
        walk = sum(c * power for c, power in zip(walk_polynomial(length, 3, 3), powers, strict=False))
        assert (walk >= 0).all()
    two = sum(c * power for c, power in zip(walk_polynomial(2, 3, 3), powers, strict=False))
    # from a point to another: over each third point off their common line
    assert set(two[~np.eye(7, dtype=bool)].tolist()) == {4}
    assert not two.diagonal().any()


def test_forms_of_a_level() -> None:
    """One step from even one pair has the entry 2, or −1 where pairs that meet can be spared."""
    shape = Shape(10, 20, 6, 3, 1)
    assert [len(variants(shape, number, True) or []) for number in (0, 1, 2)] == [1, 2, 1]
    dual_of_plane = Shape(9, 12, 4, 3, 1)
    assert variants(dual_of_plane, 0, True) is not None
    assert len(affine_plane(3)) == 12


@pytest.mark.parametrize(
    ("t", "b", "k", "pairs", "steps"), [(7, 14, 3, 2, 6), (9, 15, 3, 3, 3), (8, 10, 4, 1, 3)]
)
def test_credit_for_pairs_that_never_meet(t: int, b: int, k: int, pairs: int, steps: int) -> None:
    """Pairs that never meet where meetings would be 2, 1 and 2 at the evenest take steps: 3 or 1 each."""
    free = equal_trial(t, b, k)
    never = tuple((2 * n, 2 * n + 1) for n in range(pairs))
    tied = replace(free, rules=Rules(never_share_block=never))
    start = problem(tied, limits(tied))
    assert start is not None
    shape = shape_of(start)
    assert shape is not None
    assert halves(shape)[0].least_steps == steps
    bound = _bound(tied)
    assert bound < _bound(free) * (1 - 1e-4)
    others = [one.value for one in all_bounds(tied, limits(tied), lambda seconds: seconds < 0.5)]
    assert bound <= min(others) * (1 + 1e-3)
    assert plan(tied, moves=20_000, workers=1).score.aim <= bound + 1e-12


@pytest.mark.parametrize("cost", list(Cost))
def test_below_or_not(cost: Cost) -> None:
    """The tangent at 1/2 lies below the cost, raised by a hair it does not."""
    at, slope = (2.0, 4.0) if cost is Cost.INVERSE else (float(np.log(2)), 2.0)
    hair = Fraction(1, 10**9)
    constant = Fraction(at) - Fraction(slope) / 2
    whole = [(Fraction(0), Fraction(1), Fraction(0))]
    assert stays_below([constant - hair, Fraction(slope)], cost, whole)
    assert not stays_below([constant + hair, Fraction(slope)], cost, whole)


GRID = Path(__file__).parent / "grid_reached.csv"


@pytest.mark.slow
def test_never_below_a_long_search() -> None:
    """All 778 sets of equal blocks and replications, 5 ≤ t ≤ 30: above the best plan that searches found."""
    with GRID.open(encoding="utf-8") as file:
        for row in csv.DictReader(file):
            t, b, k = (int(row[key]) for key in ("treatments", "blocks", "block_size"))
            assert _bound(equal_trial(t, b, k)) >= float(row["best_A_found"]) - 1e-9, row
