"""No plan beats a bound: the worst mistake there could be, looked for in every way."""

from __future__ import annotations

import random

import numpy as np
import pytest
from hypothesis import assume, given, settings
from hypothesis import strategies as st

from search.efficiency.aims import weights
from search.efficiency.bounds import ARGUMENTS, all_bounds, best_bound, program
from search.efficiency.evaluator import score
from search.efficiency.records import Bound
from search.efficiency.reference import reference_product, reference_variance
from search.foundation.errors import Impossible
from search.trial.checker import broken_rules
from search.trial.limits import Limits, limits
from search.trial.records import Aim, AimKind, Block, Contents, Rules, Treatment, Trial
from search.trial.tables import incidence
from tests.drawn import all_plans, small_trials
from tests.efficiency.plans import (
    AGAINST_CONTROL,
    affine_plane,
    dual,
    equal_trial,
    improved,
    planted,
    square_lattice,
    trial_of,
)

ROUNDING = 1e-10
"""What floats may add to an efficiency."""


def _limits(trial: Trial) -> Limits:
    try:
        return limits(trial)
    except Impossible:
        assume(False)
        raise


def _is_beaten(bound: Bound, reached: float) -> bool:
    if bound.aim.counts_meetings:
        return reached < bound.exact
    return reached > bound.value + ROUNDING


def _best(trial: Trial, plans: list[Contents]) -> float | None:
    """The best score of all plans; None where that is an efficiency and no plan is connected."""
    counts = np.array([incidence(contents, trial.t) for contents in plans], dtype=float)
    if trial.aim.kind.counts_meetings:
        meetings = counts @ counts.transpose(0, 2, 1)
        meetings[:, np.arange(trial.t), np.arange(trial.t)] = 0
        return float((meetings**2).sum(axis=(1, 2)).min() / 2)
    efficiencies = _efficiencies(trial, counts)
    return float(efficiencies.max()) if len(efficiencies) else None


def _efficiencies(trial: Trial, counts: np.ndarray) -> np.ndarray:
    """Of all connected plans, many at a time."""
    information = -(counts / counts.sum(axis=1, keepdims=True)) @ counts.transpose(0, 2, 1)
    diagonal = np.arange(trial.t)
    information[:, diagonal, diagonal] += counts.sum(axis=2)
    values = np.linalg.eigvalsh(information)
    connected = values[:, 1] > 1e-9
    matrix = weights(trial)
    if trial.aim.kind is AimKind.OVERALL:
        logs = np.log(values[connected, 1:]).sum(axis=1) - np.log(float(reference_product(trial)))
        return np.exp(logs / (trial.t - 1))
    inverse = np.linalg.inv(information[connected] + 1 / trial.t)
    if trial.aim.kind is AimKind.WORST_PAIR:
        own = inverse[:, diagonal, diagonal]
        pairs = own[:, :, None] + own[:, None, :] - 2 * inverse
        return float(reference_variance(trial)) / pairs.max(axis=(1, 2))
    assert matrix is not None
    return float(reference_variance(trial)) / np.einsum("ij,pij->p", matrix, inverse)


def _no_plan_beats_a_bound(trial: Trial, most: int) -> None:
    implied = _limits(trial)
    try:
        plans = list(all_plans(trial, most))
    except OverflowError:
        assume(False)
    assume(plans)
    best = _best(trial, plans)
    assume(best is not None)
    assert best is not None
    assert best <= 1 + ROUNDING or trial.aim.kind.counts_meetings
    for bound in all_bounds(trial, implied):
        assert not _is_beaten(bound, best), bound.argument


@settings(max_examples=80, deadline=None)
@given(small_trials())
def test_no_plan_at_all_beats_a_bound(trial: Trial) -> None:
    """Every plan of small trials, all rules and aims mixed, against every bound."""
    _no_plan_beats_a_bound(trial, 2000)


@pytest.mark.slow
@settings(max_examples=1000, deadline=None)
@given(small_trials(most_plots=13))
def test_no_plan_at_all_beats_a_bound_in_many_trials(trial: Trial) -> None:
    """The same, many more trials and larger ones."""
    _no_plan_beats_a_bound(trial, 8000)


@settings(max_examples=80, deadline=None)
@given(planted(), st.integers(0, 2**32))
def test_no_good_plan_beats_a_bound(drawn: tuple[Trial, Contents], seed: int) -> None:
    """Plans made better by exchanges, in trials with several replicates, more treatments and more rules."""
    trial, contents = drawn
    reached = score(trial, improved(trial, contents, seed, tries=30)).aim
    for bound in all_bounds(trial, limits(trial)):
        assert not _is_beaten(bound, reached), bound.argument


@pytest.mark.slow
@settings(max_examples=600, deadline=None)
@given(planted(most_treatments=10), st.integers(0, 2**32))
def test_no_good_plan_beats_a_bound_in_many_trials(drawn: tuple[Trial, Contents], seed: int) -> None:
    """The same, many more trials and a longer search in each."""
    trial, contents = drawn
    reached = score(trial, improved(trial, contents, seed, tries=150)).aim
    for bound in all_bounds(trial, limits(trial)):
        assert not _is_beaten(bound, reached), bound.argument


@settings(max_examples=60, deadline=None)
@given(planted(most_treatments=6), st.integers(0, 2**32))
def test_any_prices_give_a_bound(drawn: tuple[Trial, Contents], seed: int) -> None:
    """With prices drawn at random instead of solved for, the bounds are weak but still hold."""
    trial, contents = drawn
    rng = random.Random(seed)

    def drawn_prices(self: program.Program) -> program.Solution:
        prices = {row: rng.gauss(0, 1) for row in self._rows}
        return program.Solution(prices, np.zeros(self.columns), 0.0)

    reached = score(trial, improved(trial, contents, seed, tries=10)).aim
    with pytest.MonkeyPatch.context() as patch:
        patch.setattr(program.Program, "solve", drawn_prices)
        bounds = list(all_bounds(trial, limits(trial)))
    assert not any(_is_beaten(bound, reached) for bound in bounds)


def test_a_program_that_is_not_solved_gives_no_bound(monkeypatch: pytest.MonkeyPatch) -> None:
    """A numerical failure drops the bound; what needs no solver stays."""
    monkeypatch.setattr(program.Program, "solve", lambda self: None)
    trial = equal_trial(6, 8, 3)
    names = [bound.argument for bound in all_bounds(trial, limits(trial))]
    assert names == ["first order", "replication"]


@settings(max_examples=60, deadline=None)
@given(planted())
def test_certificates_are_complete(drawn: tuple[Trial, Contents]) -> None:
    """Each bound names its argument and its aim, and the best is the lowest."""
    trial, _ = drawn
    implied = limits(trial)
    bounds = list(all_bounds(trial, implied))
    for bound in bounds:
        assert bound.aim is trial.aim.kind
        assert set(bound.certificate) == {"kind", "statement", "multipliers"}
        assert bound.argument.startswith(bound.certificate["kind"])
        assert bound.certificate["statement"].startswith("no plan that this trial admits has")
        assert bound.exact.denominator <= 10**15
    best = best_bound(trial, implied)
    if best is None:
        # where treatments may repeat; and averages may say no more of the worst pair than 1
        assert trial.aim.kind in (AimKind.EVEN_MEETINGS, AimKind.WORST_PAIR)
        return
    assert not any(bound.beats(best) for bound in bounds)


def test_a_caller_without_time_gets_the_quick_ones() -> None:
    """Arguments that take longer are left out, and only those."""
    trial = equal_trial(6, 8, 3)
    every = [bound.argument for bound in all_bounds(trial, limits(trial))]
    quick = [bound.argument for bound in all_bounds(trial, limits(trial), lambda seconds: False)]
    some = [bound.argument for bound in all_bounds(trial, limits(trial), lambda seconds: seconds < 2)]
    assert quick == every[:4]
    assert some == every[:-1]


def test_every_argument_is_in_the_registry_once() -> None:
    """Names are those of the certificates; every aim has at least two arguments."""
    names = [argument.name for argument in ARGUMENTS]
    assert len(set(names)) == len(names)
    for kind in AimKind:
        trial = equal_trial(4, 4, 3, Aim(kind), controls=1)
        # The largest variance is not below the average, so what bounds that bounds the worst pair too.
        asked = [trial, equal_trial(4, 4, 3)] if kind is AimKind.WORST_PAIR else [trial]
        assert sum(any(argument.applies(x) for x in asked) for argument in ARGUMENTS) >= 2


BALANCED = [
    (7, 3, 3, 7), (9, 3, 4, 12), (13, 4, 4, 13), (6, 3, 5, 10), (16, 4, 5, 20), (11, 5, 5, 11),
    (10, 4, 6, 15), (25, 5, 6, 30), (15, 7, 7, 15), (8, 4, 7, 14), (28, 7, 9, 36), (91, 10, 10, 91),
]  # fmt: skip
"""(t, k, r, b) of balanced designs; Cochran & Cox 1957, chapter 11 (from memory)."""


@pytest.mark.parametrize(("t", "k", "r", "b"), BALANCED)
@pytest.mark.parametrize("kind", [AimKind.ALL_PAIRS, AimKind.OVERALL])
def test_balanced_designs_meet_the_bound(t: int, k: int, r: int, b: int, kind: AimKind) -> None:
    """E = λt/(rk) with λ = r(k−1)/(t−1) exactly (Yates 1936), and the simplest argument says so."""
    trial = equal_trial(t, b, k, Aim(kind))
    bound = best_bound(trial, limits(trial))
    assert bound is not None
    efficiency = r * (k - 1) * t / ((t - 1) * r * k)
    assert bound.value == pytest.approx(efficiency, rel=2e-15)
    assert bound.argument == "first order"


@pytest.mark.parametrize(("plan", "points"), [(affine_plane(3), 9), (affine_plane(5), 25)])
def test_duals_of_balanced_designs_meet_the_bound(plan: Contents, points: int) -> None:
    """Linked blocks (Youden 1951) are optimal, and the bound is exactly their efficiency."""
    t = len(plan)
    trial = trial_of(dual(plan, points), t)
    bound = best_bound(trial, limits(trial))
    assert bound is not None
    assert bound.value == pytest.approx(score(trial, dual(plan, points)).A, rel=1e-12)


def test_the_dual_of_sixteen_in_fours() -> None:
    """(t, b, k) = (20, 16, 5): A = 0.8351648 (linked blocks, Youden 1951)."""
    trial = equal_trial(20, 16, 5)
    bound = best_bound(trial, limits(trial))
    assert bound is not None
    assert bound.value == pytest.approx(0.8351648, abs=5e-8)


@pytest.mark.parametrize(("k", "r"), [(3, 2), (3, 3), (3, 4), (5, 2), (5, 3), (7, 2), (7, 4)])
def test_square_lattices_meet_the_bound(k: int, r: int) -> None:
    """Among resolvable plans square lattices are optimal (Cheng & Bailey 1991)."""
    trial, contents = square_lattice(k, r)
    bound = best_bound(trial, limits(trial))
    assert bound is not None
    assert bound.value == pytest.approx(score(trial, contents).A, rel=1e-9)


def test_a_limit_on_a_sum_tightens_the_bound() -> None:
    """Two treatments that never share a block, in five blocks: five plots together; six would be best."""

    def trial(apart: bool) -> Trial:
        return Trial(
            "sum",
            tuple(Treatment(f"T{i}", 1, 5, control=i == 0) for i in range(4)),
            tuple(Block(f"b{j}", 2) for j in range(5)),
            rules=Rules(never_share_block=((0, 1),) if apart else ()),
            aim=AGAINST_CONTROL,
        )

    free, tied = trial(apart=False), trial(apart=True)
    assert limits(tied).sums
    loose = next(b for b in all_bounds(free, limits(free)) if b.argument == "replication")
    tight = next(b for b in all_bounds(tied, limits(tied)) if b.argument == "replication")
    assert tight.exact < loose.exact
    assert tight.certificate["multipliers"]["sums"]


REACHED = [
    (6, 8, 3, 0.787589499), (8, 8, 3, 0.746666667), (10, 10, 3, 0.705895208), (12, 15, 4, 0.810164746),
    (12, 20, 6, 0.908212435), (16, 12, 4, 0.769230769), (18, 27, 4, 0.791399346), (20, 16, 10, 0.946135619),
    (24, 18, 4, 0.730383206), (25, 20, 5, 0.816847270), (27, 9, 6, 0.795918367), (30, 18, 5, 0.785448966),
    (30, 30, 5, 0.815347495),
]  # fmt: skip
"""(t, b, k, A) of the best plan of six short searches by an earlier prototype of this project."""


@pytest.mark.parametrize(("t", "b", "k", "reached"), REACHED)
def test_bounds_stay_above_what_was_reached(t: int, b: int, k: int, reached: float) -> None:
    """Equal blocks and replications: above the best plan known, and within 1.7% of it."""
    trial = equal_trial(t, b, k)
    bound = best_bound(trial, limits(trial))
    assert bound is not None
    assert reached - 1e-9 <= bound.value <= reached * 1.017


def test_an_odd_field() -> None:
    """Bays of 8, 8, 8, 8, 8 and 7, replication 3–5, two pairs apart, one variety barred: within 0.5%.

    The pairs that never meet have three plots each, since there are six bays; without that the gap
    would be several percent.
    """
    trial = Trial(
        "odd field",
        (
            Treatment("control", 5, 5, control=True),
            Treatment("scarce", 3, 3),
            *(Treatment(f"V{i}", 3, 5) for i in range(2, 12)),
        ),
        tuple(Block(f"bay {j}", plots) for j, plots in enumerate((8, 8, 8, 8, 8, 7))),
        rules=Rules(never_share_block=((2, 3), (4, 5)), keep_out=((6, 0),)),
    )
    contents = (
        (0, 1, 3, 4, 7, 8, 9, 11),
        (0, 2, 5, 7, 8, 9, 10, 11),
        (0, 1, 3, 5, 6, 9, 10, 11),
        (0, 3, 4, 6, 7, 8, 10, 11),
        (0, 1, 2, 5, 6, 7, 8, 10),
        (2, 4, 6, 7, 9, 10, 11),
    )
    assert not broken_rules(trial, contents)
    bound = best_bound(trial, limits(trial))
    assert bound is not None
    assert bound.argument == "normalised moment"
    assert 0 <= 1 - score(trial, contents).aim / bound.value <= 0.005
