"""No certificate proves a falsehood: whatever its multipliers, no plan passes the bound."""

from __future__ import annotations

import random
from fractions import Fraction
from typing import Any

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from search.foundation.errors import Impossible
from search.proof.certificates import KINDS, OF_ANY_FILLING, by_meets, by_pairs, exhaustion, trace_root
from search.proof.certificates.case import case_of
from search.proof.parts import Part
from search.proof.records import Refuted
from search.trial.reading import trial_from_document
from search.trial.records import AimKind, Trial
from tests.drawn import all_plans, small_trials, tiny_trial
from tests.proof.certificates.brute import (
    any_multipliers,
    best_score,
    derived,
    efficiency_of,
    is_passed,
    sharpened,
)
from tests.proof.plans import fano_trial, information, weight_matrix

CLIMB = 12
LOCAL = "local spectral"
"""Its multipliers must fit a polynomial below a curve: see test_local_spectral.py."""
SECOND_MOMENT = {"second moment by pairs": by_pairs, "second moment by block meets": by_meets}
NOT_FOR_REPEATS = (
    *SECOND_MOMENT,
    "normalised moment",
    "second moment against controls",
    "even meetings by pairs",
    "even meetings by block meets",
    "shorted pair",
    "all pairs and the control's own row",
)
"""Kinds for trials in which nothing stands twice in a block."""


def check_every_kind(trial: Trial, seed: int, steps: int) -> None:
    """No plan of the trial is above what any kind of certificate proves with sharpened multipliers."""
    try:
        case = case_of(trial)
    except Impossible:
        return
    best = best_score(trial)
    if best is None:
        return
    for name, kind in KINDS.items():
        if (
            name not in (LOCAL, exhaustion.KIND)  # they have tests of their own
            and (case.rules.exact or name in OF_ANY_FILLING)
            and trial.aim.kind in kind.AIMS
            and (case.nothing_twice or name not in NOT_FOR_REPEATS)
        ):
            claim = sharpened(name, case, random.Random(seed), steps)
            assert not is_passed(claim, best), name


@given(small_trials(), st.integers(0, 10**9))
@settings(max_examples=250, deadline=None)
def test_no_plan_passes_any_bound(trial: Trial, seed: int) -> None:
    """All plans of small trials, all rules and aims mixed, multipliers at random and then sharpened."""
    check_every_kind(trial, seed, CLIMB)


@pytest.mark.slow
@given(small_trials(most_plots=14), st.integers(0, 10**9))
@settings(max_examples=4000, deadline=None)
def test_no_plan_passes_any_bound_at_length(trial: Trial, seed: int) -> None:
    """The same on many more trials, multipliers sharpened further."""
    check_every_kind(trial, seed, 40)


@given(small_trials(), st.integers(0, 10**9))
@settings(max_examples=120, deadline=None)
def test_no_plan_has_a_smaller_second_moment(trial: Trial, seed: int) -> None:
    """tr C² of every plan is at least what the multipliers prove, before anything is made of it."""
    try:
        case = case_of(trial)
        plans = list(all_plans(trial, 1500))
    except (Impossible, OverflowError):
        return
    if not case.nothing_twice or not case.rules.exact or not plans:
        return
    least = min(np.sum(information(contents, trial.t) ** 2) for contents in plans)
    draw = random.Random(seed)
    for name, kind in SECOND_MOMENT.items():
        for _ in range(6):
            multipliers = Part("multipliers", any_multipliers(name, case, draw))
            assert float(kind.least_squares(case, multipliers)) <= least + 1e-9


@pytest.mark.parametrize("seed", range(3))
def test_larger_plans_have_no_smaller_second_moment(seed: int) -> None:
    """Random plans of 12 treatments in replicates of unequal blocks, and of 9 with one that never meets."""
    draw = random.Random(seed)
    names = [f"b{j}" for j in range(9)]
    resolvable = trial_from_document(
        {
            "trial": "replicates",
            "treatments": 12,
            "blocks": dict(zip(names, (5, 4, 3) * 3, strict=True)),
            "rules": {"replicates": {f"r{g}": names[3 * g : 3 * g + 3] for g in range(3)}},
        }
    )
    apart = trial_from_document(
        {
            "trial": "apart",
            "treatments": 9,
            "blocks": dict(zip(names, (5, 4, 4) * 3, strict=True)),
            "plots_each": [3, 6],
            "rules": {"never_share_block": [["T01", "T02"]]},
        }
    )
    for trial, plan in ((resolvable, _replicates), (apart, _apart)):
        case, contents = case_of(trial), plan(draw)
        plain = np.sum(information(contents, trial.t) ** 2)
        for name, kind in SECOND_MOMENT.items():
            for _ in range(40):
                multipliers = Part("multipliers", any_multipliers(name, case, draw))
                assert float(kind.least_squares(case, multipliers)) <= plain + 1e-9


def _replicates(draw: random.Random) -> tuple[tuple[int, ...], ...]:
    blocks = []
    for _ in range(3):
        order = draw.sample(range(12), 12)
        blocks += [order[:5], order[5:9], order[9:]]
    return tuple(tuple(sorted(block)) for block in blocks)


def _apart(draw: random.Random) -> tuple[tuple[int, ...], ...]:
    while True:
        blocks = [draw.sample(range(9), k) for k in (5, 4, 4) * 3]
        plots = [sum(i in block for block in blocks) for i in range(9)]
        if min(plots) >= 3 and max(plots) <= 6 and not any({0, 1} <= set(block) for block in blocks):
            return tuple(tuple(sorted(block)) for block in blocks)


def test_balanced_design_is_bounded_exactly() -> None:
    """The first-order bound of (7,7,3) is A = D = λt/(rk) = 7/9 to the last digit (Yates 1936)."""
    claim = derived("first order", case_of(fano_trial()), {})
    assert claim.ratio == Fraction(7, 9)
    assert claim.supports(Fraction(7, 9))
    assert not claim.supports(Fraction(7, 9) - Fraction(1, 10**30))
    overall = derived("first order", case_of(fano_trial(aim="overall")), {})
    assert (overall.ratio, overall.power) == (Fraction(7, 9) ** 6, 6)


def test_replication_by_hand() -> None:
    """With two of three treatments held to one plot, 2/3 (1 + 1 + 1/4) is the least mean variance.

    The reference may use the stated ranges only, so both agree and the bound is 1 at the right price.
    """
    trial = tiny_trial(treatments={"A": {"plots": 1}, "B": {"plots": 1}, "C": {"plots": 4}})
    with pytest.raises(Impossible):
        case_of(trial)  # four plots of C in three blocks
    trial = tiny_trial(treatments={"A": {"plots": 1}, "B": {"plots": 2}, "C": {"plots": 3}})
    assert derived("replication", case_of(trial), {"price": "1/3"}).ratio == 1


def test_second_moment_by_pairs_by_hand() -> None:
    """Four blocks of two for three treatments meet 4 times in 3 pairs: concurrences 1, 1, 2 at the evenest.

    With r = 3, 3, 2 that gives tr C² = Σ (r/2)² + 2 Σ (λ/2)² = 22/4 + 3, and the right prices prove it.
    """
    trial = trial_from_document({"trial": "four", "treatments": 3, "blocks": {"count": 4, "plots": 2}})
    case = case_of(trial)
    plans = list(all_plans(trial))
    true = min(float(np.sum(information(contents, 3) ** 2)) for contents in plans)
    assert true == pytest.approx(22 / 4 + 3)
    # With ν on each meeting the pairs cost 2(a/2)² − 2νa, least at a = 1 and 2 for ν = 3/4;
    # each treatment costs (r/2)² + (ν − μ) r, least at r = 2 and 3 where ν − μ = −5/4.
    multipliers = {
        "rows": [{"treatments": [0, 1, 2], "partners": {"2": "3/4"}}],
        "plots": {"2": "2"},
        "sums": [],
    }
    assert by_pairs.least_squares(case, Part("multipliers", multipliers)) == Fraction(22, 4) + 3


def test_root_for_controls_is_the_numeric_one() -> None:
    """tr W^½ by the closed form is that of the eigenvalues of W, for one control, several and all."""
    for t in (2, 3, 5, 8):
        for q in range(1, t + 1):
            names = {f"x{i}": {"control": True} if i < q else {} for i in range(t)}
            trial = trial_from_document(
                {
                    "trial": "controls",
                    "treatments": names,
                    "blocks": {"count": 3, "plots": t},
                    "aim": "against control",
                }
            )
            plain = float(np.sum(np.sqrt(np.maximum(np.linalg.eigvalsh(weight_matrix(trial)), 0))))
            exact = trace_root._root_for_controls(case_of(trial), Part("multipliers", {}))
            assert float(exact) <= plain + 1e-9
            assert float(exact) == pytest.approx(plain)


def _contrast_trial() -> Trial:
    return tiny_trial(aim={"contrasts": {"one": {"of": {"A": 1, "B": -1}, "weight": 4}}})


def test_contrasts_with_a_rational_root() -> None:
    """One contrast A − B: W has the eigenvalue 2, and a root just below √2 is accepted, one above refused."""
    case = case_of(_contrast_trial())
    good = {"roots": ["1"], "matrix": [["1414/1000"]], "epsilon": "0"}
    claim = derived("trace root", case, good)
    assert efficiency_of(claim) == pytest.approx(1 / (2 / 3), rel=1e-3)
    for spoiled in (
        {"matrix": [["1415/1000"]]},
        {"roots": ["1001/1000"]},
        {"roots": ["-1"]},
        {"roots": []},
        {"epsilon": "-1"},
        {"matrix": [["1", "0"]]},
        {"matrix": [["0"]]},
        {"matrix": "1"},
    ):
        with pytest.raises(Refuted):
            derived("trace root", case, good | spoiled)


def test_long_denominators_are_rounded_on_the_safe_side() -> None:
    """Roots with denominators of 150 digits are checked too; the hair that rounding takes is covered by ε."""
    case = case_of(_contrast_trial())
    long = Fraction(1414 * 10**147 + 1, 10**150 + 7)
    multipliers = {"roots": ["1"], "matrix": [[str(long)]], "epsilon": "1/1000000000000"}
    assert derived("trace root", case, multipliers).ratio > 0
    with pytest.raises(Refuted, match="not below"):
        derived("trace root", case, multipliers | {"matrix": [[str(long + Fraction(1, 999))]]})


@pytest.mark.parametrize(
    ("kind", "multipliers"),
    [
        ("first order", {"price": "1"}),
        ("replication", {}),
        ("replication", {"price": 1}),
        ("replication", {"price": "1/2", "other": "1"}),
        ("replication", {"price": "1/2", "sums": [{"treatments": [0, 1], "price": "1"}]}),
        ("second moment by pairs", {"rows": [{"treatments": [7], "partners": {}}]}),
        ("second moment by pairs", {"rows": [{"treatments": [True], "partners": {}}]}),
        ("second moment by pairs", {"rows": [{"treatments": [0]}, {"treatments": [0]}]}),
        ("second moment by pairs", {"rows": [{"treatments": [0], "partners": {"3": "1"}}]}),
        ("second moment by pairs", {"plots": {"02": "1"}}),
        ("second moment by pairs", {"rows": {}}),
        ("second moment by block meets", {"meets": [{"size": 2, "group": 0, "with": -1, "price": "1"}]}),
        ("second moment by block meets", {"plots": [{"size": 3, "group": -1, "price": "1"}]}),
        ("second moment by block meets", {"plots": [3]}),
        ("even meetings by pairs", {"partners": [{"treatments": [7], "price": "1"}]}),
        ("even meetings by pairs", {"partners": [{"treatments": [0], "price": 1}]}),
        ("even meetings by pairs", {"partners": [{"treatments": [0], "price": "1"}] * 2}),
        ("even meetings by pairs", {"rows": []}),
        ("even meetings by pairs", {"plots": {"02": "1"}}),
        ("even meetings by block meets", {"meets": [{"size": 2, "group": 0, "with": -1, "price": "1"}]}),
        ("even meetings by block meets", {"partners": []}),
        ("shorted pair", {"price": "1"}),
    ],
)
def test_refuses_malformed_multipliers(kind: str, multipliers: dict[str, Any]) -> None:
    """Multipliers for what the trial does not have, or of another form, are refuted in words."""
    with pytest.raises(Refuted):
        derived(kind, case_of(tiny_trial()), multipliers)


def test_prices_of_sums_are_for_sums_that_the_trial_implies() -> None:
    """A price on a limit that holds is taken, one below 0 is refused."""
    rules = {"never_share_block": [["A", "B"]]}
    ranges = {"A": {"plots": [1, 3]}, "B": {"plots": [1, 3]}, "C": {"plots": [1, 3]}}
    case = case_of(tiny_trial(treatments=ranges, rules=rules))
    row = {"treatments": [1, 0], "price": "1/10"}
    assert derived("replication", case, {"price": "1/8", "sums": [row]}).ratio > 0
    with pytest.raises(Refuted, match="below 0"):
        derived("replication", case, {"price": "1/8", "sums": [row | {"price": "-1/10"}]})


def test_second_moment_is_not_for_repeats() -> None:
    """Where a treatment may stand twice in a block the second moment certificates say nothing."""
    case = case_of(tiny_trial(rules={"twice_in_block": True}))
    for kind in NOT_FOR_REPEATS:
        with pytest.raises(Refuted, match="stands twice"):
            derived(kind, case, {})


def test_every_kind_says_for_which_aims_it_speaks() -> None:
    """Each kind names its aims, and every aim has a kind."""
    assert {aim for kind in KINDS.values() for aim in kind.AIMS} == set(AimKind)
