"""Whole plan files: what holds is proved, and the verdict says so in sentences."""

from __future__ import annotations

import json
from fractions import Fraction
from typing import Any

import pytest

from search.foundation.errors import BadInput
from search.proof.verify import verify
from search.trial.reading import trial_from_document
from search.trial.records import Trial
from tests.drawn import all_plans, tiny_trial
from tests.proof.plans import balanced_file, bound, efficiency, fano_contents, fano_trial, plan_file, sealed

SECONDS: dict[str, dict[str, Any]] = {
    "second moment by pairs": {
        "rows": [{"treatments": [0, 1, 2, 3, 4], "partners": {"3": "1/3", "2": "1/2"}}],
        "plots": {"3": "2/3"},
        "sums": [],
    },
    "second moment by block meets": {
        "meets": [{"size": 3, "group": -1, "with": -1, "price": "1/3"}],
        "plots": [{"size": 3, "group": -1, "price": "2/3"}],
    },
    "first order": {},
}


def uneven_trial(**more: Any) -> Trial:
    """Five treatments, one a control, in blocks of 3, 3, 2 and 4 plots under three rules."""
    names: dict[str, Any] = {name: {} for name in "ABCDE"} | {"A": {"control": True}}
    rules = {
        "keep_out": {"A": ["z"]},
        "never_share_block": [["B", "C"]],
        "meet_at_least": [{"pair": ["A", "E"], "blocks": 1}],
    }
    return trial_from_document(
        {
            "trial": "uneven",
            "treatments": names,
            "blocks": {"x": 3, "y": 3, "z": 2, "w": 4},
            "plots_each": [2, 3],
            "rules": rules,
        }
        | more
    )


def uneven_file(kind: str, multipliers: dict[str, Any], exact: Fraction, **more: Any) -> dict[str, Any]:
    """The first connected plan of the uneven trial, with a bound."""
    trial = uneven_trial(**more)
    contents = next(x for x in all_plans(trial, 10**6) if efficiency(trial, x) > 0)
    return plan_file(trial, contents, bound(trial, exact, kind, multipliers), "bounded")


def uneven_files() -> list[dict[str, Any]]:
    """A file for each kind of certificate and each aim."""
    contrasts = {"p": {"of": {"A": 1, "B": -1}}, "q": {"weight": 2, "of": {"A": 2, "C": -1, "D": -1}}}
    root = {
        "roots": ["1/2", "4/5"],
        "matrix": [["63/100", "31/100"], ["31/100", "193/100"]],
        "epsilon": "1/100",
    }
    high = Fraction(11, 10)
    return [
        uneven_file("first order", {}, high),
        uneven_file("second moment by pairs", SECONDS["second moment by pairs"], high),
        uneven_file(
            "second moment by block meets", SECONDS["second moment by block meets"], high, aim="overall"
        ),
        uneven_file("replication", {"price": "1/15"}, high),
        uneven_file("replication", {}, high, aim="overall"),
        uneven_file("trace root", {}, high, aim="against control"),
        uneven_file("trace root", root, Fraction(3), aim={"contrasts": contrasts}),
    ]


def assert_holds(document: dict[str, Any]) -> None:
    """Every claim of the file is proved."""
    verdict = verify(document)
    assert verdict.holds, [str(finding) for finding in verdict.refuted]
    assert not verdict.refuted


def said(document: dict[str, Any]) -> str:
    """All that the verdict says, a line a finding."""
    return "\n".join(str(finding) for finding in verify(document).findings)


def test_balanced_plan_is_proved() -> None:
    """The plan of the seven lines is proved balanced: A = 7/9 and the bound is that to the last digit."""
    assert_holds(balanced_file())
    text = said(balanced_file())
    assert "score: every number derived again in exact arithmetic" in text
    assert "no plan that this trial admits has an efficiency above 0.777777777778" in text
    assert "standing: balanced" in text
    assert "as even as they can be" in text


def test_verdict_is_plain_data() -> None:
    """A verdict can be written as JSON, with every finding in it."""
    document = json.loads(json.dumps(verify(balanced_file()).document()))
    assert document["holds"] is True
    assert {"what": "ended by", "ok": True, "detail": "bound met"} in document["findings"]


@pytest.mark.parametrize("document", uneven_files(), ids=lambda d: d["bound"]["certificate"]["kind"])
def test_every_kind_and_aim_is_proved(document: dict[str, Any]) -> None:
    """Uneven trials with every kind of certificate and every aim are proved."""
    assert_holds(document)


def test_plan_without_a_bound_is_feasible() -> None:
    """Without a bound gap is null and the standing feasible; any other word is refuted."""
    assert_holds(plan_file(fano_trial(), fano_contents()))
    spoiled = sealed(plan_file(fano_trial(), fano_contents(), standing="balanced"))
    assert "standing: what is proved makes the plan feasible" in said(spoiled)


def test_proven_optimal_means_one_part_in_a_million() -> None:
    """AB, AB, AC, BC has the eigenvalues 5/2 and 3/2, and A = (7/9)/(16/15) = 35/48, which no plan passes.

    A bound 9 parts in 10^7 above that makes it proven optimal, one 11 parts above leaves it bounded.
    """
    trial = trial_from_document({"trial": "four", "treatments": 3, "blocks": {"count": 4, "plots": 2}})
    contents = ((0, 1), (0, 1), (0, 2), (1, 2))
    prices = {"rows": [{"treatments": [0, 1, 2], "partners": {"2": "3/4"}}], "plots": {"2": "2"}}
    for parts, word in ((0, "proven optimal"), (9, "proven optimal"), (11, "bounded")):
        exact = Fraction(35, 48) / (1 - Fraction(parts, 10**7))
        bounded = bound(trial, exact, "second moment by pairs", prices)
        assert_holds(plan_file(trial, contents, bounded, word, near_balanced="yes"))
        for other in {"balanced", "proven optimal", "bounded", "feasible"} - {word}:
            spoiled = plan_file(trial, contents, bounded, other, near_balanced="yes")
            assert f"makes the plan {word}" in said(spoiled)


def test_balanced_is_said_only_where_pairs_count_alike() -> None:
    """The triangle is balanced for all pairs and overall; for one contrast it is merely bounded."""
    contents = ((0, 1), (0, 2), (1, 2))
    for aim in ("all pairs", "overall"):
        trial = tiny_trial(aim=aim)
        bounded = bound(trial, Fraction(3, 4), "first order", {})
        assert_holds(plan_file(trial, contents, bounded, "balanced"))
    trial = tiny_trial(aim={"contrasts": {"c": {"of": {"A": 1, "B": -1}}}})
    root = {"roots": ["1"], "matrix": [["14142/10000"]], "epsilon": "0"}
    bounded = bound(trial, Fraction(2), "trace root", root)
    assert_holds(plan_file(trial, contents, bounded, "bounded"))
    assert "makes the plan bounded" in said(plan_file(trial, contents, bounded, "balanced"))


def test_disconnected_plan_is_told_as_it_is() -> None:
    """Two halves that never meet: efficiencies 0, variances null, the loss to blocks whole."""
    trial = trial_from_document({"trial": "halves", "treatments": 4, "blocks": {"count": 4, "plots": 2}})
    joined = plan_file(trial, ((0, 1), (1, 2), (2, 3), (0, 3)))
    names = [["T01", "T02"], ["T01", "T02"], ["T03", "T04"], ["T03", "T04"]]
    for j, pair in enumerate(names, start=1):
        joined["blocks"][f"block {j}"] = pair
    for row in joined["plots"]:
        row["treatment"] = names[row["line"] - 1][row["place"] - 1]
    zero = dict.fromkeys(("aim", "A", "D", "worst_pair_efficiency"), 0.0)
    none = dict.fromkeys(("average_pair_variance", "largest_pair_variance"))
    told = {
        "loss_to_replication_percent": 0.0,
        "loss_to_blocks_percent": 100.0,
        "residual_df": 8 - 4 - 4 + 2,
        "connected": False,
        "meetings": {"least": 0, "most": 2, "near_balanced": "unknown"},
    }
    joined["score"] = zero | none | told
    assert_holds(sealed(joined))
    bounded = bound(trial, Fraction(2, 3), "first order", {})
    assert_holds(sealed(joined | {"bound": bounded, "gap_percent": 100.0}))
    assert "makes the plan feasible" in said(
        sealed(joined | {"bound": bounded, "gap_percent": 100.0, "standing": "bounded"})
    )
    joined["score"]["average_pair_variance"] = 1.0
    assert "must be null" in said(sealed(joined))


def test_more_keys_are_no_fault() -> None:
    """Keys are only ever added to the format, so a key that this version does not know is let be."""
    document = balanced_file()
    document["weather"] = {"rain": True}
    document["score"]["E"] = 7 / 9
    assert_holds(sealed(document))


def test_trial_that_cannot_be_is_refuted() -> None:
    """A file whose trial has faults, or counts that clash, is refuted in the words of the trial."""
    document = balanced_file()
    document["trial"]["rules"]["must_hold"] = {"block 1": ["T01"]}
    document["trial"]["rules"]["keep_out"] = {"T01": ["block 1"]}
    assert "rules: T01 stands in block 1" in said(sealed(document))
    assert "no plan can obey the trial's own counts" in said(sealed(document))
    document["trial"]["rules"] = {"planted": {}}
    assert "trial and blocks: the trial in the file has faults" in said(sealed(document))


@pytest.mark.parametrize("document", [None, [], "plan", {}, {"format": "evenfield plan 2"}])
def test_what_is_no_plan_file_is_bad_input(document: Any) -> None:
    """No plan file at all is bad input, not a refuted plan."""
    with pytest.raises(BadInput):
        verify(document)


def test_an_empty_plan_file_is_refuted() -> None:
    """A document of the right format and nothing else is refuted claim by claim."""
    verdict = verify({"format": "evenfield plan 1"})
    assert len(verdict.refuted) == len(verdict.findings) > 4
