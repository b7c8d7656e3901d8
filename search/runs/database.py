"""The file of the store: opened, told from foreign and damaged files, written to in whole transactions."""

from __future__ import annotations

import re
import sqlite3
from collections.abc import Iterator
from contextlib import contextmanager
from pathlib import Path

from search.foundation.errors import BadInput, shown
from search.runs import summary
from search.runs.kept import now
from search.runs.migrations import STEPS

SCHEMA = len(STEPS)
"""Version of the tables that this program writes; older ones are brought up to it."""
APPLICATION_ID = 0x45464C44
"""Stands in the head of the file and marks it as a store of this program."""
WAIT_SECONDS = 30.0
MOST_BYTES = 64 * 1024 * 1024
"""No text of a record may be longer."""

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
    create : make it where there is none
    only_reading : nothing is made or changed; an older store is brought up to date in memory alone

    Raises
    ------
    BadInput : it cannot be opened, is damaged, or is no store of this program
    """

    def __init__(self, path: Path, *, create: bool = True, only_reading: bool = False) -> None:
        self.path = path
        with self.told("open"):
            if (only_reading or not create) and not path.exists():
                raise BadInput(f"there is no store at {path}; `evenfield plan` makes one, or {ANOTHER}")
            if only_reading:
                self.connection = _opened_to_read(path)
            else:
                path.parent.mkdir(parents=True, exist_ok=True)
                self.connection = sqlite3.connect(path, timeout=WAIT_SECONDS, isolation_level=None)
        try:
            with self.told("open"):
                self._prepare(only_reading)
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

    def give_room_back(self) -> bool:
        """Make the file as small as what it holds; False where others are at work, or there is no room to.

        Raises
        ------
        BadInput : the file is damaged
        """
        with self.told("write to"):
            try:
                self.connection.execute("VACUUM")
                self.connection.execute("PRAGMA wal_checkpoint(TRUNCATE)")
            except sqlite3.OperationalError:
                return False  # nothing is lost by that: the room is used for later results
        return True

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

    def _prepare(self, only_reading: bool) -> None:
        _guard(self.connection)
        if self._is_empty():
            if only_reading:
                raise BadInput(f"{self.path} is an empty file, and no store yet; {ANOTHER}")
            self._use_write_ahead_log()
        else:
            self._check_owner()
        if self._version() < SCHEMA:
            if only_reading:
                self._copy_into_memory()
            with self._transaction():
                self._bring_up_to_date()

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

    def _check_owner(self) -> None:
        if self._number("PRAGMA application_id") != APPLICATION_ID:
            raise BadInput(f"{self.path} is another program's database; nothing in it was touched: {ANOTHER}")

    def _version(self) -> int:
        """Version of the tables, 0 for none."""
        if self._is_empty():
            return 0
        row = self.connection.execute("SELECT value FROM meta WHERE key = 'schema'").fetchone()
        found = str(row[0]) if row else "none"
        if not re.fullmatch("[1-9][0-9]{0,5}", found, re.ASCII):
            raise BadInput(f"{self.path} does not say how it is built (schema {shown(found)}): {ANOTHER}")
        if int(found) > SCHEMA:
            raise BadInput(
                f"{self.path} has the schema {shown(found)}, this version reads up to {SCHEMA}: "
                f"use the version that wrote it, or {ANOTHER}"
            )
        return int(found)

    def _bring_up_to_date(self) -> None:
        version = self._version()  # asked again: another process may have been faster
        if version == SCHEMA:
            return
        for step in STEPS[version:]:
            step(self.connection)
        summary.write_all(self.connection)
        if version == 0:
            self.connection.execute(f"PRAGMA application_id = {APPLICATION_ID}")
            meta = {"format": "evenfield store", "schema": str(SCHEMA), "made": now()}
            self.connection.executemany("INSERT INTO meta VALUES (?, ?)", meta.items())
        else:
            self.connection.execute("UPDATE meta SET value = ? WHERE key = 'schema'", (str(SCHEMA),))

    def _copy_into_memory(self) -> None:
        copy = sqlite3.connect(":memory:", isolation_level=None)
        self.connection.backup(copy)
        self.connection.close()
        self.connection = copy
        _guard(copy)


def _guard(connection: sqlite3.Connection) -> None:
    connection.setlimit(sqlite3.SQLITE_LIMIT_LENGTH, MOST_BYTES)
    # A foreign file may carry views and triggers: nothing in it is run.
    connection.execute("PRAGMA trusted_schema = OFF")
    connection.execute("PRAGMA foreign_keys = ON")
    summary.prepare(connection)


def _opened_to_read(path: Path) -> sqlite3.Connection:
    """A connection that changes nothing; a store on a medium that cannot be written to is read as it lies."""

    def connect(how: str) -> sqlite3.Connection:
        name = f"{path.absolute().as_uri()}?{how}"
        connection = sqlite3.connect(name, uri=True, timeout=WAIT_SECONDS, isolation_level=None)
        try:
            connection.execute("SELECT count(*) FROM sqlite_master").fetchone()
            connection.execute("PRAGMA query_only = ON")
        except BaseException:
            connection.close()
            raise
        return connection

    try:
        return connect("mode=rw")
    except sqlite3.OperationalError as error:
        log = path.with_name(f"{path.name}-wal")
        cannot_write = error.sqlite_errorcode & 0xFF in (sqlite3.SQLITE_CANTOPEN, sqlite3.SQLITE_READONLY)
        if not cannot_write or not path.is_file() or (log.exists() and log.stat().st_size):
            raise
        # The log of a store needs a folder that can be written to. Where it is empty nobody needs it.
        return connect("mode=ro&immutable=1")
