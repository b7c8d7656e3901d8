"""A first trial file is a trial: read without a fault, with a plan, and kept from overwriting another."""

from __future__ import annotations

from pathlib import Path

import pytest
import yaml
from hypothesis import given, settings
from hypothesis import strategies as st
from jsonschema import Draft202012Validator

from search.foundation.errors import BadInput, FaultyTrial
from search.runs.inspection import inspect
from search.runs.starting import write_first
from search.trial.nodes import parse_nodes
from search.trial.reading import read_trial, trial_from_nodes
from search.trial.schema import trial_schema
from search.trial.starting import first_file, quoted

NAMES = st.text(min_size=1, max_size=12).map(str.strip).filter(bool)


@settings(max_examples=40, deadline=None)
@given(st.integers(2, 30), st.lists(st.integers(1, 12), min_size=1, max_size=8))
def test_numbers_give_a_trial_that_can_be_planned(many: int, bays: list[int]) -> None:
    """Any numbers with a plot for each treatment: a file that reads, obeys the schema and has a plan."""
    text = first_file("My trial", many, bays)
    trial = trial_from_nodes(parse_nodes(text, "new"), "new")
    assert (trial.t, [block.plots for block in trial.blocks]) == (many, bays)
    assert Draft202012Validator(trial_schema()).is_valid(yaml.safe_load(text))
    if sum(bays) >= many:
        assert inspect(trial, seconds=5).status == "possible"


@settings(max_examples=100, deadline=None)
@given(NAMES, st.lists(NAMES, min_size=2, max_size=5, unique=True))
def test_names_come_back_as_given(name: str, treatments: list[str]) -> None:
    """Whatever a name is called, it is read as typed or refused as a name, never misread."""
    text = first_file(name, treatments, [4, 4])
    try:
        trial = trial_from_nodes(parse_nodes(text, "new"), "new")
    except FaultyTrial:
        return
    assert trial.name == name
    assert [treatment.name for treatment in trial.treatments] == treatments


def test_every_comment_can_be_taken_away() -> None:
    """The lines behind # that hold keys are lines of a trial themselves."""
    text = first_file("My trial", ["Arlen", "Bracken", "Clover"], [3, 3, 2])
    opened = "\n".join(
        line.replace("# ", "", 1).replace("#   ", "  ", 1) if _holds_key(line) else line
        for line in text.splitlines()
    )
    trial = trial_from_nodes(parse_nodes(opened, "new"), "new")
    assert trial.about
    assert trial.plots_each is not None
    assert trial.rules.never_share_block
    assert trial.rules.keep_out
    assert trial.rules.must_hold
    assert trial.precision.cv_percent == 9


def _holds_key(line: str) -> bool:
    keys = ("# about:", "# plots_each:", "# rules:", "#   never", "#   keep", "#   must", "# precision:")
    return line.startswith(keys)


@pytest.mark.parametrize(
    "name", ["No", "yes", "null", "~", "12", "a: b", "#x", "-", "a ", 'say "x"', "ü", "0\x850"]
)
def test_odd_names_are_quoted(name: str) -> None:
    """Names that another reader of YAML could take for anything else stand in quotes."""
    assert yaml.safe_load(quoted(name)) == name


def test_a_file_that_is_there_stays(tmp_path: Path) -> None:
    """The second of two files of one name is refused, and the first is whole."""
    path = write_first(tmp_path / "a.yaml", "My trial", "12", "8", 6)
    before = path.read_bytes()
    assert read_trial(path).n == 48
    with pytest.raises(BadInput, match="there already"):
        write_first(path, "My trial", "12", "8", 7)
    assert path.read_bytes() == before


WRONG = {
    "one treatment": ("Arlen", "8", 6, "two treatments or more"),
    "a size in words": ("12", "eight", 6, "whole numbers"),
    "no size": ("12", "0", 6, "whole numbers"),
    "bays and sizes at odds": ("12", "8,8,7", 2, "2 bays, but 3 numbers"),
    "no bays": ("12", "8", None, "bays: from 1"),
    "too few plots": ("12", "5", 2, "12 treatments need 12 plots"),
}


@pytest.mark.parametrize("case", WRONG)
def test_answers_that_make_no_trial_are_told(case: str, tmp_path: Path) -> None:
    """Each wrong answer has its sentence, and nothing is written."""
    treatments, plots, bays, words = WRONG[case]
    with pytest.raises(BadInput, match=words):
        write_first(tmp_path / "a.yaml", "x", treatments, plots, bays)
    assert not list(tmp_path.iterdir())
