"""Plan files for even meetings and for the worst pair: what holds is proved, what was changed is refuted."""

from __future__ import annotations

from fractions import Fraction
from typing import Any

import pytest

from search.efficiency.bounds import all_bounds
from search.efficiency.records import Bound
from search.proof.verify import verify
from search.trial.limits import limits
from search.trial.reading import trial_from_document
from tests.drawn import tiny_trial
from tests.proof.plans import bound, efficiency, fano_contents, fano_trial, plan_file, sealed
from tests.proof.test_tampering import changed
from tests.proof.test_verify import assert_holds, said, uneven_trial

FIVE = ((0, 2, 3), (0, 2, 4), (1, 3), (0, 1, 3, 4))
"""A connected plan of the uneven trial: the rules hold, and every treatment has two or three plots."""
SQUARES = 21
"""A meets B once and C, D, E twice; B meets D twice, E once; C, D and E meet once each: 13 + 5 + 3."""


def uneven_file(aim: str, argument: str) -> dict[str, Any]:
    """A plan of the uneven trial with the bound that an argument finds."""
    trial = uneven_trial(aim=aim)
    found = next(x for x in all_bounds(trial, limits(trial)) if x.argument == argument)
    met = found.aim.counts_meetings and found.exact == SQUARES
    return plan_file(trial, FIVE, _written(found), "proven optimal" if met else "bounded")


def _written(found: Bound) -> dict[str, Any]:
    return {
        "aim": str(found.aim),
        "value": found.value,
        "argument": found.argument,
        "exact": f"{found.exact.numerator}/{found.exact.denominator}",
        "certificate": found.certificate,
    }


EVEN = ("even meetings by pairs", "even meetings by block meets")
WORST = ("shorted pair", "first order", "second moment by pairs", "second moment by block meets")


@pytest.mark.parametrize("argument", EVEN)
def test_a_sum_of_squared_meetings_is_proved(argument: str) -> None:
    """Score and bound are whole numbers, derived again from the file; by pairs the plan is proved best."""
    document = uneven_file("even meetings", argument)
    assert document["score"]["aim"] == SQUARES
    assert isinstance(document["bound"]["value"], int)
    assert_holds(document)
    assert "no plan that this trial admits has a sum of squared meetings below" in said(document)


@pytest.mark.parametrize("argument", WORST)
def test_the_worst_pair_is_proved(argument: str) -> None:
    """By what two treatments carry alone, and by every argument for the average, which is not above it."""
    document = uneven_file("worst pair", argument)
    assert document["score"]["aim"] == document["score"]["worst_pair_efficiency"]
    assert_holds(document)


@pytest.mark.parametrize("argument", EVEN)
@pytest.mark.parametrize(
    ("path", "value", "what"),
    [
        (("score", "aim"), 20, "score"),
        (("score", "aim"), 21.0, "score"),
        (("score", "A"), lambda x: x * (1 + 1e-8), "score"),
        (("score", "loss_to_blocks_percent"), lambda x: x + 1e-6, "score"),
        (("bound", "exact"), "23/1", "bound"),
        (("bound", "exact"), "39/2", "bound"),
        (("bound", "exact"), "0/1", "bound"),
        (("bound", "value"), lambda x: x + 1, "bound"),
        (("bound", "value"), lambda x: x + 1e-9, "bound"),
        (("bound", "certificate", "kind"), "shorted pair", "bound"),
        (("bound", "certificate", "kind"), "first order", "bound"),
        (("bound", "certificate", "multipliers"), {}, "bound"),
        (("gap_percent",), lambda x: x + 1e-6, "gap"),
        (("standing",), lambda word: {"bounded": "proven optimal"}.get(word, "bounded"), "standing"),
        (("standing",), "balanced", "standing"),
        (("standing",), "feasible", "standing"),
        (("trial", "aim"), "worst pair", "bound"),
    ],
)
def test_one_change_to_even_meetings_is_refuted(
    argument: str, path: tuple[str, ...], value: Any, what: str
) -> None:
    """Whatever is changed and sealed again is found, under the heading where it belongs."""
    refuted = verify(changed(uneven_file("even meetings", argument), path, value)).refuted
    assert what in {finding.what for finding in refuted}


def _prices(document: dict[str, Any]) -> list[tuple[Any, Any]]:
    """Every place of the multipliers that holds a price."""
    places = []

    def walk(item: Any) -> None:
        for key, value in item.items() if isinstance(item, dict) else enumerate(item):
            if isinstance(value, dict | list):
                walk(value)
            elif isinstance(value, str):
                places.append((item, key))

    walk(document["bound"]["certificate"]["multipliers"])
    return places


@pytest.mark.parametrize("argument", EVEN)
def test_every_price_matters(argument: str) -> None:
    """A price moved far enough no longer proves the bound, wherever it stands."""
    many = len(_prices(uneven_file("even meetings", argument)))
    assert many
    for number in range(many):
        document = uneven_file("even meetings", argument)
        place, key = _prices(document)[number]
        place[key] = str(Fraction(place[key]) + 7)
        assert "the certificate proves no more than" in said(sealed(document)), (place, key)


@pytest.mark.parametrize("argument", WORST)
@pytest.mark.parametrize(
    ("path", "value", "what"),
    [
        (("score", "aim"), lambda x: x * (1 + 2.5e-9), "score"),
        (("score", "loss_to_replication_percent"), lambda x: x + 1e-6, "score"),
        (("score", "loss_to_blocks_percent"), lambda x: x + 1e-6, "score"),
        (("bound", "exact"), "6/10", "bound"),
        (("bound", "certificate", "kind"), "even meetings by pairs", "bound"),
        (("bound", "certificate", "multipliers"), {"price": "1"}, "bound"),
        (("gap_percent",), lambda x: x + 1e-6, "gap"),
        (("standing",), "proven optimal", "standing"),
        (("trial", "aim"), "even meetings", "score"),
    ],
)
def test_one_change_to_the_worst_pair_is_refuted(
    argument: str, path: tuple[str, ...], value: Any, what: str
) -> None:
    """The same for the worst pair, with a certificate of its own and with those for the average."""
    refuted = verify(changed(uneven_file("worst pair", argument), path, value)).refuted
    assert what in {finding.what for finding in refuted}


def test_balanced_plans_are_balanced_for_both_aims() -> None:
    """Seven treatments on seven lines: λ = 1 for 21 pairs, and every variance is 2/(rE) = 6/7."""
    trial = fano_trial(aim="even meetings")
    found = next(all_bounds(trial, limits(trial)))
    assert found.exact == 21
    document = plan_file(trial, fano_contents(), _written(found), "balanced", near_balanced="yes")
    assert document["score"]["aim"] == 21
    assert_holds(document)
    assert "makes the plan balanced" in said(sealed(document | {"standing": "proven optimal"}))

    trial = fano_trial(aim="worst pair")
    document = plan_file(trial, fano_contents(), bound(trial, Fraction(7, 9), "first order", {}), "balanced")
    assert document["score"]["largest_pair_variance"] == pytest.approx(6 / 7)
    assert_holds(document)


def test_balanced_with_unlike_blocks_need_not_be_even() -> None:
    """AB, AC, BC and ABC twice: every λ is 3. AB, AC, BC with ABC once: λ = 2; all pairs alike, and even.

    Where only some blocks are larger a completely symmetric C says nothing of the λ, so the bound decides.
    """
    trial = trial_from_document(
        {
            "trial": "mixed",
            "treatments": 3,
            "blocks": {"a": 2, "b": 2, "c": 2, "d": 3},
            "aim": "even meetings",
        }
    )
    found = next(all_bounds(trial, limits(trial)))
    contents = ((0, 1), (0, 2), (1, 2), (0, 1, 2))
    assert found.exact == 12
    assert_holds(plan_file(trial, contents, _written(found), "balanced", near_balanced="yes"))
    low = _written(found) | {"exact": "10/1", "value": 10}
    assert_holds(plan_file(trial, contents, low, "bounded", near_balanced="yes"))


def test_a_disconnected_plan_keeps_its_sum() -> None:
    """Efficiencies of two halves are 0; their meetings are counted all the same, and nothing is claimed."""
    trial = tiny_trial(treatments=["A", "B", "C", "D"], blocks={"count": 4, "plots": 2}, aim="even meetings")
    joined = plan_file(trial, ((0, 1), (1, 2), (2, 3), (0, 3)))
    names = [["A", "B"], ["A", "B"], ["C", "D"], ["C", "D"]]
    for j, pair in enumerate(names, start=1):
        joined["blocks"][f"block {j}"] = pair
    for row in joined["plots"]:
        row["treatment"] = names[row["line"] - 1][row["place"] - 1]
    joined["score"] |= dict.fromkeys(("A", "D", "worst_pair_efficiency"), 0.0)
    joined["score"] |= dict.fromkeys(("average_pair_variance", "largest_pair_variance"))
    joined["score"] |= {"aim": 8, "loss_to_blocks_percent": 100.0, "residual_df": 2, "connected": False}
    joined["score"]["meetings"] = {"least": 0, "most": 2, "near_balanced": "unknown"}
    assert_holds(sealed(joined))
    found = next(all_bounds(trial, limits(trial)))
    told = sealed(joined | {"bound": _written(found), "gap_percent": 100.0})
    assert found.exact == 4
    assert_holds(told)
    assert "makes the plan feasible" in said(sealed(told | {"standing": "bounded"}))


def test_the_plain_route_agrees_about_the_worst_pair() -> None:
    """The plain route of the tests and the proof have the same efficiency: no plan file holds otherwise."""
    trial = uneven_trial(aim="worst pair")
    assert 0 < efficiency(trial, FIVE) < 1
    assert_holds(plan_file(trial, FIVE))
