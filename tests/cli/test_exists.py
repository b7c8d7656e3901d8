"""`evenfield exists`."""

from __future__ import annotations

import csv
import json
from pathlib import Path

import pytest

from search.cli.main import invoke


def test_a_design_is_told_in_words(capsys: pytest.CaptureFixture[str]) -> None:
    """Verdict, construction, b, r, λ and E on one short page."""
    assert invoke(["exists", "--treatments", "13", "--block-size", "4"]) == 0
    page = " ".join(capsys.readouterr().out.split())
    for words in (
        "13 blocks",
        "on 4 plots",
        "every pair in 1 block",
        "0.8125",
        "exists: lines of the projective",
    ):
        assert words in page


def test_an_impossible_design_is_an_answer_not_a_failure(capsys: pytest.CaptureFixture[str]) -> None:
    """Exit 0 with the theorem: exit 3 is for a trial's rules alone."""
    assert invoke(["exists", "--treatments", "15", "--block-size", "5", "--meet", "2", "--json"]) == 0
    document = json.loads(capsys.readouterr().out)
    assert document["status"] == "impossible"
    assert "Hall and Connor" in document["reason"]
    assert document["blocks"] is None


def test_json_holds_the_design(capsys: pytest.CaptureFixture[str]) -> None:
    """Blocks and replicates are numbered from 1."""
    assert invoke(["exists", "--treatments", "9", "--block-size", "3", "--resolvable", "--json"]) == 0
    document = json.loads(capsys.readouterr().out)
    assert document["status"] == "exists"
    assert document["sizes"]["efficiency"] == pytest.approx(0.75)
    assert sorted(x for block in document["blocks"] for x in block) == sorted([*range(1, 10)] * 4)
    assert sorted(j for replicate in document["replicates"] for j in replicate) == list(range(1, 13))


def test_a_table_for_ranges(capsys: pytest.CaptureFixture[str], tmp_path: Path) -> None:
    """On screen with a count of verdicts, and as a CSV file; all built up to r = 6 but none missing."""
    arguments = ["exists", "--treatments", "3..16", "--replication", "2..7", "--out", str(tmp_path)]
    assert invoke(arguments) == 0
    assert "1 impossible" in capsys.readouterr().out
    with open(tmp_path / "balanced_designs.csv", encoding="utf-8", newline="") as stream:
        rows = list(csv.DictReader(stream))
    assert len(rows) == 14
    assert {row["verdict"] for row in rows} == {"exists", "impossible"}


@pytest.mark.parametrize(
    ("arguments", "words"),
    [
        (["--treatments", "2", "--block-size", "2"], "2 treatments"),
        (["--treatments", "5", "--block-size", "6"], "blocks of 6"),
        (["--treatments", "5.5", "--block-size", "2"], "not a whole number"),
        (["--treatments", "9..3", "--replication", "3"], "smaller one first"),
        (["--treatments", "99999999999", "--block-size", "4"], "whole numbers from 1"),
        (["--treatments", "10"], "--block-size"),
        (["--treatments", "3..9"], "--replication"),
        (["--treatments", "3..9", "--replication", "3", "--blocks", "4"], "one design"),
        (["--treatments", "3..2000", "--replication", "3"], "up to"),
    ],
)
def test_bad_input_gets_one_clear_message(
    arguments: list[str], words: str, capsys: pytest.CaptureFixture[str]
) -> None:
    """Exit 2 and a sentence that names the number or the option."""
    assert invoke(["exists", *arguments]) == 2
    assert words in capsys.readouterr().err
