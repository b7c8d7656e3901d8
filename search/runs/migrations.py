"""The tables of the store, as the steps that lead from an empty file to them.

A store of version n has gone through the first n steps. A new one goes through all of them, so that it is
built like one that grew old. A step that has ever left this house is never changed: another one follows it.
What only repeats other tables in short (`search.runs.summary`) is written anew after the steps.
"""

from __future__ import annotations

import sqlite3
from collections.abc import Callable
from typing import Any

from search.efficiency.balance import is_balanced
from search.foundation.errors import EvenfieldError
from search.runs.rows import Damaged, contents_from, sizes_from
from search.trial.rebuilding import rebuilt


def _first_tables(connection: sqlite3.Connection) -> None:
    """Problems, the best plan and bound of each, runs."""
    _all(
        connection,
        """
        CREATE TABLE meta (key TEXT PRIMARY KEY, value TEXT NOT NULL);
        CREATE TABLE problem (
          digest TEXT PRIMARY KEY, text TEXT NOT NULL, t INTEGER NOT NULL, b INTEGER NOT NULL,
          n INTEGER NOT NULL, sizes TEXT NOT NULL, name TEXT NOT NULL, first_seen TEXT NOT NULL,
          last_seen TEXT NOT NULL);
        CREATE TABLE plan (
          digest TEXT NOT NULL REFERENCES problem ON DELETE CASCADE, aim TEXT NOT NULL,
          contents TEXT NOT NULL, score REAL NOT NULL, objective REAL, seed INTEGER NOT NULL,
          moves INTEGER NOT NULL, seconds REAL NOT NULL, start TEXT NOT NULL, mark TEXT NOT NULL,
          versions TEXT NOT NULL, made TEXT NOT NULL, PRIMARY KEY (digest, aim));
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
        """,
    )


def _results_in_short(connection: sqlite3.Connection) -> None:
    """A short line for each result, issued plans that no better one displaces, runs closed for good."""
    _all(
        connection,
        """
        ALTER TABLE plan ADD COLUMN balanced INTEGER NOT NULL DEFAULT 0;
        DROP INDEX plan_made;
        DROP INDEX plan_mark;
        CREATE TABLE result (
          digest TEXT NOT NULL REFERENCES problem ON DELETE CASCADE, aim TEXT NOT NULL, name TEXT NOT NULL,
          folded TEXT NOT NULL, t INTEGER NOT NULL, b INTEGER NOT NULL, n INTEGER NOT NULL,
          score REAL, bound REAL, gap REAL, standing TEXT NOT NULL, mark TEXT NOT NULL,
          made TEXT NOT NULL, runs INTEGER NOT NULL, PRIMARY KEY (digest, aim)) WITHOUT ROWID;
        CREATE INDEX result_made ON result (made DESC, digest, aim);
        CREATE TABLE issued (
          mark TEXT NOT NULL, digest TEXT NOT NULL REFERENCES problem ON DELETE CASCADE, aim TEXT NOT NULL,
          contents TEXT NOT NULL, score REAL NOT NULL, made TEXT NOT NULL,
          PRIMARY KEY (mark, digest, aim, contents));
        CREATE INDEX issued_of ON issued (digest, aim);
        CREATE TRIGGER run_is_closed BEFORE UPDATE ON run BEGIN
          SELECT RAISE(ABORT, 'a finished run is never changed'); END;
        CREATE TRIGGER issued_is_closed BEFORE UPDATE ON issued BEGIN
          SELECT RAISE(ABORT, 'an issued plan is never changed'); END;
        INSERT OR IGNORE INTO issued
          SELECT mark, digest, aim, contents, score, made FROM plan WHERE mark <> '';
        """,
    )
    # No plan can be balanced that is not the best possible, and the bounds of old stores know those.
    candidates = connection.execute(
        "SELECT digest, aim, text, t, sizes, contents FROM plan JOIN problem USING (digest)"
        " JOIN bound USING (digest, aim) WHERE score >= value * (1 - 1e-6)"
    ).fetchall()
    balanced = [(digest, aim) for digest, aim, *rest in candidates if _is_balanced(aim, *rest)]
    connection.executemany("UPDATE plan SET balanced = 1 WHERE digest = ? AND aim = ?", balanced)


def _is_balanced(aim: Any, text: Any, t: Any, sizes: Any, contents: Any) -> bool:
    try:
        return is_balanced(rebuilt(text, aim), contents_from(contents, t, sizes_from(sizes)))
    except (Damaged, EvenfieldError, AttributeError, TypeError):
        return False  # anything may stand in a file that somebody wrote into


def _all(connection: sqlite3.Connection, script: str) -> None:
    """Run statements one by one; `executescript` would end the transaction that they belong to."""
    statement = ""
    for line in script.splitlines(keepends=True):
        statement += line
        if sqlite3.complete_statement(statement):
            connection.execute(statement)
            statement = ""
    if statement.strip():
        raise ValueError(statement)


STEPS: tuple[Callable[[sqlite3.Connection], None], ...] = (_first_tables, _results_in_short)
