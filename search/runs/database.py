"""The file of the store: opened, told from foreign and damaged files, written to in whole transactions."""

from __future__ import annotations

import sqlite3
from collections.abc import Iterator
from contextlib import contextmanager
from pathlib import Path

from search.foundation.errors import BadInput, shown
from search.runs.kept import now

SCHEMA = 1
APPLICATION_ID = 0x45464C44
"""Stands in the head of the file and marks it as a store of this program."""
WAIT_SECONDS = 30.0
MOST_BYTES = 64 * 1024 * 1024
"""No text of a record may be longer."""

TABLES = """
CREATE TABLE meta (key TEXT PRIMARY KEY, value TEXT NOT NULL);
CREATE TABLE problem (
  digest TEXT PRIMARY KEY, text TEXT NOT NULL, t INTEGER NOT NULL, b INTEGER NOT NULL, n INTEGER NOT NULL,
  sizes TEXT NOT NULL, name TEXT NOT NULL, first_seen TEXT NOT NULL, last_seen TEXT NOT NULL);
CREATE TABLE plan (
  digest TEXT NOT NULL REFERENCES problem ON DELETE CASCADE, aim TEXT NOT NULL, contents TEXT NOT NULL,
  score REAL NOT NULL, objective REAL, seed INTEGER NOT NULL, moves INTEGER NOT NULL, seconds REAL NOT NULL,
  start TEXT NOT NULL, mark TEXT NOT NULL, versions TEXT NOT NULL, made TEXT NOT NULL,
  PRIMARY KEY (digest, aim));
CREATE INDEX plan_made ON plan (made);
CREATE INDEX plan_mark ON plan (mark);
CREATE TABLE bound (
  digest TEXT NOT NULL REFERENCES problem ON DELETE CASCADE, aim TEXT NOT NULL, exact TEXT NOT NULL,
  value REAL NOT NULL, argument TEXT NOT NULL, certificate TEXT NOT NULL, versions TEXT NOT NULL,
  made TEXT NOT NULL, PRIMARY KEY (digest, aim));
CREATE TABLE run (
  uid TEXT PRIMARY KEY, digest TEXT NOT NULL REFERENCES problem ON DELETE CASCADE, aim TEXT NOT NULL,
  seed INTEGER NOT NULL, workers INTEGER NOT NULL, limit_seconds REAL, limit_moves INTEGER,
  moves INTEGER NOT NULL, seconds REAL NOT NULL, ended_by TEXT NOT NULL, score REAL NOT NULL,
  start TEXT NOT NULL, versions TEXT NOT NULL, made TEXT NOT NULL);
CREATE INDEX run_of ON run (digest, aim);
"""

ANOTHER = "name another with --store FILE"
ELSEWHERE = "choose a file in a folder that can be written to, with --store FILE"

REMEDIES = {
    sqlite3.SQLITE_NOTADB: f"it is no database; move it away and a new one is made, or {ANOTHER}",
    sqlite3.SQLITE_CORRUPT: f"it is damaged; move it away and a new one is made, or {ANOTHER}",
    sqlite3.SQLITE_READONLY: f"it, or its folder, cannot be written to; {ELSEWHERE}",
    sqlite3.SQLITE_PERM: f"it cannot be opened; {ELSEWHERE}",
    sqlite3.SQLITE_CANTOPEN: f"it cannot be opened; {ELSEWHERE}",
    sqlite3.SQLITE_FULL: "the disk is full; make room and run again, nothing that was kept is lost",
    sqlite3.SQLITE_BUSY: f"another program has held it for {WAIT_SECONDS:g} s; try again when that has ended",
}


class Database:
    """An open store file.

    Parameters
    ----------
    path : the file; made, with its folder, where there is none

    Raises
    ------
    BadInput : it cannot be opened, is damaged, or is no store of this program
    """

    def __init__(self, path: Path) -> None:
        self.path = path
        with self.told("open"):
            path.parent.mkdir(parents=True, exist_ok=True)
            self.connection = sqlite3.connect(path, timeout=WAIT_SECONDS, isolation_level=None)
        try:
            with self.told("open"):
                self._prepare()
        except BaseException:
            self.connection.close()
            raise

    @contextmanager
    def reading(self) -> Iterator[sqlite3.Connection]:
        """Read; what goes wrong is told as `BadInput`."""
        with self.told("read"):
            yield self.connection

    @contextmanager
    def writing(self) -> Iterator[sqlite3.Connection]:
        """Write all or nothing; what goes wrong is told as `BadInput`."""
        with self.told("write to"), self._transaction():
            yield self.connection

    @contextmanager
    def told(self, doing: str) -> Iterator[None]:
        """Turn what the system says into what a user can do about it."""
        try:
            yield
        except sqlite3.Error as error:
            cause = REMEDIES.get(getattr(error, "sqlite_errorcode", 0) & 0xFF, f"{error}; {ANOTHER}")
            raise BadInput(f"cannot {doing} the store {self.path}: {cause}") from error
        except UnicodeDecodeError as error:  # the message of the system quotes what is damaged
            cause = REMEDIES[sqlite3.SQLITE_CORRUPT]
            raise BadInput(f"cannot {doing} the store {self.path}: {cause}") from error
        except OSError as error:
            reason = (error.strerror or "no access").lower()
            raise BadInput(f"cannot {doing} the store {self.path}: {reason}; {ELSEWHERE}") from error

    @contextmanager
    def _transaction(self) -> Iterator[None]:
        self.connection.execute("BEGIN IMMEDIATE")
        try:
            yield
            self.connection.execute("COMMIT")
        except BaseException:
            # After a full disk SQLite has already taken everything back.
            if self.connection.in_transaction:
                self.connection.execute("ROLLBACK")
            raise

    def _prepare(self) -> None:
        self.connection.setlimit(sqlite3.SQLITE_LIMIT_LENGTH, MOST_BYTES)
        # A foreign file may carry views and triggers: nothing in it is run.
        self.connection.execute("PRAGMA trusted_schema = OFF")
        self.connection.execute("PRAGMA foreign_keys = ON")
        if self._is_empty():
            self._use_write_ahead_log()
            with self._transaction():
                # Another process may have been faster.
                if self._is_empty():
                    self._create()
        self._check_schema()

    def _is_empty(self) -> bool:
        return self._number("SELECT count(*) FROM sqlite_master") == 0

    def _number(self, query: str) -> int:
        return int(self.connection.execute(query).fetchone()[0])

    def _use_write_ahead_log(self) -> None:
        try:
            self.connection.execute("PRAGMA journal_mode = WAL")
        except sqlite3.OperationalError as error:
            # Another process is making the store at this moment, and switches for all.
            if error.sqlite_errorcode & 0xFF not in (sqlite3.SQLITE_BUSY, sqlite3.SQLITE_LOCKED):
                raise

    def _create(self) -> None:
        for statement in filter(str.strip, TABLES.split(";")):
            self.connection.execute(statement)
        self.connection.execute(f"PRAGMA application_id = {APPLICATION_ID}")
        meta = {"format": "evenfield store", "schema": str(SCHEMA), "made": now()}
        self.connection.executemany("INSERT INTO meta VALUES (?, ?)", meta.items())

    def _check_schema(self) -> None:
        if self._number("PRAGMA application_id") != APPLICATION_ID:
            raise BadInput(f"{self.path} is another program's database; nothing in it was touched: {ANOTHER}")
        row = self.connection.execute("SELECT value FROM meta WHERE key = 'schema'").fetchone()
        if row != (str(SCHEMA),):
            found = shown(str(row[0])) if row else "none"
            raise BadInput(
                f"{self.path} has the schema {found}, this version reads {SCHEMA}: "
                f"use the version that wrote it, or {ANOTHER}"
            )
