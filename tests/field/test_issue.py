"""Issuing: once a packet is written, no later run overwrites it."""

from __future__ import annotations

from pathlib import Path

import pytest

from search import Trial, plan
from search.field.issue import PLAN, free_folder, issue, issued_in
from search.field.redraw import redraw
from search.foundation.documents import write_whole
from search.foundation.errors import BadInput
from search.runs.plan import Plan

TRIANGLE = {"trial": "tiny", "treatments": ["A", "B", "C"], "blocks": {"x": 2, "y": 2, "z": 2}}


@pytest.fixture(scope="module")
def found() -> Plan:
    """The triangle, planned."""
    return plan(Trial.from_document(TRIANGLE), moves=500)


def test_an_issued_plan_is_never_overwritten(tmp_path: Path, found: Plan) -> None:
    """A second plan goes beside the first, whoever came first and whatever the folder is called."""
    first = issue(found, tmp_path / "out", 1)
    before = (first.folder / PLAN).read_bytes()
    second = issue(found, tmp_path / "out", 2)
    assert second.folder == tmp_path / "out-2"
    assert (first.folder / PLAN).read_bytes() == before
    assert free_folder(tmp_path / "out") == tmp_path / "out-3"


def test_of_two_who_claim_one_folder_one_is_told(tmp_path: Path) -> None:
    """A file that must be new is not replaced, and no part of the second stays behind."""
    write_whole(tmp_path / PLAN, "first", new=True)
    with pytest.raises(FileExistsError):
        write_whole(tmp_path / PLAN, "second", new=True)
    assert (tmp_path / PLAN).read_text() == "first"
    assert [path.name for path in tmp_path.iterdir()] == [PLAN]


def test_what_somebody_wrote_into_the_packet_stays(tmp_path: Path, found: Plan) -> None:
    """Finding an issued plan again draws what is missing, and leaves alone what is there."""
    issued = issue(found, tmp_path / "out", 1)
    (issued.folder / "plots.csv").write_text("yields typed in here")
    (issued.folder / "packet.pdf").unlink()
    again = issued_in(issued.folder)
    assert again is not None
    assert (issued.folder / "plots.csv").read_text() == "yields typed in here"
    assert (issued.folder / "packet.pdf").exists()
    redraw(issued.folder / PLAN, issued.folder)
    assert (issued.folder / "plots.csv").read_text() == "yields typed in here"


def test_another_plans_packet_is_refused(tmp_path: Path, found: Plan) -> None:
    """A folder that crews may carry paper from does not get the packet of another layout."""
    first, second = issue(found, tmp_path / "a", 1), issue(found, tmp_path / "b", 2)
    with pytest.raises(BadInput, match="holds the packet of plan"):
        redraw(first.folder / PLAN, second.folder)


def test_sites_protect_their_folder(tmp_path: Path) -> None:
    """Three sites are three layouts; while one of them is there, the folder is not free."""
    sites = plan(Trial.from_document({**TRIANGLE, "randomise": {"sites": 3}}), moves=500)
    issued = issue(sites, tmp_path / "out", 5)
    marks = {(issued.folder / where / PLAN).read_text()[:60] for where in (".", "site-2", "site-3")}
    assert len(marks) == 3
    (issued.folder / PLAN).unlink()
    assert free_folder(tmp_path / "out") == tmp_path / "out-2"
