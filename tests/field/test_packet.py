"""The packet on disk: whole, in its folder, the same each time."""

from __future__ import annotations

from pathlib import Path
from typing import Any

import pytest

from search.field.packet import write_packet
from search.field.planfile import read_plan, write
from search.foundation.errors import BadInput
from search.trial.reading import trial_from_document
from tests.field.made import document_of, trial_with


def test_the_folder_holds_the_packet_and_nothing_else(tmp_path: Path) -> None:
    """Five files in the folder, which is made; nothing beside it, whatever the trial is called."""
    trial = trial_with(trial="../../escape")
    files = write_packet(trial, document_of(trial), tmp_path / "out" / "packet")
    assert [path.name for path in files] == [
        "packet.pdf",
        "labels.pdf",
        "packet.xlsx",
        "plots.csv",
        "plan.html",
    ]
    assert {path for path in tmp_path.rglob("*") if path.is_file()} == set(files)
    assert files[0].read_bytes().startswith(b"%PDF-")


def test_the_plan_file_alone_gives_the_same_bytes(tmp_path: Path) -> None:
    """Drawn again from the plan file, every file of the packet is the same."""
    trial = trial_with()
    document = document_of(trial)
    first = write_packet(trial, document, tmp_path / "a")
    write(document, tmp_path / "plan.json")
    again = write_packet(*read_plan(tmp_path / "plan.json"), tmp_path / "b")
    assert [path.read_bytes() for path in first] == [path.read_bytes() for path in again]


def test_a_link_is_replaced_not_followed(tmp_path: Path) -> None:
    """A file elsewhere that a link in the folder points to stays as it is."""
    elsewhere = tmp_path / "elsewhere.txt"
    elsewhere.write_text("mine")
    folder = tmp_path / "packet"
    folder.mkdir()
    (folder / "plots.csv").symlink_to(elsewhere)
    trial = trial_with()
    write_packet(trial, document_of(trial), folder)
    assert elsewhere.read_text() == "mine"
    assert not (folder / "plots.csv").is_symlink()


def test_a_folder_that_is_a_file_is_told(tmp_path: Path) -> None:
    """The message names the path and the way out."""
    (tmp_path / "packet").write_text("in the way")
    trial = trial_with()
    with pytest.raises(BadInput, match="--out"):
        write_packet(trial, document_of(trial), tmp_path / "packet")


@pytest.mark.parametrize(
    ("document", "gap"),
    [
        ({"treatments": 4, "blocks": {"count": 2, "plots": 2}, "precision": {"cv_percent": 9}}, None),
        ({"treatments": 2, "blocks": {"count": 3, "plots": 2}, "precision": {"cv_percent": 9}}, 0.0),
        ({"treatments": 30, "blocks": {"a": 30}, "packet": {"blind": True, "labels": "single"}}, None),
    ],
    ids=["disconnected", "two treatments", "one block, blind"],
)
def test_plans_at_the_edge_are_drawn_whole(
    document: dict[str, Any], gap: float | None, tmp_path: Path
) -> None:
    """Without variances, degrees of freedom, bound or contrast nothing of the packet is missing."""
    trial = trial_from_document({"trial": "edge", **document})
    files = write_packet(trial, document_of(trial, gap), tmp_path)
    assert all(path.stat().st_size > 100 for path in files)
    assert len(files) == (7 if trial.packet.blind else 5)
