"""Files that anybody may have written."""

from __future__ import annotations

import json
from pathlib import Path
from typing import Any

import pytest

from search.foundation.errors import BadInput
from search.proof.reading import document_of, opened
from search.proof.verify import verify_file
from tests.proof.plans import balanced_file


@pytest.mark.parametrize("document", [None, 3, "plan", [], {}, {"format": "evenfield plan 9"}, {"format": 1}])
def test_refuses_what_is_no_plan_file(document: Any) -> None:
    """Without the words of the format a document is no plan file at all."""
    with pytest.raises(BadInput, match="no plan file"):
        opened(document)


@pytest.mark.parametrize(
    "text",
    [
        b"",
        b"{",
        b"\xff\xfe",
        b'{"format": NaN}',
        b'{"format": 1, "format": 2}',
        b'{"a": ' + b"1" * 5000 + b"}",
        b"[" * 200_000,
    ],
)
def test_refuses_what_is_no_json(tmp_path: Path, text: bytes) -> None:
    """Broken, ambiguous or endless JSON is bad input, never a traceback."""
    (tmp_path / "plan.json").write_bytes(text)
    with pytest.raises(BadInput):
        document_of(tmp_path / "plan.json")


def test_refuses_a_file_that_is_not_there(tmp_path: Path) -> None:
    """A file that cannot be read is bad input."""
    with pytest.raises(BadInput, match="cannot read"):
        document_of(tmp_path / "plan.json")
    with pytest.raises(BadInput, match="cannot read"):
        document_of(tmp_path)


def test_reads_a_plan_from_disk(tmp_path: Path) -> None:
    """A plan file written as JSON is proved from disk."""
    (tmp_path / "plan.json").write_text(json.dumps(balanced_file()), encoding="utf-8")
    assert verify_file(tmp_path / "plan.json").holds
