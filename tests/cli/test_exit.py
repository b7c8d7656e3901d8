"""Every ending has its exit status, and with --json a document that says the same."""

from __future__ import annotations

import json
from pathlib import Path
from typing import Any

import click
import pytest

from search.cli import inspect, verify
from search.cli.kept import command as kept
from search.cli.main import COMMANDS, evenfield, invoke
from search.foundation.errors import BadInput, Clash, FaultyTrial, Impossible, Undecided
from tests.cli.asked import CONFIGS, answer, said
from tests.field.made import document_of, trial_with
from tests.rivals import impossible

KEYS = {"format", "status", "exit", "message", "faults"}


def test_0_done(capsys: pytest.CaptureFixture[str]) -> None:
    """A trial that can be planned: 0, and no message."""
    status, document = answer(capsys, "inspect", CONFIGS / "first_trial.yaml")
    assert (status, document["exit"], document["status"]) == (0, 0, "possible")
    assert document["format"] == "evenfield inspect 1"
    assert (document["message"], document["faults"]) == ("", [])


def test_1_refuted(capsys: pytest.CaptureFixture[str], tmp_path: Path) -> None:
    """A plan whose claims do not hold: 1, and the findings."""
    plan = document_of(trial_with())
    plan["score"]["aim"] = 0.99
    path = tmp_path / "plan.json"
    path.write_text(json.dumps(plan), encoding="utf-8")
    status, document = answer(capsys, "verify", path)
    assert (status, document["exit"], document["status"]) == (1, 1, "refuted")
    assert verify.REFUTED == 1


def test_2_bad_file(capsys: pytest.CaptureFixture[str], tmp_path: Path) -> None:
    """A file with mistakes: 2, and each of them in five parts with its place."""
    path = tmp_path / "trial.yaml"
    path.write_text("trial: x\ntreatments: [A, a]\nblocks: {count: 3, plots: none}\n", encoding="utf-8")
    status, document = answer(capsys, "inspect", path)
    assert (status, document["exit"], document["status"]) == (2, 2, "bad file")
    assert [fault["line"] for fault in document["faults"]] == [2, 3]
    for fault in document["faults"]:
        assert set(fault) == {"file", "line", "column", "key", "found", "must_hold", "why", "try"}
        assert all(fault.values())


BAD = {
    "no command": (["nothing"], "No such command"),
    "no such option": (["inspect", "--nothing", "x"], "No such option"),
    "no argument": (["inspect"], "Missing argument"),
    "a number out of range": (["inspect", "x", "--seconds", "0"], "0"),
    "no such plan": (["verify", "nobody.json"], "nobody.json"),
    "no such plan for a packet": (["packet", "nobody.json", "--out", "x"], "nobody.json"),
    "questions nobody can answer": (["new", "--treatments", "3"], "--plots"),
}


@pytest.mark.parametrize("case", BAD)
def test_2_bad_input(
    case: str, capsys: pytest.CaptureFixture[str], tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    """A wrong word on the command line, or a file that is not there: 2, with a message in either form."""
    monkeypatch.chdir(tmp_path)
    words, told = BAD[case]
    status, document = answer(capsys, *words)
    assert (status, document["exit"], document["status"]) == (2, 2, "bad input")
    assert told in document["message"]
    assert set(document) >= KEYS
    if case != "questions nobody can answer":
        status, out, err = said(capsys, *words)
        assert (status, out) == (2, "")
        assert told in err


def test_3_impossible(capsys: pytest.CaptureFixture[str]) -> None:
    """Rules that leave no plan: 3, with clashing lines and what to relax, in either form."""
    path = CONFIGS / "impossible.yaml"
    status, document = answer(capsys, "inspect", path)
    assert (status, document["exit"], document["status"]) == (3, 3, "impossible")
    (clash,) = document["clashes"]
    assert clash["smallest"]
    assert {line["line"] for line in clash["lines"]} == {0, 7, 9}
    assert clash["changes"]
    status, out, err = said(capsys, "inspect", path)
    assert (status, err) == (3, "")
    assert "line 9: never_share_block: [Ash, Beech, Cedar, Elm, Fir]" in out


def test_4_undecided(
    capsys: pytest.CaptureFixture[str], monkeypatch: pytest.MonkeyPatch, tmp_path: Path
) -> None:
    """A trial that is not decided in its time: 4, and not "impossible"."""

    def undecided(*_: object, **__: object) -> None:
        raise Undecided("not decided within 0.01 s")

    monkeypatch.setattr("search.runs.inspection.feasible_start", undecided)
    status, document = answer(capsys, "inspect", CONFIGS / "first_trial.yaml", "--seconds", "0.01")
    assert (status, document["exit"], document["status"]) == (4, 4, "undecided")
    assert document["causes"] == ["not decided within 0.01 s"]
    status, out, _ = said(capsys, "inspect", CONFIGS / "first_trial.yaml")
    assert status == 4
    assert "Not decided" in out
    assert inspect.EXIT == {"possible": 0, "impossible": 3, "undecided": 4}


def test_4_in_time_for_a_hard_trial(capsys: pytest.CaptureFixture[str], tmp_path: Path) -> None:
    """No pair twice among 43 treatments in sevens would be a plane of order 6: a second is not enough.

    There is none (Tarry 1901), but no count shows it.
    """
    path = tmp_path / "trial.yaml"
    text = "trial: x\ntreatments: 43\nblocks: {count: 43, plots: 7}\nrules: {meet_at_most: 1}\n"
    path.write_text(text, encoding="utf-8")
    status, document = answer(capsys, "inspect", path, "--seconds", "1")
    assert (status, document["status"]) == (4, "undecided")


ENDINGS: dict[str, tuple[BaseException, int, str]] = {
    "bad file": (FaultyTrial([]), 2, "bad file"),
    "bad input": (BadInput("no"), 2, "bad input"),
    "impossible": (Impossible(["a clash"], "count"), 3, "impossible"),
    "undecided": (Undecided("?"), 4, "undecided"),
    "our fault": (RuntimeError("a bug"), 70, "internal error"),
    "memory": (MemoryError(), 70, "internal error"),
    "interrupted": (KeyboardInterrupt(), 130, "interrupted"),
    "interrupted at a question": (click.Abort(), 130, "interrupted"),
}


@pytest.mark.parametrize("case", ENDINGS)
def test_whatever_is_raised_has_its_status(
    case: str, capsys: pytest.CaptureFixture[str], monkeypatch: pytest.MonkeyPatch
) -> None:
    """Each error leaves as its own exit status, one document, and never as a traceback."""
    error, expected, word = ENDINGS[case]

    def fail(*_: object, **__: object) -> None:
        raise error

    monkeypatch.setattr(evenfield, "main", fail)
    status, document = answer(capsys, "plan", "x.yaml")
    assert (status, document["exit"], document["status"]) == (expected, expected, word)
    assert document["format"] == "evenfield plan 1"
    status, out, err = said(capsys, "plan", "x.yaml")
    assert (status, out) == (expected, "")
    assert "Traceback" not in err


def test_plan_tells_the_clash_too(capsys: pytest.CaptureFixture[str], tmp_path: Path) -> None:
    """`plan` of an impossible trial ends as 3 and tells which lines clash and what to relax."""
    pytest.importorskip("search.solvers.kernel")
    path = CONFIGS / "impossible.yaml"
    words = ("plan", path, "--out", tmp_path / "out", "--store", tmp_path / "store.sqlite")
    status, document = answer(capsys, *words)
    assert (status, document["status"]) == (3, "impossible")
    assert {line["line"] for line in document["clashes"][0]["lines"]} == {0, 7, 9}
    assert not (tmp_path / "out" / "plan.json").exists()


def test_many_lines_are_told_shortly(capsys: pytest.CaptureFixture[str], tmp_path: Path) -> None:
    """A clash of 46 lines names twelve and counts the rest."""
    path = tmp_path / "trial.json"
    path.write_text(json.dumps(impossible(0).document), encoding="utf-8")
    status, out, _ = said(capsys, "inspect", path)
    assert status == 3
    assert "and 34 more" in out


def test_a_clash_as_data_has_its_documented_keys() -> None:
    """The keys of a clash are those that the form names."""
    clash = Clash((("rules.keep_out.A[1]", 3, "keep_out"),), (), True, "why", "count", ("change",))
    document: dict[str, Any] = clash.document()
    assert set(document) == {"lines", "among", "smallest", "cause", "shown_by", "changes"}
    assert document["lines"] == [{"key": "rules.keep_out.A[1]", "line": 3, "text": "keep_out"}]


@pytest.mark.parametrize("name", COMMANDS)
def test_every_command_answers_help_and_takes_json(name: str, capsys: pytest.CaptureFixture[str]) -> None:
    """Each command has a sentence of help, and --json."""
    # A group has no --json, its own commands have.
    lines = [[name]] if name != "kept" else [[name, own] for own in sorted(kept.commands)]
    for words in lines:
        assert invoke([*words, "--help"]) == 0
        assert "--json" in capsys.readouterr().out
