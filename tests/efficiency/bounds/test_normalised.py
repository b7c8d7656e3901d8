"""The normalised moment bound: unequal replications, apart pairs, and what it gains."""

from __future__ import annotations

import random
from contextlib import suppress
from dataclasses import replace
from fractions import Fraction
from pathlib import Path

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from search.efficiency.bounds import all_bounds, normalised, program
from search.efficiency.bounds.problem import problem
from search.efficiency.evaluator import score
from search.proof.certificates import KINDS
from search.proof.certificates.case import Case
from search.proof.parts import Part
from search.proof.records import Refuted
from search.trial.limits import limits
from search.trial.reading import read_trial
from search.trial.records import Aim, AimKind, Contents, Trial
from search.trial.tables import tables
from tests.efficiency.plans import equal_trial, improved, planted
from tests.proof.test_fuzz import mutated, paths

CONFIGS = Path(__file__).parents[3] / "configs"


def _bound(trial: Trial) -> float | None:
    start = problem(trial, limits(trial))
    if start is None or not normalised.applies(trial):
        return None
    bound = normalised.find(start)
    if bound is None:
        return None
    case = Case(trial, tables(trial), limits(trial))
    claim = KINDS[normalised.NAME].derive(case, Part("multipliers", bound.certificate["multipliers"]))
    assert claim.supports(bound.exact)
    # a root is rounded up, and both are the same but for that
    precise = 1e-12 if claim.power == 1 else 1e-9
    assert float(claim.ratio) ** (1 / claim.power) == pytest.approx(bound.value, rel=precise)
    return bound.value


@settings(max_examples=100, deadline=None)
@given(planted(), st.integers(0, 2**32))
def test_no_good_plan_beats_it(drawn: tuple[Trial, Contents], seed: int) -> None:
    """Plans made better by exchanges under rules of every kind; finder and checker agree."""
    trial, contents = drawn
    bound = _bound(trial)
    if bound is not None:
        assert score(trial, improved(trial, contents, seed, tries=40)).aim <= bound + 1e-12


@settings(max_examples=60, deadline=None)
@given(planted(), st.integers(0, 2**32))
def test_any_prices_give_a_bound(drawn: tuple[Trial, Contents], seed: int) -> None:
    """With prices near those that were solved for, but not the same, it still holds."""
    trial, contents = drawn
    rng, solve = random.Random(seed), program.Program.solve

    def shaken(self: program.Program) -> program.Solution | None:
        found = solve(self)
        if found is None:
            return None
        prices = {row: price + rng.gauss(0, 0.01) for row, price in found.prices.items()}
        return program.Solution(prices, np.zeros(0), found.cost)

    with pytest.MonkeyPatch.context() as patch:
        patch.setattr(program.Program, "solve", shaken)
        bound = _bound(trial)
    if bound is not None:
        assert score(trial, improved(trial, contents, seed, tries=10)).aim <= bound + 1e-12


def test_balanced_designs_are_met() -> None:
    """Where all replications and blocks are alike it reaches the efficiency λt/(rk) (Yates 1936)."""
    for t, b, k, efficiency in ((7, 7, 3, 7 / 9), (9, 12, 3, 3 / 4), (13, 13, 4, 13 / 16)):
        assert _bound(equal_trial(t, b, k)) == pytest.approx(efficiency, rel=2e-3)


def test_an_odd_field() -> None:
    """Bays of 8 and 7 plots, 3 to 5 plots each, pairs apart: the best plan that is known has 0.9133085."""
    bound = _bound(read_trial(CONFIGS / "odd_bays.yaml"))
    assert bound is not None
    assert 0.9133084 <= bound <= 0.9133084 * 1.005


def test_an_odd_field_overall() -> None:
    """The same field with all differences taken together: the best of long searches has 0.9170.

    The second moments of C itself, which do not know that replications differ, are several times as far off.
    """
    trial = replace(read_trial(CONFIGS / "odd_bays.yaml"), aim=Aim(AimKind.OVERALL))
    values = {bound.argument: bound.value for bound in all_bounds(trial, limits(trial))}
    own = values.pop(normalised.NAME)
    assert own < min(values.values()) * 0.999
    assert own == _bound(trial)


@pytest.mark.parametrize("kind", [AimKind.ALL_PAIRS, AimKind.OVERALL])
def test_no_number_can_be_tampered_with(kind: AimKind) -> None:
    """Each number of a certificate changed: refused, or it proves no more than before."""
    trial = replace(equal_trial(6, 8, 3), aim=Aim(kind))
    start = problem(trial, limits(trial))
    assert start is not None
    bound = normalised.find(start)
    assert bound is not None
    case, multipliers = Case(trial, tables(trial), limits(trial)), bound.certificate["multipliers"]
    told = 0
    for path in paths(multipliers):
        holder = multipliers
        for key in path[:-1]:
            holder = holder[key]
        held = holder[path[-1]]
        if not isinstance(held, str):
            continue
        for step in (Fraction(1, 50), Fraction(-1, 50)):
            holder[path[-1]] = str(Fraction(held) + step)
            with suppress(Refuted):
                claim = KINDS[normalised.NAME].derive(case, Part("multipliers", multipliers))
                assert float(claim.ratio) ** (1 / claim.power) > bound.value * (1 - 1e-3)
                told += not claim.supports(bound.exact)
            holder[path[-1]] = held
    assert told > 2


@pytest.mark.parametrize("kind", [AimKind.ALL_PAIRS, AimKind.OVERALL])
def test_no_mutation_gives_a_traceback(kind: AimKind) -> None:
    """Whatever stands in the multipliers, the answer is a claim or a refusal."""
    trial = replace(read_trial(CONFIGS / "odd_bays.yaml"), aim=Aim(kind))
    start = problem(trial, limits(trial))
    assert start is not None
    bound = normalised.find(start)
    assert bound is not None
    case, draw = Case(trial, tables(trial), limits(trial)), random.Random(3)
    for _ in range(100):
        with suppress(Refuted):
            spoiled = mutated(bound.certificate["multipliers"], draw)
            KINDS[normalised.NAME].derive(case, Part("multipliers", spoiled))
