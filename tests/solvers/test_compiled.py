"""Compiled code is kept in the user's cache folder, and found there again."""

from __future__ import annotations

import tempfile
from pathlib import Path

import pytest

from search.solvers import compiled


def test_the_cache_is_the_users(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    """The standard variable for caches is followed, and the home folder stands in for it."""
    monkeypatch.setenv("XDG_CACHE_HOME", str(tmp_path / "cache"))
    assert compiled.cache_folder() == tmp_path / "cache" / "evenfield"
    monkeypatch.delenv("XDG_CACHE_HOME")
    monkeypatch.setenv("HOME", str(tmp_path))
    assert compiled.cache_folder() == tmp_path / ".cache" / "evenfield"


def test_a_cache_that_cannot_be_written_gives_way(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    """Where the cache folder cannot be made, the system's place for temporary files is used."""
    (tmp_path / "cache").write_text("a file, where a folder should be")
    monkeypatch.setenv("XDG_CACHE_HOME", str(tmp_path / "cache"))
    folder = compiled.cache_folder()
    assert folder.parent == Path(tempfile.gettempdir())
    assert folder.name.startswith("evenfield")


def test_what_was_compiled_is_known(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    """A loaded kernel is in its cache, and an empty folder holds none."""
    compiled.warm_up()
    assert compiled.are_cached()
    monkeypatch.setenv("NUMBA_CACHE_DIR", str(tmp_path))
    assert not compiled.are_cached()
