"""The store: one SQLite file with the best plan and bound of every problem, and a line for every run.

One process writes at a time, in short transactions; others wait for it. A plan is replaced only by a
better one and a bound only by a tighter one, so that nothing is lost whoever writes last. Records are
read as untrusted: one that has not the shape of a plan or a bound is passed over, and may be replaced.
"""

from __future__ import annotations

import builtins
from collections.abc import Callable, Iterable, Iterator
from pathlib import Path
from types import TracebackType
from typing import Any, TypeVar

from search.foundation.documents import canonical_json
from search.foundation.errors import BadInput, shown
from search.runs import rows
from search.runs.database import Database
from search.runs.kept import Entry, Kept, KeptBound, KeptPlan, Problem, Run, Shown, now
from search.runs.rows import Damaged, Types, written
from search.trial.records import Contents

DEFAULT_PATH = Path("results", "evenfield.sqlite")

Record = TypeVar("Record")


class Store:
    """Kept results in one file.

    Parameters
    ----------
    path : the file
    create : make it, and its folder, where there is none

    Raises
    ------
    BadInput : it cannot be opened, is damaged, or is no store of this program
    """

    def __init__(self, path: Path | str = DEFAULT_PATH, *, create: bool = True) -> None:
        self.path = Path(path)
        if not create and not self.path.exists():
            raise BadInput(
                f"there is no store at {self.path}; `evenfield plan` makes one, "
                "or name another with --store FILE"
            )
        self._database = Database(self.path)

    def close(self) -> None:
        """Let go of the file."""
        self._database.connection.close()

    def __enter__(self) -> Store:
        return self

    def __exit__(
        self, kind: type[BaseException] | None, error: BaseException | None, trace: TracebackType | None
    ) -> None:
        self.close()

    # -- writing ---------------------------------------------------------------------------------

    def keep(
        self,
        problem: Problem,
        aim: str,
        *,
        plan: KeptPlan | None = None,
        bound: KeptBound | None = None,
        run: Run | None = None,
    ) -> None:
        """Write down a run, and its plan and bound where they are better than what is kept.

        Parameters
        ----------
        problem : what was planned
        aim : for which aim
        plan, bound : what was found, in canonical numbering
        run : how; writing down the same run again changes nothing

        Raises
        ------
        BadInput : the store cannot be written to; nothing of this was kept
        """
        key = problem.digest, aim
        with self._database.writing() as connection:
            self._write_problem(problem)
            kept = self._kept(problem, aim)
            if plan is not None and plan.beats(kept.plan, aim):
                connection.execute(_insert("plan", rows.PLAN, "digest", "aim"), (*written(plan), *key))
            if bound is not None and bound.beats(kept.bound, aim):
                row = *written(bound), float(bound.exact), *key
                connection.execute(_insert("bound", rows.BOUND, "value", "digest", "aim"), row)
            if run is not None:
                connection.execute(_insert("run", rows.RUN, "digest", "aim"), (*written(run), *key))

    def issued(self, digest: str, aim: str, contents: Contents, mark: str) -> None:
        """Write the mark of its packet to the kept plan, where that has these contents."""
        with self._database.writing() as connection:
            connection.execute(
                "UPDATE plan SET mark = ? WHERE digest = ? AND aim = ? AND contents = ?",
                (mark, digest, aim, canonical_json(contents)),
            )

    def forget_plan(self, digest: str, aim: str) -> None:
        """Drop a plan that proved to be none of the problem's."""
        with self._database.writing() as connection:
            connection.execute("DELETE FROM plan WHERE digest = ? AND aim = ?", (digest, aim))

    def forget_bound(self, digest: str, aim: str) -> None:
        """Drop a bound that proved to be wrong."""
        with self._database.writing() as connection:
            connection.execute("DELETE FROM bound WHERE digest = ? AND aim = ?", (digest, aim))

    def _write_problem(self, problem: Problem) -> None:
        columns = list(rows.PROBLEM)
        updated = ", ".join(f"{column} = excluded.{column}" for column in [*columns[1:], "last_seen"])
        self._database.connection.execute(
            f"INSERT INTO problem ({', '.join(columns)}, first_seen, last_seen)"
            f" VALUES ({', '.join('?' * len(columns))}, ?, ?) ON CONFLICT (digest) DO UPDATE SET {updated}",
            (*written(problem), now(), now()),
        )

    # -- reading ---------------------------------------------------------------------------------

    def best(self, digest: str, aim: str) -> Kept | None:
        """The best plan and bound of a problem for an aim, or None where nothing is kept.

        Raises
        ------
        BadInput : the store cannot be read
        """
        with self._database.reading():
            problem = self._problem(digest)
            kept = self._kept(problem, aim) if problem is not None else Kept(None, None)
        return None if kept == Kept(None, None) else kept

    def runs(self, digest: str, aim: str) -> tuple[Run, ...]:
        """Every run of a problem for an aim, the latest first."""
        with self._database.reading() as connection:
            found = connection.execute(
                f"SELECT {_names(rows.RUN)} FROM run WHERE digest = ? AND aim = ? ORDER BY made DESC, uid",
                (digest, aim),
            )
            return tuple(_whole(rows.run_from, found.fetchall()))

    def list(self, limit: int = 100) -> tuple[Entry, ...]:
        """What is kept, the latest plan first.

        Parameters
        ----------
        limit : at most so many
        """
        with self._database.reading() as connection:
            found = connection.execute(
                "SELECT problem.digest, name, t, b, n, sizes, plan.aim, score, value, plan.made, mark,"
                " (SELECT count(*) FROM run WHERE run.digest = plan.digest AND run.aim = plan.aim)"
                " FROM plan JOIN problem USING (digest) LEFT JOIN bound USING (digest, aim)"
                " ORDER BY plan.made DESC LIMIT ?",
                (limit,),
            )
            return tuple(_whole(rows.entry_from, found.fetchall()))

    def count(self) -> int:
        """Number of plans kept."""
        with self._database.reading() as connection:
            return int(connection.execute("SELECT count(*) FROM plan").fetchone()[0])

    def show(self, prefix: str) -> tuple[Shown, ...]:
        """All that is kept for a problem, one entry for each aim.

        Parameters
        ----------
        prefix : first letters of its digest, or the mark of an issued plan

        Raises
        ------
        BadInput : nothing, or more than one problem, answers to it
        """
        word = prefix.strip()
        digest = self._only_one(word)
        with self._database.reading() as connection:
            problem = self._problem(digest)
            if problem is None:
                raise BadInput(f"what {self.path} holds under {shown(word)} is damaged; plan the trial again")
            aims = connection.execute(
                "SELECT aim FROM plan WHERE digest = ? UNION SELECT aim FROM bound WHERE digest = ?"
                " UNION SELECT aim FROM run WHERE digest = ? ORDER BY 1",
                (digest, digest, digest),
            ).fetchall()
            return tuple(
                Shown(problem, aim, self._kept(problem, aim), self.runs(digest, aim))
                for (aim,) in aims
                if isinstance(aim, str)  # anything may stand in a file that somebody wrote into
            )

    def _only_one(self, word: str) -> str:
        with self._database.reading() as connection:
            found = connection.execute(
                "SELECT digest FROM problem WHERE substr(digest, 1, ?) = ?"
                " UNION SELECT digest FROM plan WHERE mark = ? LIMIT 6",
                (len(word), word.lower(), word.upper()),
            ).fetchall()
        digests = [str(digest) for (digest,) in found]
        if not word or not digests:
            raise BadInput(
                f"{self.path} holds nothing under {shown(word)}; `evenfield kept list` tells what there is"
            )
        if len(digests) > 1:
            several = ", ".join(digest[:12] for digest in sorted(digests)[:5])
            raise BadInput(f"several problems begin with {shown(word)}: {several}; give more of it")
        return digests[0]

    def _problem(self, digest: str) -> Problem | None:
        query = f"SELECT {_names(rows.PROBLEM)} FROM problem WHERE digest = ?"
        row = self._database.connection.execute(query, (digest,)).fetchone()
        return next(_whole(rows.problem_from, [row] if row else []), None)

    def _kept(self, problem: Problem, aim: str) -> Kept:
        def one(table: str, types: Types) -> builtins.list[Any]:
            query = f"SELECT {_names(types)} FROM {table} WHERE digest = ? AND aim = ?"
            return self._database.connection.execute(query, (problem.digest, aim)).fetchall()

        plans = _whole(lambda row: rows.plan_from(row, problem, aim), one("plan", rows.PLAN))
        bounds = _whole(rows.bound_from, one("bound", rows.BOUND))
        return Kept(next(plans, None), next(bounds, None))


def _whole(read: Callable[[Any], Record], found: Iterable[Any]) -> Iterator[Record]:
    """The records of the rows that are whole; damaged rows are passed over."""
    for row in found:
        try:
            yield read(row)
        except Damaged:
            continue


def _names(types: Types) -> str:
    return ", ".join(types)


def _insert(table: str, types: Types, *more: str) -> str:
    """A statement that writes a row; a run that is there already stays, a plan or a bound is replaced."""
    columns = [*types, *more]
    verb = "INSERT OR IGNORE" if table == "run" else "INSERT OR REPLACE"
    return f"{verb} INTO {table} ({', '.join(columns)}) VALUES ({', '.join('?' * len(columns))})"
