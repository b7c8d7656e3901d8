"""`evenfield bound`: every argument with its sentence, its value and its time."""

from __future__ import annotations

import json
from fractions import Fraction
from pathlib import Path

import pytest

from search.cli.main import invoke
from search.efficiency.bounds import best_bound
from search.trial.limits import limits
from search.trial.reading import read_trial

CONFIGS = Path(__file__).parents[2] / "configs"


def test_a_page_for_people(capsys: pytest.CaptureFixture[str]) -> None:
    """The best bound is marked, and the sentence of each argument stands below its value."""
    assert invoke(["bound", str(CONFIGS / "odd_bays.yaml")]) == 0
    out = capsys.readouterr().out
    assert "* 0.917" in out
    assert "Blocks take one degree of freedom each" in out
    assert "The lowest of them (*) counts" in out


@pytest.mark.parametrize("name", ["odd_bays", "balanced", "resolvable"])
def test_one_document(name: str, capsys: pytest.CaptureFixture[str]) -> None:
    """The same as data; the best is the one that a plan is measured against."""
    path = CONFIGS / f"{name}.yaml"
    assert invoke(["bound", str(path), "--json"]) == 0
    document = json.loads(capsys.readouterr().out)
    trial = read_trial(path)
    best = best_bound(trial, limits(trial))
    assert best is not None
    assert document["format"] == "evenfield bound 1"
    assert Fraction(document["best"]["exact"]) == best.exact
    assert document["best"]["argument"] == best.argument
    for row in document["bounds"]:
        assert row["sentence"].endswith(".")
        assert row["seconds"] >= 0
        assert row["value"] is None or row["value"] >= best.value


def test_an_impossible_trial(capsys: pytest.CaptureFixture[str]) -> None:
    """Counts that clash end as 3, as everywhere."""
    assert invoke(["bound", str(CONFIGS / "impossible.yaml"), "--json"]) in (0, 3)
    assert json.loads(capsys.readouterr().out)["format"] == "evenfield bound 1"
