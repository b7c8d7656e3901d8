"""A store of every past version is brought up to date with nothing lost, or stays as it was."""

from __future__ import annotations

import shutil
import sqlite3
from collections.abc import Callable
from contextlib import closing
from pathlib import Path
from typing import Any

import pytest

from search.foundation.errors import BadInput
from search.proof.results import proved
from search.runs import database
from search.runs.exchange import document
from search.runs.migrations import STEPS
from search.runs.selection import Selection
from search.runs.store import Store

PAST = sorted((Path(__file__).parent / "stores").glob("version-*.sqlite"))
KEPT = {
    "triangle": (0.75, "balanced", "K7-QX"),
    "odd bays": (0.8389830508474577, "bounded", "M3-RT"),
    "sets": (0.7402143449743069, "proven optimal", ""),
    "control": (0.846055979643766, "bounded", ""),
    "contrasts": (0.8888888888888887, "bounded", ""),
}
"""What the program said when it wrote the stores of the past: efficiency, standing, mark."""


@pytest.fixture(params=PAST, ids=lambda path: path.stem)
def past(request: pytest.FixtureRequest, tmp_path: Path) -> Path:
    """A store of a past version, which may be written to."""
    path = tmp_path / "past.sqlite"
    shutil.copyfile(request.param, path)
    return path


def tables_of(path: Path) -> set[tuple[str, str, str]]:
    """Every table, index and trigger with the words that made it, blanks aside."""
    with closing(sqlite3.connect(path)) as connection:
        found = connection.execute("SELECT type, name, sql FROM sqlite_master").fetchall()
    return {(kind, name, " ".join((sql or "").split())) for kind, name, sql in found}


def schema_of(path: Path) -> str:
    with closing(sqlite3.connect(path)) as connection:
        return str(connection.execute("SELECT value FROM meta WHERE key = 'schema'").fetchone()[0])


def test_there_is_a_store_of_every_past_version() -> None:
    """No version of the tables but the present one is without its store."""
    assert [path.stem for path in PAST] == [f"version-{number}" for number in range(1, len(STEPS))]


@pytest.mark.parametrize("only_reading", [False, True])
def test_a_past_store_holds_what_it_held(past: Path, only_reading: bool) -> None:
    """Plans, standings, marks, bounds and runs are there, and every certificate is still proved."""
    with Store(past, only_reading=only_reading) as store:
        entries = {entry.name: entry for entry in store.list()}
        assert {name: (entry.score, entry.standing, entry.mark) for name, entry in entries.items()} == KEPT
        assert all(entry.runs == 2 for entry in entries.values())
        for shown in store.all_shown():
            assert proved(document(shown)).t == shown.problem.t
        assert store.show("M3-RT")[0].issued[0].mark == "M3-RT"
        assert store.count(Selection(issued=True)) == 2


def test_a_past_store_becomes_like_a_new_one(past: Path, tmp_path: Path) -> None:
    """Tables, indexes and triggers are those of a store that was made today."""
    Store(past).close()
    Store(tmp_path / "new.sqlite").close()
    assert tables_of(past) == tables_of(tmp_path / "new.sqlite")
    assert schema_of(past) == str(len(STEPS))


def test_looking_into_a_past_store_leaves_it_as_it_was(past: Path) -> None:
    """Who only reads changes no byte, and makes no file beside it that stays."""
    before = past.read_bytes()
    with Store(past, only_reading=True) as store:
        assert store.count() == len(KEPT)
    assert past.read_bytes() == before
    assert [path.name for path in past.parent.iterdir()] == ["past.sqlite"]


@pytest.mark.parametrize("step", range(1, len(STEPS)))
def test_a_step_that_fails_leaves_the_store_as_it_was(
    past: Path, step: int, monkeypatch: pytest.MonkeyPatch
) -> None:
    """Whatever happens within a step, the store is that of before, and the next one who opens it succeeds."""
    before, version = tables_of(past), schema_of(past)

    def broken(connection: sqlite3.Connection) -> None:
        STEPS[step](connection)
        raise sqlite3.OperationalError("the light goes out")

    steps: list[Callable[[sqlite3.Connection], Any]] = [*STEPS]
    steps[step] = broken
    with monkeypatch.context() as patched:
        patched.setattr(database, "STEPS", tuple(steps))
        with pytest.raises(BadInput, match=r"cannot open the store.*the light goes out"):
            Store(past)
    assert (tables_of(past), schema_of(past)) == (before, version)
    with Store(past) as store:
        assert store.count() == len(KEPT)


def test_what_is_finished_is_closed(past: Path) -> None:
    """Nobody can change a run or an issued plan, not even by hand."""
    Store(past).close()
    with closing(sqlite3.connect(past)) as connection:
        for table in ("run", "issued"):
            with pytest.raises(sqlite3.IntegrityError, match="never changed"):
                connection.execute(f"UPDATE {table} SET score = 1")
