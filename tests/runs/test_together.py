"""What is right alone is right together: filler, random blocks, aims, the store, and proofs of them."""

from __future__ import annotations

import json
from dataclasses import replace
from fractions import Fraction
from pathlib import Path
from typing import Any

import pytest

from search.efficiency.bounds import all_bounds
from search.efficiency.evaluator import score
from search.efficiency.records import Bound
from search.field.planfile import plan_document
from search.field.randomise import lay_out
from search.foundation.documents import canonical_json
from search.foundation.stopping import Limits
from search.proof.bound import bounded
from search.proof.certificates.case import case_of
from search.proof.results import proved
from search.proof.verify import verify
from search.runs.conductor import find
from search.runs.exchange import document
from search.runs.gathering import import_lines
from search.runs.keeping import Keeping, recall, remember, run_of
from search.runs.plan import Plan, Standing
from search.runs.store import Store
from search.runs.sweep import _carried
from search.solvers.crossing import relaxed
from search.solvers.records import Goal
from search.trial.canonical import canonical
from search.trial.carrying import from_canonical, to_canonical
from search.trial.limits import limits
from search.trial.reading import trial_from_document
from search.trial.records import Contents, Trial
from tests.field.made import ISSUED
from tests.runs.made import made_plan
from tests.solvers.problems import problem_of

THREE_OF_FOUR: Contents = ((0, 1, 2), (0, 1, 3), (0, 2, 3), (1, 2, 3))
"""All triples of four treatments: balanced, three plots each."""
TWO_CONTRASTS = {
    "contrasts": {
        "one": {"of": {"A": 1, "B": -1}},
        "two": {"of": {"A": 2, "B": -1, "C": -1}, "weight": 2},
    }
}


def half_empty(**more: Any) -> Trial:
    """Twelve plots of four treatments on ground for sixteen."""
    blocks = {f"b{j}": {"at_most": 4} for j in range(4)}
    treatments = {name: {"control": name == "A"} for name in "ABCD"}
    return trial_from_document(
        {"trial": "half empty", "treatments": treatments, "plots_each": 3, "blocks": blocks, **more}
    )


def searched(trial: Trial, moves: int = 20_000) -> Plan:
    """A plan from a short search, every claim of which the checker proves."""
    plan = find(trial, limits=Limits(moves=moves), seed=1, workers=1)
    file = plan_document(plan, lay_out(trial, plan.contents, 5), ISSUED)
    verdict = verify(json.loads(json.dumps(file)))
    assert verdict.holds, [finding for finding in verdict.findings if not finding.ok]
    return plan


@pytest.mark.parametrize("aim", ["all pairs", "overall", "worst pair", "against control"])
def test_no_bound_of_random_blocks_takes_filler_for_a_loss(aim: str) -> None:
    """Blocks of three lose less than the blocks of four that they could be; no plan beats a bound."""
    trial = half_empty(aim=aim, blocks_random=1)
    reached = score(trial, THREE_OF_FOUR).aim
    assert all(bound.exact >= reached - 1e-12 for bound in all_bounds(trial, limits(trial)))


@pytest.mark.parametrize("aim", ["all pairs", "even meetings", "worst pair", "against control"])
def test_random_blocks_with_filler_keep_a_treatment_each(aim: str) -> None:
    """No chain of blocks is needed there, and yet no block is left to filler alone."""
    found = searched(half_empty(aim=aim, blocks_random="1/10"), moves=60_000)
    assert min(map(len, found.contents)) >= 1


def test_what_fills_random_blocks_is_balanced_for_finder_and_checker() -> None:
    """Nothing need stay filler and nothing does: three treatments in every pair, once."""
    trial = trial_from_document(
        {
            "trial": "triangle",
            "treatments": {"A": {}, "B": {"plots": 2}, "C": {}},
            "blocks": {"b0": {"at_most": 2}, "b1": 2, "b2": 2},
            "rules": {"must_hold": {"b1": ["C"]}},
            "blocks_random": "1/10",
        }
    )
    assert searched(trial).standing is Standing.BALANCED


def test_a_search_with_filler_goes_on_when_it_stalls() -> None:
    """No proof is tried of plans in which filler stands for treatments."""
    trial = trial_from_document(
        {
            "trial": "stalling",
            "treatments": {"A": {}, "B": {"plots": 1}, "C": {}},
            "blocks": {"b0": {"at_most": 2}, "b1": 3, "b2": {"at_most": 3}, "b3": 2, "b4": 2},
        }
    )
    searched(trial, moves=100_000)


def test_a_result_with_filler_is_there_after_an_import(tmp_path: Path) -> None:
    """Its land is more than its plots."""
    trial = half_empty()
    with Keeping(trial, tmp_path / "one.sqlite") as keeping:
        plan = keeping.plan(limits=Limits(moves=20_000), seed=1, workers=1)
        lines = [canonical_json(document(shown)).encode() for shown in keeping.store.all_shown()]
    with Store(tmp_path / "other.sqlite") as other:
        assert not import_lines(other, lines, proved).refused
        recalled = recall(other, trial, canonical(trial))
        assert recalled.contents is not None
        assert score(trial, recalled.contents).aim == pytest.approx(plan.score.aim)


def contrasted(order: str) -> Trial:
    """Seven treatments, in some order, of which three are compared."""
    blocks = {"count": 6, "plots": 5}
    names = {name: {} for name in order}
    return trial_from_document({"trial": "x", "treatments": names, "blocks": blocks, "aim": TWO_CONTRASTS})


def test_a_certificate_of_contrasts_holds_in_any_order_of_treatments() -> None:
    """Its matrix goes by parts of treatments, which it names."""
    one, other = contrasted("ABCDEFG"), contrasted("EDABGCF")
    there, here = to_canonical(canonical(one)), from_canonical(canonical(other))
    found = next(b for b in all_bounds(one, limits(one)) if b.argument == "averaged information")
    assert canonical(one).digest == canonical(other).digest
    exact = f"{found.exact.numerator}/{found.exact.denominator}"
    claim = {"aim": "contrasts", "value": found.value, "exact": exact, "argument": found.argument}
    certificate = here.certificate(there.certificate(found.certificate))
    findings, _ = bounded({**claim, "certificate": certificate}, case_of(other))
    assert all(finding.ok for finding in findings)


def test_the_bound_beside_an_exhaustion_is_carried_too() -> None:
    """A row that is the same problem in another order gets both certificates in its own numbers."""
    rules = {"never_share_block": [["A", "B"]]}
    blocks = {"count": 6, "plots": 2}
    one, other = (
        trial_from_document({"trial": "x", "treatments": list(order), "blocks": blocks, "rules": rules})
        for order in ("ABCD", "CDAB")
    )
    plan = made_plan(one, ((0, 2), (0, 2), (0, 3), (1, 2), (1, 3), (1, 3)))
    certificate = {"kind": "k", "statement": "s", "multipliers": {"rows": [{"treatments": [0, 1]}]}}
    below = Bound(one.aim.kind, Fraction(1), "below", certificate)
    above = Bound(one.aim.kind, Fraction(1), "exhaustion", certificate, otherwise=below)
    carried = _carried(replace(plan, bound=above), canonical(one), other).bound
    assert carried is not None
    assert carried.otherwise is not None
    assert carried.otherwise.certificate["multipliers"] == {"rows": [{"treatments": [2, 3]}]}


def test_a_disconnected_plan_is_feasible_in_the_list_too(tmp_path: Path) -> None:
    """Four treatments in two blocks of two meet as evenly as can be, and tell nothing of each other."""
    trial = trial_from_document(
        {"trial": "x", "treatments": 4, "blocks": {"count": 2, "plots": 2}, "aim": "even meetings"}
    )
    plan = find(trial, limits=Limits(moves=20_000), seed=1, workers=1)
    assert plan.standing is Standing.FEASIBLE
    with Store(tmp_path / "kept.sqlite") as store:
        remember(store, canonical(trial), plan, run_of(plan, Limits(moves=20_000), 1))
        assert [entry.standing for entry in store.list()] == [Standing.FEASIBLE]


def test_ways_across_rules_are_heated_by_what_they_make_small() -> None:
    """There even meetings are looked for by variance, so that is what the temperatures are learnt from."""
    trial = trial_from_document(
        {"trial": "x", "treatments": 6, "blocks": {"count": 6, "plots": 3}, "aim": "even meetings"}
    )
    assert problem_of(trial).goal is Goal.MEETINGS
    assert relaxed(problem_of(trial)).goal is Goal.SPREAD
