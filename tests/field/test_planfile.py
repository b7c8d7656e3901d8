"""plan.json: what is written is read again, and nothing else is."""

from __future__ import annotations

import json
from datetime import timedelta, timezone
from pathlib import Path
from typing import Any

import pytest

from search.field.planfile import (
    MOST_BYTES,
    laid_out_anew,
    plan_document,
    read_plan,
    write,
)
from search.field.planmark import mark_of, seal_of
from search.field.planshape import Document
from search.field.randomise import lay_out
from search.foundation.errors import BadInput, FaultyTrial
from tests.drawn import tiny_trial
from tests.field.made import ISSUED, document_of, plan_of, trial_with


@pytest.fixture(scope="module")
def document() -> Document:
    """A plan of the Low Moor trial."""
    return document_of(trial_with())


def written(document: Any, folder: Path) -> Path:
    """A file with a document as it stands, right or wrong."""
    path = folder / "plan.json"
    path.write_text(document if isinstance(document, str) else json.dumps(document), "utf-8")
    return path


def resealed(document: Document, **changes: Any) -> Document:
    """A document changed by somebody who knows how to seal."""
    changed = {**document, **changes}
    return {**changed, "seal": seal_of(changed)}


def test_a_plan_has_the_keys_of_the_design_in_its_order(document: Document) -> None:
    """The keys and their order are those of the design document, section 2."""
    assert list(document) == [
        "format",
        "mark",
        "issued",
        "trial",
        "blocks",
        "plots",
        "layout",
        "score",
        "bound",
        "gap_percent",
        "standing",
        "ended_by",
        "provenance",
        "seal",
    ]
    assert list(document["plots"][0]) == ["plot", "block", "line", "place", "treatment"]
    assert list(document["score"]) == [
        "aim",
        "A",
        "D",
        "worst_pair_efficiency",
        "average_pair_variance",
        "largest_pair_variance",
        "loss_to_replication_percent",
        "loss_to_blocks_percent",
        "residual_df",
        "connected",
        "meetings",
    ]
    assert list(document["bound"]) == ["aim", "value", "argument", "exact", "certificate"]
    assert list(document["provenance"]) == ["seed", "digest", "versions", "moves", "seconds", "start"]
    assert document["format"] == "evenfield plan 1"
    assert document["issued"] == "2027-03-02T09:10:00Z"
    assert document["standing"] == "bounded"
    assert document["gap_percent"] == pytest.approx(0.84)


def test_plots_and_blocks_say_the_same(document: Document) -> None:
    """The treatments of a block are those of its plots."""
    for block, held in document["blocks"].items():
        stood = [plot["treatment"] for plot in document["plots"] if plot["block"] == block]
        assert sorted(stood) == sorted(held)


def test_what_is_written_is_read(document: Document, tmp_path: Path) -> None:
    """A plan file gives back the trial and the document, byte for byte the same when written again."""
    write(document, tmp_path / "plan.json")
    trial, read = read_plan(tmp_path / "plan.json")
    assert trial == trial_with()
    assert read == document
    write(read, tmp_path / "again.json")
    assert (tmp_path / "again.json").read_bytes() == (tmp_path / "plan.json").read_bytes()


def test_without_a_bound_the_plan_is_feasible() -> None:
    """No bound: bound and gap are null, standing is feasible."""
    document = document_of(tiny_trial(), gap=None)
    assert document["bound"] is None
    assert document["gap_percent"] is None
    assert document["standing"] == "feasible"


def test_the_moment_of_issue_is_told_in_utc() -> None:
    """A clock two hours ahead tells the same moment."""
    trial = tiny_trial()
    plan = plan_of(trial)
    local = ISSUED.astimezone(timezone(timedelta(hours=2)))
    layout = lay_out(trial, plan.contents, 1)
    assert plan_document(plan, layout, local) == plan_document(plan, layout, ISSUED)


def test_another_layout_is_another_plan_of_the_same_worth(document: Document) -> None:
    """A new layout has its own mark and seal; score and bound stay."""
    trial, plan = trial_with(), plan_of(trial_with())
    anew = laid_out_anew(document, trial, lay_out(trial, plan.contents, 99), ISSUED)
    assert anew["mark"] != document["mark"]
    assert anew["seal"] == seal_of(anew)
    assert anew["score"] == document["score"]
    assert list(anew) == list(document)


def test_a_changed_plan_is_refused(document: Document, tmp_path: Path) -> None:
    """One figure changed: the seal tells."""
    changed = {**document, "gap_percent": 0.01}
    with pytest.raises(BadInput, match="changed after it was written"):
        read_plan(written(changed, tmp_path))


def test_a_plan_under_another_mark_is_refused(document: Document, tmp_path: Path) -> None:
    """Sealed again with another plot map, the old mark tells."""
    plots = [dict(plot) for plot in document["plots"]]
    plots[0]["treatment"], plots[1]["treatment"] = plots[1]["treatment"], plots[0]["treatment"]
    with pytest.raises(BadInput, match="carries the mark"):
        read_plan(written(resealed(document, plots=plots), tmp_path))


def test_a_faulty_trial_inside_a_plan_is_told(document: Document, tmp_path: Path) -> None:
    """The trial of a plan file is read as strictly as a trial file."""
    changed = {**document, "trial": {**document["trial"], "surprise": 1}}
    changed["mark"] = mark_of(changed)
    with pytest.raises(FaultyTrial, match="surprise"):
        read_plan(written(resealed(changed), tmp_path))


@pytest.mark.parametrize(
    ("text", "told"),
    [
        ("", "not a JSON document"),
        ("{", "not a JSON document"),
        ("[1, 2]", "not a plan"),
        ('{"format": "evenfield plan 1", "score": NaN}', "NaN is no number"),
        ('{"format": 1, "format": 2}', "a key stands twice"),
        ('{"format": 1e999}', "not a JSON document"),
        ('{"format": "\\ud800"}', "not a JSON document"),
        ("[" * 100_000, "not a JSON document"),
        ('{"n": ' + "9" * 5000 + "}", "not a JSON document"),
        ('{"format": "a trial"}', "no plan that this version reads"),
        ('{"format": "evenfield plan 1"}', "not a whole plan: mark"),
    ],
)
def test_files_that_are_no_plans(text: str, told: str, tmp_path: Path) -> None:
    """Whatever a file holds, the answer is one clear sentence."""
    with pytest.raises(BadInput, match=told):
        read_plan(written(text, tmp_path))


@pytest.mark.parametrize(
    ("key", "value", "told"),
    [
        ("plots", {}, "plots is not a list"),
        ("plots", [1], r"plots\[1\] is not an object"),
        ("plots", [{"plot": True}], r"plots\[1\].plot is missing"),
        ("layout", {"seed": "1", "scheme": ""}, "layout.seed"),
        ("standing", "excellent", "standing is not one of"),
        ("issued", "yesterday", "issued is not one of"),
        ("score", {"aim": None}, "score.aim"),
    ],
)
def test_plans_of_a_wrong_shape(document: Document, tmp_path: Path, key: str, value: Any, told: str) -> None:
    """What the packet needs must be there before anything is drawn."""
    with pytest.raises(BadInput, match=told):
        read_plan(written(resealed(document, **{key: value}), tmp_path))


def test_a_missing_or_giant_file_is_told(tmp_path: Path) -> None:
    """No file, a folder, and a file larger than any plan."""
    with pytest.raises(BadInput, match="cannot read"):
        read_plan(tmp_path / "nowhere.json")
    with pytest.raises(BadInput, match="cannot read"):
        read_plan(tmp_path)
    giant = tmp_path / "giant.json"
    with giant.open("wb") as stream:
        stream.truncate(MOST_BYTES + 1)
    with pytest.raises(BadInput, match="larger than"):
        read_plan(giant)
