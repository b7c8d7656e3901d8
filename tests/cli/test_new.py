"""`evenfield new`: options, questions, and a file that the other commands take as it stands."""

from __future__ import annotations

import io
from pathlib import Path

import pytest

from search.cli.main import invoke
from tests.cli.asked import answer, said


def test_options_write_a_file_that_inspect_takes(
    capsys: pytest.CaptureFixture[str], tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    """With every option nothing is asked; the file is named after the trial."""
    monkeypatch.chdir(tmp_path)
    words = ("new", "--name", "Low Moor", "--treatments", "12", "--bays", "6", "--plots", "8")
    status, document = answer(capsys, *words)
    assert (status, document["status"], document["file"]) == (0, "written", "low-moor.yaml")
    status, document = answer(capsys, "inspect", "low-moor.yaml")
    assert (status, document["trial"], document["plots"]) == (0, "Low Moor", 48)


def test_questions_ask_for_what_is_missing(
    capsys: pytest.CaptureFixture[str], tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    """An answer is taken, an empty one means what stands in brackets; questions go to standard error."""
    monkeypatch.setattr("sys.stdin", io.StringIO("Hill\nArlen, Bracken, Clover\n\n6\n"))
    path = tmp_path / "hill.yaml"
    status, out, err = said(capsys, "new", path)
    assert status == 0
    assert "evenfield inspect" in out
    assert err.count("[") == 4
    monkeypatch.setattr("sys.stdin", io.StringIO(""))
    text = path.read_text(encoding="utf-8")
    assert "trial: Hill" in text
    assert "  Bracken:" in text
    assert "blocks: {count: 6, plots: 4}" in text


def test_nobody_to_answer_is_bad_input(
    capsys: pytest.CaptureFixture[str], monkeypatch: pytest.MonkeyPatch
) -> None:
    """At the end of standard input it says which options there are, and exits with 2."""
    monkeypatch.setattr("sys.stdin", io.StringIO(""))
    status, out, err = said(capsys, "new")
    assert (status, out) == (2, "")
    assert "give the options" in err


def test_the_schema_is_printed_as_it_is(capsys: pytest.CaptureFixture[str]) -> None:
    """`schema` prints one JSON document with or without --json."""
    assert invoke(["schema"]) == 0
    plain = capsys.readouterr().out
    assert invoke(["schema", "--json"]) == 0
    assert capsys.readouterr().out == plain
    assert '"$schema"' in plain


@pytest.mark.parametrize("numbers", [("9", "4", "8"), ("Arlen, No, a: b", "2,2,3", None), ("3", "5", "2")])
def test_plan_takes_it_as_it_stands(
    numbers: tuple[str, str, str | None], capsys: pytest.CaptureFixture[str], tmp_path: Path
) -> None:
    """What `new` writes is planned, its packet drawn and its plan proved, without a line changed."""
    treatments, plots, bays = numbers
    path, out = tmp_path / "first.yaml", tmp_path / "out"
    words = ["new", str(path), "--treatments", treatments, "--plots", plots]
    assert answer(capsys, *words, *([] if bays is None else ["--bays", bays]))[0] == 0
    store = tmp_path / "store.sqlite"
    status, document = answer(capsys, "plan", path, "--moves", "2000", "--out", out, "--store", store)
    assert (status, document["status"]) == (0, "planned")
    assert answer(capsys, "verify", out / "plan.json")[0] == 0
