"""What is kept for one trial holds for the same problem in other numbers."""

from __future__ import annotations

import json
import random
from dataclasses import replace
from fractions import Fraction
from pathlib import Path
from typing import Any

import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from search.efficiency.bounds import all_bounds
from search.foundation.errors import Impossible
from search.foundation.stopping import Ended, Limits
from search.proof.bound import bounded
from search.proof.certificates.case import case_of
from search.runs.keeping import Keeping, covers, recall, remember, run_of
from search.runs.kept import problem_of
from search.runs.store import Store
from search.trial.canonical import canonical
from search.trial.carrying import from_canonical, to_canonical
from search.trial.limits import limits
from search.trial.reading import trial_from_document
from search.trial.records import Trial
from tests.drawn import small_trials, tiny_trial
from tests.runs.made import made_plan
from tests.runs.test_store import AIM, GOOD, bound, problem, run, written_to
from tests.trial.test_canonical import renumbered


@settings(max_examples=60, deadline=None)
@given(small_trials(), st.randoms(use_true_random=False))
def test_carried_certificates_still_prove_their_bounds(trial: Trial, draw: random.Random) -> None:
    """The checker, which shares no code with the finders, accepts every certificate carried to a
    renumbered trial through the canonical numbering."""
    try:
        bounds = list(all_bounds(trial, limits(trial)))
    except Impossible:
        return
    other = renumbered(trial, draw)
    to, back = to_canonical(canonical(trial)), from_canonical(canonical(other))
    case = case_of(other)
    for found in bounds:
        claim = {
            "aim": found.aim.value,
            "value": found.value,
            "argument": found.argument,
            "exact": f"{found.exact.numerator}/{found.exact.denominator}",
            "certificate": back.certificate(to.certificate(found.certificate)),
        }
        (finding,), exact = bounded(claim, case)
        assert finding.ok
        assert exact == found.exact


def test_a_plan_is_recalled_in_the_numbers_of_another_trial(tmp_path: Path) -> None:
    """What was kept for one trial serves the same problem under other names and in another order."""
    rules = {"never_share_block": [["A", "D"]], "keep_out": {"B": ["x"]}}
    first = trial_from_document(
        {
            "trial": "one",
            "treatments": ["A", "B", "C", "D", "E"],
            "blocks": {"x": 2, "y": 3, "z": 3},
            "rules": rules,
        }
    )
    rules = {"keep_out": {"v": ["bay"]}, "never_share_block": [["u", "w"]]}
    second = trial_from_document(
        {
            "trial": "two",
            "treatments": ["s", "u", "v", "w", "x"],
            "blocks": {"r": 3, "bay": 2, "q": 3},
            "rules": rules,
        }
    )
    found = made_plan(first, ((2, 3), (0, 1, 4), (1, 3, 4)))
    with Store(tmp_path / "store.sqlite") as store:
        remember(store, canonical(first), found, run_of(found, Limits(moves=5), 1))
        again = recall(store, second, canonical(second))
        assert again.contents is not None
        assert again.plan is not None
        assert sorted(map(len, again.contents)) == [2, 3, 3]
        assert made_plan(second, again.contents).score.aim == pytest.approx(found.score.aim)


@pytest.mark.parametrize(
    "change",
    [("contents", json.dumps([[0, 1], [0, 1], [1, 2]])), ("score", 0.9)],
    ids=["rules broken", "score untrue"],
)
def test_a_false_plan_is_dropped_when_recalled(tmp_path: Path, change: tuple[str, Any]) -> None:
    """A kept plan that breaks the trial's rules, or claims too much, is ignored and makes room."""
    trial = trial_from_document(
        {"trial": "tiny", "treatments": ["A", "B", "C"], "blocks": {"count": 3, "plots": 2}, "plots_each": 2}
    )
    found = made_plan(trial, GOOD)
    path = tmp_path / "store.sqlite"
    with Store(path) as store:
        remember(store, canonical(trial), found, run_of(found, Limits(moves=5), 1))
        assert recall(store, trial, canonical(trial)).contents == GOOD
    written_to(path, f"UPDATE plan SET {change[0]} = ?", change[1])
    with Store(path) as store:
        assert recall(store, trial, canonical(trial)).contents is None
        assert store.best(canonical(trial).digest, AIM).plan is None  # type: ignore[union-attr]


def test_a_bound_below_the_kept_plan_is_dropped(tmp_path: Path) -> None:
    """A kept bound that the kept plan contradicts is not believed."""
    trial = tiny_trial()
    numbering = canonical(trial)
    found = made_plan(trial, GOOD)
    with Store(tmp_path / "store.sqlite") as store:
        remember(store, numbering, found, run_of(found, Limits(moves=5), 1))
        store.keep(problem(numbering.digest), AIM, bound=bound(Fraction(1, 2)))
        assert recall(store, trial, numbering).bound is None
        store.keep(problem(numbering.digest), AIM, bound=bound(Fraction(3, 4)))
        assert recall(store, trial, numbering).bound is not None


@pytest.mark.parametrize(
    ("ended", "limits", "covered"),
    [
        (Ended.MOVES, Limits(moves=100), True),
        (Ended.MOVES, Limits(moves=101), False),
        (Ended.MOVES, Limits(seconds=0.1), True),
        (Ended.MOVES, Limits(seconds=0.2), False),
        (Ended.MOVES, Limits(seconds=9, moves=100), True),
        (Ended.BOUND_MET, Limits(seconds=1000), True),
        (Ended.INTERRUPTED, Limits(moves=10), False),
        (Ended.SECONDS, Limits(seconds=5), True),
        (Ended.SECONDS, Limits(seconds=6), False),
    ],
)
def test_a_run_covers_no_larger_budget(ended: Ended, limits: Limits, covered: bool) -> None:
    """A run stands for another only where it went as far, or ended because it could not do better."""
    seconds = 5.0 if ended is Ended.SECONDS else 0.1
    ran = replace(run(0.5), ended_by=str(ended), limit_seconds=5.0, seconds=seconds)
    assert covers(ran, limits) == covered


def test_of_equally_even_plans_the_more_precise_is_kept(tmp_path: Path) -> None:
    """For even meetings the lower sum is better, then the smaller average variance, told and kept alike."""
    trial, key = tiny_trial(aim="even meetings"), "even meetings"
    with Keeping(trial, tmp_path / "store.sqlite") as keeping:
        found = made_plan(trial, GOOD)
        remember(keeping.store, keeping.numbering, found, run_of(found, Limits(moves=5), 1))
        reached, average = found.score.aim, found.score.average_pair_variance
        assert reached == 3
        assert average is not None
        assert average == pytest.approx(4 / 3)
        assert keeping.better_than(reached, average) is None
        assert keeping.better_than(reached, average + 0.1) == reached
        assert keeping.better_than(reached, None) == reached
        assert keeping.better_than(reached + 1, average) == reached
        assert keeping.better_than(reached - 1, average) is None
        problem = problem_of(trial, keeping.numbering)
        for more, better in ((0.1, False), (-0.1, True)):
            kept = keeping.store.best(problem.digest, key)
            assert kept is not None
            assert kept.plan is not None
            other = replace(kept.plan, objective=average + more, seed=99)
            keeping.store.keep(problem, key, plan=other)
            now = keeping.store.best(problem.digest, key)
            assert now is not None
            assert (now.plan == other) is better


def test_a_better_kept_plan_is_told(tmp_path: Path) -> None:
    """The kept efficiency is told where it is above the one given by more than rounding."""
    trial = tiny_trial()
    with Keeping(trial, tmp_path / "store.sqlite") as keeping:
        found = made_plan(trial, GOOD)
        remember(keeping.store, keeping.numbering, found, run_of(found, Limits(moves=5), 1))
        assert keeping.better_than(found.score.aim, None) is None
        assert keeping.better_than(0.5, None) == found.score.aim
        keeping.issued(found, "K7-QX")
        assert keeping.store.show("K7-QX")[0].problem.name == "tiny"
