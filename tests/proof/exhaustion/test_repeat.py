"""A proof by exhaustion is repeated, and what was changed in it is found."""

from __future__ import annotations

import copy
import random
from collections.abc import Callable
from dataclasses import replace
from functools import cache
from typing import Any

import pytest

from search.efficiency.bounds import best_bound
from search.efficiency.bounds.problem import problem
from search.efficiency.exhaustion.proving import case_of, exhausted, worth_of
from search.efficiency.records import Bound
from search.field.planfile import _bound as written
from search.proof.bound import bounded
from search.proof.certificates.case import Case
from search.proof.records import Refuted
from search.trial.limits import limits
from search.trial.records import Trial
from search.trial.tables import tables
from tests.efficiency.plans import OVERALL, equal_trial, improved
from tests.equal_plans import random_plan


def case_for(trial: Trial) -> Case:
    """The trial as the checker sees it."""
    return Case(trial, tables(trial), limits(trial))


@cache
def proof_of(t: int, b: int, k: int, overall: bool = False) -> tuple[Trial, Bound]:
    """A trial and what exhaustion proves of it, from a middling plan on."""
    trial = equal_trial(t, b, k, OVERALL) if overall else equal_trial(t, b, k)
    given = problem(trial, limits(trial))
    assert given is not None
    case = case_of(given)
    assert case is not None
    contents = improved(trial, random_plan(random.Random(3), t, b, k), 3, tries=100)
    otherwise = best_bound(trial, limits(trial))
    for _ in range(9):
        found = exhausted(given, case, worth_of(case, contents), otherwise=otherwise)
        assert found is not None
        if found.contents is None:
            break
        contents = found.contents
    assert found.bound is not None
    return trial, found.bound


def claim_of(bound: Bound) -> dict[str, Any]:
    """The bound as a plan file has it."""
    return copy.deepcopy(written(bound))


@pytest.mark.parametrize(("t", "b", "k", "overall"), [(6, 8, 3, False), (8, 6, 4, False), (9, 18, 2, True)])
def test_a_true_proof_is_repeated(t: int, b: int, k: int, overall: bool) -> None:
    """From either side, both aims; taken on trust without being asked, repeated when asked."""
    trial, bound = proof_of(t, b, k, overall)
    findings, exact = bounded(claim_of(bound), case_for(trial))
    assert exact == bound.exact
    assert all(finding.ok for finding in findings)
    assert [finding.on_trust for finding in findings] == [False, True, False]
    findings, _ = bounded(claim_of(bound), case_for(trial), exhaust=True)
    assert not any(finding.on_trust for finding in findings)
    assert "listed again" in findings[1].detail


@pytest.mark.slow
@pytest.mark.parametrize(("t", "b", "k"), [(12, 15, 4), (12, 18, 4), (16, 24, 2)])
def test_a_long_proof_is_repeated(t: int, b: int, k: int) -> None:
    """Thousands of graphs, and some that the solver must refute."""
    trial, bound = proof_of(t, b, k)
    findings, _ = bounded(claim_of(bound), case_for(trial), exhaust=True)
    assert all(finding.ok and not finding.on_trust for finding in findings)


def set_to(*path: str, value: Any) -> Callable[[dict[str, Any]], None]:
    """A change of one value of the multipliers."""

    def change(multipliers: dict[str, Any]) -> None:
        place = multipliers
        for key in path[:-1]:
            place = place[key]
        place[path[-1]] = value

    return change


AT_ONCE = [
    set_to("side", value="both"),
    set_to("side", value="dual"),
    set_to("better", value=2),
    set_to("better", value=-1),
    set_to("graphs", value=0),
    set_to("graphs", value="2"),
    set_to("refuted", "counting", value=1),
    set_to("refuted", "literature", value=1),
    set_to("refuted", value={"counting": 0, "solver": 0, "literature": 1}),
    set_to("worth", value="-51/10"),
    set_to("levels", value=[]),
    set_to("more", value=1),
]


@pytest.mark.parametrize("change", AT_ONCE)
def test_what_does_not_add_up_is_refuted_at_once(change: Callable[[dict[str, Any]], None]) -> None:
    """Without repeating anything; (6, 8, 3) has 2 graphs, of which 1 is better and refuted by the solver."""
    trial, bound = proof_of(6, 8, 3)
    claim = claim_of(bound)
    change(claim["certificate"]["multipliers"])
    with pytest.raises(Refuted):
        bounded(claim, case_for(trial))


def _none_better(multipliers: dict[str, Any]) -> None:
    multipliers["better"], multipliers["refuted"]["solver"] = 0, 0


def _by_counting(multipliers: dict[str, Any]) -> None:
    multipliers["refuted"] = {"counting": 1, "solver": 0, "literature": 0}


@pytest.mark.parametrize("change", [set_to("graphs", value=3), _none_better, _by_counting])
def test_false_counts_are_found_when_it_is_repeated(change: Callable[[dict[str, Any]], None]) -> None:
    """One graph more, no better one, another way to refute it."""
    trial, bound = proof_of(6, 8, 3)
    claim = claim_of(bound)
    change(claim["certificate"]["multipliers"])
    bounded(claim, case_for(trial))
    with pytest.raises(Refuted):
        bounded(claim, case_for(trial), exhaust=True)


def test_a_bound_below_the_best_plan_is_found_when_it_is_repeated() -> None:
    """A worth that no plan is said to pass although one does: its graph is not refuted."""
    trial, bound = proof_of(8, 12, 2)
    claim = claim_of(bound)
    multipliers = claim["certificate"]["multipliers"]
    multipliers["worth"] = "-1437/100"  # the best plan has −14.357
    multipliers["better"], multipliers["refuted"]["solver"] = 1, 1
    with pytest.raises(Refuted, match="there is a plan"):
        bounded(claim, case_for(trial), exhaust=True)


def test_the_bound_beside_is_proved_too() -> None:
    """The bound without exhaustion must hold, be the weaker one, and stand beside no other kind."""
    trial, bound = proof_of(6, 8, 3)
    claim = claim_of(bound)
    claim["otherwise"]["exact"] = "1/2"
    with pytest.raises(Refuted):
        bounded(claim, case_for(trial))
    assert bound.otherwise is not None
    claim = claim_of(bound.otherwise) | {"otherwise": claim_of(bound.otherwise)}
    with pytest.raises(Refuted):
        bounded(claim, case_for(trial))
    without = replace(bound, otherwise=None)
    findings, _ = bounded(claim_of(without), case_for(trial))
    assert len(findings) == 2
