"""Local spectral certificates: whatever the prices, no plan has less than they prove."""

from __future__ import annotations

import json
import random
from contextlib import suppress
from dataclasses import replace
from fractions import Fraction
from math import isqrt
from typing import Any

import numpy as np
import pytest

from search.efficiency.bounds.problem import problem
from search.efficiency.bounds.spectral import local
from search.proof.certificates.case import case_of
from search.proof.certificates.claims import exponential_above
from search.proof.certificates.local_spectral import _side, derive
from search.proof.certificates.spectral.cycles import _determinant, _graphs, _inverses
from search.proof.certificates.spectral.numbers import Numbers, Side, pairs_of_sides
from search.proof.certificates.spectral.walks import SHORTEST, families
from search.proof.parts import Part
from search.proof.records import Refuted
from search.trial.records import Contents, Trial
from search.trial.tables import incidence
from tests.efficiency.plans import ALL_PAIRS, FANO, OVERALL, equal_trial, square_lattice, trial_of
from tests.equal_plans import SETS, SHAPES, eigenvalues, excess, random_plan, random_sets
from tests.proof.certificates.brute import efficiency_of
from tests.proof.test_fuzz import mutated

MEETING = [(5, 10, 2), (6, 10, 3), (7, 14, 3), (6, 18, 2), (8, 10, 4), (9, 15, 3)]
"""Shapes in which every pair would meet at least once, were meetings even."""


def _prices(draw: random.Random, side: Side) -> Part:
    def price(positive: bool = False) -> str:
        return f"{draw.randint(0 if positive else -40, 40)}/{draw.choice((1, 7, 60))}"

    return Part(
        "side",
        {
            "powers": [price() for _ in range(4)],
            "diagonal": price(),
            "excess": price(positive=not side.exactly),
            "rows": [[price(), price()] for _ in range(1 if side.sets == 1 else 2)],
            "walks": {
                name: {
                    str(n): price(positive=True)
                    for n in range(SHORTEST, family.longest + 1)
                    if draw.random() < 0.3
                }
                for name, family in families(side).items()
                if draw.random() < 0.5
            },
        },
    )


def _check_side(draw: random.Random, contents: Contents, numbers: Numbers, side: Side) -> None:
    x = eigenvalues(contents, numbers.t)
    free = len(x) - numbers.kernel
    polynomial, proved = _side(numbers, side, _prices(draw, side), free)
    exact = [float(c) for c in polynomial]
    reached = np.polynomial.polynomial.polyval(x, exact).sum() - numbers.kernel * exact[0]
    size = sum(abs(c) for c in exact) * len(x)
    assert reached >= float(proved) - 1e-7 * size


def _sides_of(contents: Contents, numbers: Numbers) -> list[Side]:
    """Every side that the plan has, exactly and at least."""
    found = []
    for primal in (True, False):
        sets = 1 if primal else numbers.sets
        level, odd = excess(contents, numbers.t, not primal, sets)
        size, lines = (numbers.t, numbers.r) if primal else (numbers.b, numbers.k)
        make = (size, lines, numbers.k if primal else numbers.r, sets)
        form = odd.pop() if level == 1 and sets == 1 else None
        found.append(Side(*make, level, True, form))
        found += [Side(*make, least, False) for least in {0, level // 2, level}]
    return found


@pytest.mark.parametrize("seed", range(60))
def test_no_plan_has_less_than_any_prices_prove(seed: int) -> None:
    """Random plans, free and resolvable, against random prices of the side and level that they have."""
    draw = random.Random(seed)
    if seed % 2:
        t, b, k = draw.choice(SHAPES)
        contents, numbers = random_plan(draw, t, b, k), Numbers(t, b, b * k // t, k, 1)
    else:
        t, k, sets = draw.choice(SETS)
        contents, numbers = random_sets(draw, t, k, sets), Numbers(t, sets * t // k, sets, k, sets)
    for side in _sides_of(contents, numbers):
        for _ in range(4):
            _check_side(draw, contents, numbers, side)


@pytest.mark.parametrize(
    "shape", [(4, 6, 2), (5, 10, 2), (6, 9, 2), (5, 5, 3), (6, 4, 3), (6, 10, 3), (7, 7, 3)]
)
def test_near_even_plans_keep_to_the_special_forms(shape: tuple[int, int, int]) -> None:
    """Plans that are even, or a few steps from it, against what is claimed of graphs and of odd pairs."""
    t, b, k = shape
    draw, numbers = random.Random(1), Numbers(t, b, b * k // t, k, 1)
    drawn = [random_plan(draw, t, b, k) for _ in range(400)]
    near = [contents for contents in drawn if excess(contents, t, blocks=False)[0] <= 4]
    assert near or shape == (7, 7, 3)
    for contents in near[:24]:
        for side in _sides_of(contents, numbers):
            for _ in range(6):
                _check_side(draw, contents, numbers, side)


@pytest.mark.parametrize("seed", range(24))
def test_pairs_that_never_meet_are_told_rightly(seed: int) -> None:
    """Random plans in which some pairs happen not to meet, as if the rules said so, against random prices."""
    draw = random.Random(seed)
    while True:
        t, b, k = draw.choice(MEETING)
        contents, numbers = random_plan(draw, t, b, k), Numbers(t, b, b * k // t, k, 1)
        counts = incidence(contents, t)
        shared = counts @ counts.T
        pairs = [(i, j) for i in range(t) for j in range(i) if not shared[i, j]]
        if pairs:
            break
    told = draw.sample(pairs, draw.randint(1, len(pairs)))
    apart = tuple(sum(i in pair for pair in told) for i in range(t))
    numbers = replace(numbers, apart=apart)
    primal, dual = excess(contents, t, False)[0], excess(contents, t, True)[0]
    for exactly in (True, False):
        fitting = [
            one
            for number in range(primal + 1)
            for one, other in pairs_of_sides(numbers, number, exactly)
            if (one.level, other.level) == (primal, dual) and one.odd in (None, -1)
        ]
        assert fitting
        for side in fitting:
            assert side.apart == apart or side.odd == -1
            for _ in range(8):
                _check_side(draw, contents, numbers, side)


def test_levels_of_both_sides_go_together() -> None:
    """tr(NN')² = tr(N'N)²: for random plans the pair of levels is the one that the certificate counts."""
    draw = random.Random(3)
    for _ in range(40):
        t, b, k = draw.choice(SHAPES)
        contents, numbers = random_plan(draw, t, b, k), Numbers(t, b, b * k // t, k, 1)
        levels = excess(contents, t, False)[0], excess(contents, t, True)[0]
        assert any(
            (one.level, other.level) == levels
            for number in range(max(levels) + 1)
            for one, other in pairs_of_sides(numbers, number, True)
        )


def _found(trial: Trial, finer: bool = False) -> tuple[Any, Fraction]:
    case = case_of(trial)
    given = problem(trial, case.implied)
    assert given is not None
    bound = (local.find_finer if finer else local.find)(given)
    assert bound is not None
    return bound.certificate["multipliers"], bound.exact


@pytest.mark.parametrize("aim", [ALL_PAIRS, OVERALL])
@pytest.mark.parametrize("shape", [(9, 18, 2), (10, 20, 3), (8, 12, 4), (12, 8, 3)])
@pytest.mark.parametrize("finer", [False, pytest.param(True, marks=pytest.mark.slow)])
def test_finder_and_checker_agree(aim: Any, shape: tuple[int, int, int], finer: bool) -> None:
    """The checker derives the finder's bound again: not above it, and not far below."""
    trial = equal_trial(*shape, aim)
    multipliers, exact = _found(trial, finer)
    claim = derive(case_of(trial), Part("multipliers", multipliers))
    assert claim.supports(exact)
    assert efficiency_of(claim) == pytest.approx(float(exact), rel=1e-12)


def test_a_resolvable_trial() -> None:
    """A square lattice with two replicates is optimal (Cheng & Bailey 1991): the bound is not below it."""
    trial, _ = square_lattice(3, 2)
    multipliers, exact = _found(trial)
    assert derive(case_of(trial), Part("multipliers", multipliers)).supports(exact)
    k, r = 3, 2
    assert float(exact) >= (k + 1) / (k + 1 + r / (r - 1)) - 1e-12


def test_balanced_is_reached_and_not_passed() -> None:
    """The projective plane of order 2 has A = λt/(rk) = 7/9 (Yates 1936)."""
    trial = equal_trial(7, 7, 3)
    assert len(FANO) == trial.b
    _, exact = _found(trial)
    assert Fraction(7, 9) <= exact <= Fraction(7, 9) + Fraction(1, 10**7)


def _places(value: Any, path: tuple[Any, ...] = ()) -> list[tuple[Any, ...]]:
    if isinstance(value, dict):
        return [place for key, held in value.items() for place in _places(held, (*path, key))]
    if isinstance(value, list):
        return [place for at, held in enumerate(value) for place in _places(held, (*path, at))]
    return [path]


def _changed(multipliers: Any, path: tuple[Any, ...], change: Any) -> Any:
    copy = json.loads(json.dumps(multipliers))
    holder = copy
    for key in path[:-1]:
        holder = holder[key]
    held = holder[path[-1]]
    holder[path[-1]] = held + 1 if isinstance(held, int) else str(change(Fraction(held)))
    return copy


@pytest.mark.parametrize("finer", [False, pytest.param(True, marks=pytest.mark.slow)])
def test_no_number_can_be_tampered_with(finer: bool) -> None:
    """Each number of a certificate changed: it is refused, or still proves nothing that a plan refutes."""
    trial = equal_trial(9, 18, 2)
    multipliers, _ = _found(trial, finer)
    best = 0.511140236  # of the best plan of long searches
    draw = random.Random(5)
    places = _places(multipliers)
    case = case_of(trial)
    for path in places if len(places) < 90 else draw.sample(places, 90):
        for change in (lambda x: x + Fraction(1, 50), lambda x: x - Fraction(1, 50)):
            try:
                claim = derive(case, Part("multipliers", _changed(multipliers, path, change)))
            except Refuted:
                continue
            assert efficiency_of(claim) >= best


def test_a_certificate_must_cover_every_level() -> None:
    """A level or a form left out is refused; so is a certificate without the further levels."""
    trial = equal_trial(10, 20, 3)
    multipliers, _ = _found(trial, finer=True)
    case = case_of(trial)
    assert len(multipliers["levels"]) > 2
    for at, level in enumerate(multipliers["levels"]):
        if level:
            copy = json.loads(json.dumps(multipliers))
            del copy["levels"][at][0]
            with pytest.raises(Refuted):
                derive(case, Part("multipliers", copy))
    copy = json.loads(json.dumps(multipliers))
    del copy["levels"][-1]
    # what stood for one level alone does not stand for all further ones
    with pytest.raises(Refuted):
        derive(case, Part("multipliers", copy))


def test_a_trial_of_another_kind_is_refused() -> None:
    """Nothing is said where replications differ or blocks are complete."""
    multipliers, _ = _found(equal_trial(6, 8, 3))
    for trial in (trial_of(((0, 1, 2), (0, 1, 3), (0, 2, 4)), 5), equal_trial(3, 4, 3)):
        with pytest.raises(Refuted):
            derive(case_of(trial), Part("multipliers", multipliers))


@pytest.mark.parametrize("x", [Fraction(0), Fraction(-1, 3), Fraction(-7), Fraction(-29)])
def test_exponential_from_above(x: Fraction) -> None:
    """e^x for x ≤ 0, rounded up by little."""
    above = exponential_above(x)
    assert np.exp(float(x)) * (1 - 1e-15) <= float(above) <= np.exp(float(x)) * (1 + 1e-12)


LISTED = [(7, 14, 2, 0.544982699), (8, 20, 2, 0.545332438), (14, 7, 4, 0.72184030), (8, 16, 3, 0.755580786)]
"""(t, b, k, A) of the best plan of long searches where few graphs are possible."""


@pytest.mark.parametrize(("t", "b", "k", "reached"), LISTED)
def test_few_graphs_are_all_looked_at(t: int, b: int, k: int, reached: float) -> None:
    """Where M, or what it leaves, is a union of cycles the bound is the best plan, and the checker agrees."""
    trial = equal_trial(t, b, k)
    multipliers, exact = _found(trial)
    assert float(exact) == pytest.approx(reached, rel=1e-8)
    assert "cycles" in multipliers["levels"][0][0]
    assert derive(case_of(trial), Part("multipliers", multipliers)).supports(exact)


@pytest.mark.parametrize("t", [5, 8, 13, 30])
def test_the_cycle(t: int) -> None:
    """k = r = 2: only the cycle is connected; its resistances sum to (t³ − t)/12 (Klein & Randić 1993)."""
    trial = equal_trial(t, t, 2)
    multipliers, exact = _found(trial)
    average = 2 * (t**3 - t) / 12 / (t * (t - 1) / 2)
    assert float(exact) == pytest.approx(1 / average, rel=1e-12)
    assert derive(case_of(trial), Part("multipliers", multipliers)).supports(exact)


@pytest.mark.parametrize(("degree", "shift", "turn"), [(2, 7, 1), (2, 7, -1), (1, 4, -1), (0, 3, 1)])
def test_listed_graphs_by_their_eigenvalues(degree: int, shift: int, turn: int) -> None:
    """Σ 1/(shift − turn θ), θ of a graph built as a matrix."""
    for components in _graphs(12, degree):
        matrix = np.zeros((12, 12))
        start = 0
        for size in components:
            for i in range(size):
                if size > 1:
                    matrix[start + i, start + (i + 1) % size] = matrix[start + (i + 1) % size, start + i] = 1
            start += size
        theta = np.sort(np.linalg.eigvalsh(matrix))[:-1]
        found = _inverses(components, degree, shift, turn)
        assert found is not None
        assert float(found) == pytest.approx((1 / (shift - turn * theta)).sum(), rel=1e-12)


def test_graphs_are_listed_only_where_they_are_few() -> None:
    """A listing of graphs of degree 4, or of a level that is not even, is refused."""
    trial = equal_trial(9, 18, 2)
    multipliers, _ = _found(trial)
    for level in (0, 1):
        for side in ("primal", "dual", "other"):
            copy = json.loads(json.dumps(multipliers))
            copy["levels"][level][0] = {"cycles": side, "of": "graph"}
            with pytest.raises(Refuted):
                derive(case_of(trial), Part("multipliers", copy))


@pytest.mark.parametrize(("t", "k"), [(22, 7), (46, 10)])
def test_a_symmetric_design_that_cannot_be(t: int, k: int) -> None:
    """(22, 7, 2) and (46, 10, 2): even t needs k − λ to be a square (Schützenberger 1949)."""
    trial = equal_trial(t, t, k)
    multipliers, exact = _found(trial)
    meetings = k * (k - 1) // (t - 1)
    balanced = Fraction(meetings * t, k * k)
    assert isqrt(k - meetings) ** 2 != k - meetings
    assert exact < balanced
    assert derive(case_of(trial), Part("multipliers", multipliers)).supports(exact)


@pytest.mark.parametrize(("size", "shift", "turn"), [(1, 3, 1), (2, 4, -1), (5, 3, -1), (6, 1, 1), (7, 0, 1)])
def test_determinants_of_components(size: int, shift: int, turn: int) -> None:
    """Against floating point."""
    matrix = np.zeros((size, size))
    for i in range(size if size > 1 else 0):
        matrix[i, (i + 1) % size] = matrix[(i + 1) % size, i] = 1
    expected = np.linalg.det(shift * np.eye(size) - turn * matrix)
    assert float(_determinant(size, shift, turn)) == pytest.approx(expected, abs=1e-9)


@pytest.mark.parametrize("finer", [False, True])
def test_no_mutation_gives_a_traceback(finer: bool) -> None:
    """Whatever stands in the multipliers, the answer is a claim or a refusal."""
    trial = equal_trial(10, 20, 3)
    multipliers, _ = _found(trial, finer)
    case, draw = case_of(trial), random.Random(int(finer))
    for _ in range(150):
        with suppress(Refuted):
            derive(case, Part("multipliers", mutated(multipliers, draw)))
