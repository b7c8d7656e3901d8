"""`evenfield kept` as a user calls it: what is said, in both forms, and the exit status."""

from __future__ import annotations

import json
import shutil
from pathlib import Path

import pytest

from tests.cli.asked import answer, said

PAST = Path(__file__).parents[1] / "runs" / "stores" / "version-1.sqlite"


@pytest.fixture
def store(tmp_path: Path) -> Path:
    """A store with five problems, two of them with issued plans."""
    path = tmp_path / "store.sqlite"
    shutil.copyfile(PAST, path)
    return path


def test_a_list_is_filtered(store: Path, capsys: pytest.CaptureFixture[str]) -> None:
    """Filters leave what they say, and the count tells of the same."""
    status, document = answer(
        capsys, "kept", "list", "--store", store, "--treatments", "5-7", "--gap-most", "1"
    )
    assert status == 0
    assert {plan["trial"] for plan in document["plans"]} == {"odd bays", "sets"}
    assert document["count"] == 2
    status, out, _ = said(capsys, "kept", "list", "--store", store, "--standing", "balanced")
    assert (status, "triangle" in out, "1 kept plan" in out) == (0, True, True)
    for words in (("--treatments", "many"), ("--standing", "fine"), ("--gap-most", "-1"), ("--aim", "x")):
        status, document = answer(capsys, "kept", "list", "--store", store, *words)
        assert status == 2
        assert words[0] in document["message"]


def test_everything_goes_round(store: Path, tmp_path: Path, capsys: pytest.CaptureFixture[str]) -> None:
    """What one store exports another imports, and shows in the same words; the table has a line for each."""
    lines, other = tmp_path / "all.jsonl", tmp_path / "other.sqlite"
    assert answer(capsys, "kept", "export", lines, "--store", store)[1]["results"] == 5
    assert said(capsys, "kept", "export", tmp_path / "all.csv", "--store", store)[0] == 0
    assert len((tmp_path / "all.csv").read_text(encoding="utf-8").splitlines()) == 6
    status, document = answer(capsys, "kept", "import", lines, "--store", other)
    assert (status, document["plans"], document["runs"], document["refused"]) == (0, 5, 10, [])
    shown = answer(capsys, "kept", "show", "M3-RT", "--store", store)[1]["problems"]
    assert answer(capsys, "kept", "show", "M3-RT", "--store", other)[1]["problems"] == shown
    status, document = answer(capsys, "kept", "merge", store, "--store", other)
    assert (status, document["status"], document["plans"], document["runs"]) == (0, "merged", 0, 0)


def test_refused_lines_are_told_and_the_exit_status_is_2(
    store: Path, tmp_path: Path, capsys: pytest.CaptureFixture[str]
) -> None:
    """The number of the line, the reason, and how many were taken."""
    lines = tmp_path / "all.jsonl"
    answer(capsys, "kept", "export", lines, "--store", store)
    spoiled = lines.read_text(encoding="utf-8").splitlines()
    record = json.loads(spoiled[2])
    record["plan"]["efficiency"] /= 2
    spoiled[2] = json.dumps(record)
    lines.write_text("\n".join(spoiled), encoding="utf-8")
    status, document = answer(capsys, "kept", "import", lines, "--store", tmp_path / "a.sqlite")
    assert (status, document["status"], document["results"]) == (2, "partly refused", 4)
    assert document["refused"][0]["where"] == "line 3"
    status, out, err = said(capsys, "kept", "import", lines, "--store", tmp_path / "b.sqlite")
    assert (status, "4 results" in out) == (2, True)
    assert f"{lines}, line 3: plan.efficiency is not the score" in err


def test_pruning_asks_first(store: Path, capsys: pytest.CaptureFixture[str]) -> None:
    """Without --yes nothing changes; issued plans stay unless they are named."""
    before = store.read_bytes()
    status, document = answer(capsys, "kept", "prune", "--store", store, "--treatments", "0-99")
    assert (status, document["results"], document["pruned"]) == (0, 3, False)
    assert store.read_bytes() == before
    status, document = answer(capsys, "kept", "prune", "--store", store, "--treatments", "0-99", "--yes")
    assert (status, document["results"], document["pruned"]) == (0, 3, True)
    assert answer(capsys, "kept", "list", "--store", store)[1]["count"] == 2
    assert answer(capsys, "kept", "prune", "--store", store, "--issued", "--yes")[0] == 2
    words = ("--issued", "--issued-too", "--yes")
    assert answer(capsys, "kept", "prune", "--store", store, *words)[1]["results"] == 2
    assert answer(capsys, "kept", "list", "--store", store)[1]["count"] == 0
