"""Bounds for aims that weigh comparisons unequally: never below a plan, checked again, tight enough."""

from __future__ import annotations

import random
from contextlib import suppress
from dataclasses import replace
from fractions import Fraction
from types import ModuleType
from typing import Any

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from search.efficiency.aims import exact_weights, weights
from search.efficiency.bounds import all_bounds, averaged, control_meets, control_row, program
from search.efficiency.bounds.problem import problem
from search.efficiency.evaluator import score
from search.efficiency.records import Bound
from search.proof.certificates import KINDS
from search.proof.certificates.case import Case
from search.proof.certificates.claims import Claim
from search.proof.parts import Part
from search.proof.records import Refuted
from search.trial.limits import limits
from search.trial.records import Aim, AimKind, Contents, Contrast, Trial
from search.trial.tables import tables
from tests.efficiency.plans import equal_trial, improved, planted, square_lattice
from tests.proof.test_fuzz import mutated, paths

EACH = [averaged, control_meets, control_row]
UNEQUAL = (AimKind.AGAINST_CONTROL, AimKind.CONTRASTS)


def _claim(kind: str, trial: Trial, multipliers: Any) -> Claim:
    case = Case(trial, tables(trial), limits(trial))
    claim: Claim = KINDS[kind].derive(case, Part("multipliers", multipliers))
    return claim


def _found(module: ModuleType, trial: Trial) -> Bound | None:
    """The bound of an argument, derived again."""
    start = problem(trial, limits(trial))
    if start is None or not module.applies(trial):
        return None
    bound: Bound | None = module.find(start)
    if bound is not None:
        claim = _claim(module.NAME, trial, bound.certificate["multipliers"])
        assert claim.supports(bound.exact)
        assert float(claim.ratio) == pytest.approx(bound.value, rel=1e-12)
    return bound


@pytest.mark.parametrize("module", EACH)
@settings(max_examples=60, deadline=None)
@given(planted(), st.integers(0, 2**32))
def test_no_good_plan_beats_it(module: ModuleType, drawn: tuple[Trial, Contents], seed: int) -> None:
    """Plans made better by exchanges under rules of every kind; finder and checker agree exactly."""
    trial, contents = drawn
    bound = _found(module, trial)
    if bound is not None:
        assert score(trial, improved(trial, contents, seed, tries=40)).aim <= bound.value + 1e-12


@pytest.mark.parametrize("module", EACH)
@settings(max_examples=40, deadline=None)
@given(planted(), st.integers(0, 2**32))
def test_any_prices_give_a_bound(module: ModuleType, drawn: tuple[Trial, Contents], seed: int) -> None:
    """With prices near those that were solved for, but not the same, it still holds."""
    trial, contents = drawn
    rng, solve = random.Random(seed), program.Program.solve

    def shaken(self: program.Program) -> program.Solution | None:
        found = solve(self)
        if found is None:
            return None
        prices = {row: price + rng.gauss(0, 0.003) for row, price in found.prices.items()}
        return program.Solution(prices, found.columns, found.cost)

    with pytest.MonkeyPatch.context() as patch:
        patch.setattr(program.Program, "solve", shaken)
        bound = _found(module, trial)
    if bound is not None:
        assert score(trial, improved(trial, contents, seed, tries=10)).aim <= bound.value + 1e-12


@settings(max_examples=40, deadline=None)
@given(planted())
def test_exact_weights_are_the_weights(drawn: tuple[Trial, Contents]) -> None:
    """W row by row in fractions is W in floats."""
    trial, _ = drawn
    matrix = weights(trial)
    if matrix is not None:
        exact = np.array([[float(x) for x in row] for row in exact_weights(trial)])
        np.testing.assert_allclose(exact, matrix, atol=1e-14)


def _controlled(t: int, b: int, k: int, plots: int) -> Trial:
    """One control with so many plots, all others as even as they can be."""
    trial = equal_trial(t, b, k, Aim(AimKind.AGAINST_CONTROL), controls=1)
    each, over = divmod(b * k - plots, t - 1)
    assert not over
    treatments = []
    for one in trial.treatments:
        r = plots if one.control else each
        treatments.append(replace(one, least=r, most=r))
    return replace(trial, treatments=tuple(treatments))


@pytest.mark.parametrize(("v", "k", "extra"), [(7, 3, 1), (9, 3, 1), (13, 4, 1)])
def test_balanced_about_a_control(v: int, k: int, extra: int) -> None:
    """A balanced design with a control added to every block is met (Majumdar and Notz 1983; from memory).

    The variance in closed form: with r and λ of the design C of the others is
    (rk + λ)/(k+1) I − λ/(k+1) J, in blocks of k + 1 plots.
    """
    b = {7: 7, 9: 12, 13: 13}[v]
    r, lam = b * k // v, b * k * (k - 1) // v // (v - 1)
    trial = _controlled(v + extra, b, k + extra, b)
    inside = Fraction(r * k, k + 1) + Fraction(lam, k + 1)
    variance = ((v - 1) / inside + 1 / (inside - Fraction(v * lam, k + 1))) / v
    reference = (Fraction(1, b) + Fraction(1, r)) / variance
    best = min(all_bounds(trial, limits(trial)), key=lambda bound: bound.exact)
    assert float(reference) - 1e-12 <= best.value <= float(reference) * (1 + 1e-6)


def test_tighter_than_the_root_of_the_trace() -> None:
    """16 treatments in 10 blocks of 8, one the control: what each argument takes off the others."""
    trial = equal_trial(16, 10, 8, Aim(AimKind.AGAINST_CONTROL), controls=1)
    values = {bound.argument: bound.value for bound in all_bounds(trial, limits(trial))}
    own = {module.NAME for module in EACH}
    others = min(value for name, value in values.items() if name not in own)
    assert values[averaged.NAME] < others * 0.97
    assert values[control_meets.NAME] < values[averaged.NAME]


def _examples() -> list[tuple[ModuleType, Trial]]:
    contrasts = (
        Contrast("one", Fraction(1), ((0, Fraction(1)), (1, Fraction(-1)))),
        Contrast("two", Fraction(2), ((2, Fraction(2)), (3, Fraction(-1)), (4, Fraction(-1)))),
    )
    of_two = equal_trial(9, 12, 3, Aim(AimKind.CONTRASTS, contrasts))
    return [
        (averaged, _controlled(8, 7, 4, 7)),
        (averaged, of_two),
        (control_meets, _controlled(8, 7, 4, 7)),
        (control_meets, equal_trial(9, 12, 3, Aim(AimKind.AGAINST_CONTROL), controls=2)),
        (control_row, equal_trial(6, 8, 3, Aim(AimKind.AGAINST_CONTROL), controls=1)),
    ]


@pytest.mark.parametrize(("module", "trial"), _examples())
def test_no_number_can_be_tampered_with(module: ModuleType, trial: Trial) -> None:
    """Each number of a certificate changed: refused, or it proves no more than before."""
    bound = _found(module, trial)
    assert bound is not None
    multipliers = bound.certificate["multipliers"]
    told = 0
    for path in paths(multipliers):
        holder: Any = multipliers
        for key in path[:-1]:
            holder = holder[key]
        held = holder[path[-1]]
        if isinstance(held, dict | list) or path[-1] == "kind":
            continue
        for step in (Fraction(1, 50), Fraction(-1, 50)):
            holder[path[-1]] = held + (1 if step > 0 else -1) if isinstance(held, int) else _moved(held, step)
            with suppress(Refuted):
                claim = _claim(module.NAME, trial, multipliers)
                assert float(claim.ratio) > bound.value * (1 - 1e-5)
                told += not claim.supports(bound.exact)
            holder[path[-1]] = held
    assert told > 4


def test_a_resolvable_trial_against_one_of_its_treatments() -> None:
    """The square lattice of 16: all pairs, which is proven there, is much of the comparisons with one."""
    trial = replace(square_lattice(4, 2)[0], aim=Aim(AimKind.AGAINST_CONTROL))
    treatments = (replace(trial.treatments[0], control=True), *trial.treatments[1:])
    trial = replace(trial, treatments=treatments)
    values = {bound.argument: bound.value for bound in all_bounds(trial, limits(trial))}
    assert values[control_row.NAME] == min(values.values())


def _moved(held: str, step: Fraction) -> str:
    x = Fraction(held) + step
    return f"{x.numerator}/{x.denominator}"


@pytest.mark.parametrize(("module", "trial"), _examples())
def test_no_mutation_gives_a_traceback(module: ModuleType, trial: Trial) -> None:
    """Whatever stands in the multipliers, the answer is a claim or a refusal."""
    bound, draw = _found(module, trial), random.Random(3)
    assert bound is not None
    for _ in range(150):
        with suppress(Refuted):
            _claim(module.NAME, trial, mutated(bound.certificate["multipliers"], draw))


def test_a_case_left_out_is_told() -> None:
    """A control with 4 to 12 plots: a certificate without one of the numbers proves nothing."""
    trial = equal_trial(9, 12, 3, Aim(AimKind.AGAINST_CONTROL), controls=1)
    treatments = tuple(replace(x, least=3, most=12 if x.control else 4) for x in trial.treatments)
    trial = replace(trial, treatments=treatments)
    bound = _found(control_meets, trial)
    assert bound is not None
    cases = bound.certificate["multipliers"]["cases"]
    assert len(cases) > 3
    with pytest.raises(Refuted, match="leaves out"):
        _claim(control_meets.NAME, trial, {"cases": cases[1:]})
