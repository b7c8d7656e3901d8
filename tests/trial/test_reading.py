"""From a trial file to a trial, and back."""

from __future__ import annotations

import json
from fractions import Fraction
from pathlib import Path

import pytest
from hypothesis import given, settings

from search.trial.nodes import parse_nodes
from search.trial.reading import read_trial, trial_from_document, trial_from_nodes
from search.trial.records import AimKind, Trial
from search.trial.writing import trial_document
from tests.drawn import small_trials, tiny_trial

CONFIGS = Path(__file__).parents[2] / "configs"


def from_text(text: str) -> Trial:
    """The trial of a YAML text."""
    return trial_from_nodes(parse_nodes(text, "field.yaml"), "field.yaml")


@settings(max_examples=200, deadline=None)
@given(small_trials())
def test_a_trial_survives_writing_and_reading(trial: Trial) -> None:
    """The trial in a plan file is the trial of the trial file, defaults filled in."""
    document = json.loads(json.dumps(trial_document(trial)))
    assert trial_from_document(document) == trial


@pytest.mark.parametrize("path", sorted(CONFIGS.glob("*.yaml")), ids=lambda path: path.stem)
def test_every_example_survives_writing_and_reading(path: Path) -> None:
    """The shipped examples round-trip, maps and cautions included."""
    trial = read_trial(path)
    assert trial_from_document(json.loads(json.dumps(trial_document(trial)))) == trial


def test_names_stay_text_as_typed() -> None:
    """No, 012, 1.10, 3:20 and a date are names, not a truth value or numbers."""
    trial = from_text(
        "trial: 012\ntreatments: [No, 012, 1.10, 3:20, 2027-03-02, 'null']\nblocks: {count: 3, plots: 4}\n"
    )
    assert trial.name == "012"
    assert [x.name for x in trial.treatments] == ["No", "012", "1.10", "3:20", "2027-03-02", "null"]


def test_a_number_of_treatments_names_them() -> None:
    """12 treatments are T01 to T12."""
    trial = from_text("trial: x\ntreatments: 12\nblocks: {count: 6, plots: 4}\n")
    assert [x.name for x in trial.treatments][::11] == ["T01", "T12"]


def test_the_map_draws_the_blocks() -> None:
    """Letters are blocks in the order in which they are met, their plots are counted."""
    trial = read_trial(CONFIGS / "odd_bays.yaml")
    assert [block.plots for block in trial.blocks] == [8, 8, 8, 8, 8, 7]
    assert trial.n == 47


def test_contrasts_are_exact() -> None:
    """Coefficients keep their exact value: decimals and p/q alike."""
    aim = {"contrasts": {"c": {"weight": 2, "of": {"A": 1, "B": "-1/3", "C": "-2/3"}}}}
    trial = tiny_trial(aim=aim)
    (contrast,) = trial.aim.contrasts
    assert trial.aim.kind is AimKind.CONTRASTS
    assert contrast.weight == 2
    assert contrast.of == ((0, Fraction(1)), (1, Fraction(-1, 3)), (2, Fraction(-2, 3)))
