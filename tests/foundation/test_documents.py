"""Documents on disk: one text for one content, whole or not at all, safe names."""

from __future__ import annotations

from pathlib import Path

import pytest
from hypothesis import given
from hypothesis import strategies as st

from search.foundation.documents import canonical_json, safe_name, write_whole
from search.foundation.errors import BadInput


def test_the_order_of_keys_does_not_matter() -> None:
    """Two mappings with the same content have the same canonical text."""
    assert canonical_json({"b": 1, "a": [True, None]}) == canonical_json({"a": [True, None], "b": 1})


def test_numbers_that_json_lacks_are_refused() -> None:
    """NaN and infinity have no canonical text."""
    with pytest.raises(ValueError, match="not JSON compliant"):
        canonical_json(float("nan"))


def test_a_file_is_replaced_whole(tmp_path: Path) -> None:
    """After writing, the folder holds the new content and no part files."""
    path = tmp_path / "folder" / "plan.json"
    write_whole(path, "old")
    write_whole(path, "new")
    assert path.read_text() == "new"
    assert list(path.parent.iterdir()) == [path]


def test_a_folder_that_cannot_be_written_is_told(tmp_path: Path) -> None:
    """A file in place of the folder gives one clear message."""
    (tmp_path / "file").write_text("")
    with pytest.raises(BadInput, match="choose another folder"):
        write_whole(tmp_path / "file" / "plan.json", "x")


@given(st.text(max_size=300))
def test_a_folder_name_is_safe_whatever_the_trial_is_called(name: str) -> None:
    """No separators, no dots, no blanks, never empty, never long."""
    safe = safe_name(name)
    assert 0 < len(safe) <= 60
    assert set(safe) <= set("abcdefghijklmnopqrstuvwxyz0123456789-")


def test_a_usual_name_stays_readable() -> None:
    """Low Moor winter wheat becomes low-moor-winter-wheat."""
    assert safe_name("Low Moor winter wheat, 2027/28") == "low-moor-winter-wheat-2027-28"
