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
from search.runs import rows, summary
from search.runs.database import Database
from search.runs.kept import Entry, IssuedPlan, Kept, KeptBound, KeptPlan, Problem, Run, Shown, Taken, now
from search.runs.rows import Damaged, Types, written
from search.runs.selection import EVERYTHING, Selection

DEFAULT_PATH = Path("results", "evenfield.sqlite")

Record = TypeVar("Record")


class Store:
    """Kept results in one file.

    Parameters
    ----------
    path : the file
    create : make it, and its folder, where there is none
    only_reading : change nothing, neither here nor in the file; then it must be there

    Raises
    ------
    BadInput : it cannot be opened, is damaged, or is no store of this program
    """

    def __init__(
        self, path: Path | str = DEFAULT_PATH, *, create: bool = True, only_reading: bool = False
    ) -> None:
        self.path = Path(path)
        self._database = Database(self.path, create=create, only_reading=only_reading)

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
        with self._database.writing():
            self._keep(problem, aim, plan, bound, [run] if run is not None else [])

    def take(self, shown: Iterable[Shown]) -> Taken:
        """Write down what other stores hold, where it is better than what is kept; all of it or nothing.

        Parameters
        ----------
        shown : records that were found true

        Raises
        ------
        BadInput : the store cannot be written to; nothing of this was kept
        """
        taken = Taken()
        with self._database.writing():
            for one in shown:
                taken += self._keep(one.problem, one.aim, one.kept.plan, one.kept.bound, one.runs, one.issued)
        return taken

    def issued(self, digest: str, aim: str, plan: IssuedPlan) -> None:
        """Note that a plan was issued; where it is the kept one, that carries its mark from now on."""
        with self._database.writing() as connection:
            self._insert("issued", rows.ISSUED, plan, digest, aim)
            connection.execute(
                "UPDATE plan SET mark = ? WHERE digest = ? AND aim = ? AND contents = ?",
                (plan.mark, digest, aim, canonical_json(plan.contents)),
            )
            summary.write(connection, digest, aim)

    def forget_plan(self, digest: str, aim: str) -> None:
        """Drop a plan that proved to be none of the problem's."""
        with self._database.writing() as connection:
            connection.execute("DELETE FROM plan WHERE digest = ? AND aim = ?", (digest, aim))
            summary.write(connection, digest, aim)

    def forget_bound(self, digest: str, aim: str) -> None:
        """Drop a bound that proved to be wrong."""
        with self._database.writing() as connection:
            connection.execute("DELETE FROM bound WHERE digest = ? AND aim = ?", (digest, aim))
            summary.write(connection, digest, aim)

    def prune(self, where: Selection) -> int:
        """Drop results with their plans, bounds and runs; problems of which nothing is left go too.

        Parameters
        ----------
        where : which of them

        Returns
        -------
        the number of results dropped

        Raises
        ------
        BadInput : the store cannot be written to; nothing was dropped
        """
        condition, values = where.condition()
        with self._database.writing() as connection:
            found = connection.execute(f"SELECT digest, aim FROM result WHERE {condition}", values).fetchall()
            for table in ("plan", "bound", "run", "issued", "result"):
                connection.executemany(f"DELETE FROM {table} WHERE digest = ? AND aim = ?", found)
            connection.executemany(
                "DELETE FROM problem WHERE digest = ?1 AND NOT EXISTS"
                " (SELECT 1 FROM result WHERE result.digest = ?1)",
                {(digest,) for digest, _ in found},
            )
        return len(found)

    def give_room_back(self) -> bool:
        """Make the file as small as what it holds; False where another process keeps it busy."""
        return self._database.give_room_back()

    def _keep(
        self,
        problem: Problem,
        aim: str,
        plan: KeptPlan | None,
        bound: KeptBound | None,
        runs: Iterable[Run] = (),
        issued: Iterable[IssuedPlan] = (),
    ) -> Taken:
        connection, key = self._database.connection, (problem.digest, aim)
        self._write_problem(problem)
        kept = self._kept(problem, aim)
        is_better, is_tighter = False, False
        if plan is not None and plan.beats(kept.plan, aim):
            is_better = True
            self._insert("plan", rows.PLAN, plan, *key)
        if bound is not None and bound.beats(kept.bound, aim):
            is_tighter = True
            self._insert("bound", {**rows.BOUND, "value": float}, bound, float(bound.exact), *key)
        before = connection.total_changes
        for run in runs:
            self._insert("run", rows.RUN, run, *key)
        new_runs = connection.total_changes - before
        for one in issued:
            self._insert("issued", rows.ISSUED, one, *key)
        summary.write(connection, *key)
        return Taken(1, int(is_better), int(is_tighter), new_runs)

    def _insert(self, table: str, types: Types, record: Any, *more: Any) -> None:
        """Write a row; a run or an issued plan that is there stays, a plan or a bound is replaced."""
        columns = [*types, "digest", "aim"]
        verb = "INSERT OR IGNORE" if table in ("run", "issued") else "INSERT OR REPLACE"
        self._database.connection.execute(
            f"{verb} INTO {table} ({', '.join(columns)}) VALUES ({', '.join('?' * len(columns))})",
            (*written(record), *more),
        )

    def _write_problem(self, problem: Problem) -> None:
        columns = list(rows.PROBLEM)
        updated = ", ".join(f"{column} = excluded.{column}" for column in [*columns[1:], "last_seen"])
        self._database.connection.execute(
            f"INSERT INTO problem ({', '.join(columns)}, first_seen, last_seen)"
            f" VALUES ({', '.join('?' * len(columns))}, ?, ?) ON CONFLICT (digest) DO UPDATE SET {updated}",
            (*written(problem), now(), now()),
        )
        self._database.connection.execute(
            "UPDATE result SET name = ?1, folded = folded(?1) WHERE digest = ?2 AND name <> ?1",
            (problem.name, problem.digest),
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

    def list(self, limit: int = 100, where: Selection = EVERYTHING) -> tuple[Entry, ...]:
        """What is kept, the latest plan first.

        Parameters
        ----------
        limit : at most so many
        where : which of them
        """
        condition, values = where.condition()
        with self._database.reading() as connection:
            # With a condition all lines are looked at as they lie: few are left to be put in order.
            order = "made" if where.is_everything else "+made"
            found = connection.execute(
                "SELECT digest, line.name, line.t, line.b, line.n, sizes, aim, score, bound, gap, standing,"
                " made, mark, runs FROM"
                f" (SELECT * FROM result WHERE score IS NOT NULL AND {condition}"
                f" ORDER BY {order} DESC, digest, aim LIMIT :limit) AS line JOIN problem USING (digest)"
                " ORDER BY made DESC, digest, aim",
                {**values, "limit": limit},
            )
            return tuple(_whole(rows.entry_from, found.fetchall()))

    def count(self, where: Selection = EVERYTHING, *, with_plan: bool = True) -> int:
        """Number of results kept, of those with a plan alone unless told otherwise."""
        condition, values = where.condition()
        with self._database.reading() as connection:
            planned = "score IS NOT NULL" if with_plan else "TRUE"
            query = f"SELECT count(*) FROM result WHERE {planned} AND {condition}"
            return int(connection.execute(query, values).fetchone()[0])

    def all_shown(self, where: Selection = EVERYTHING) -> Iterator[Shown]:
        """All that is kept of each result, one after another; damaged problems are passed over.

        Parameters
        ----------
        where : which of them
        """
        condition, values = where.condition()
        with self._database.reading() as connection:
            keys = connection.execute(
                f"SELECT digest, aim FROM result WHERE {condition} ORDER BY digest, aim", values
            ).fetchall()
        for digest, aim in keys:
            with self._database.reading():
                problem = self._problem(digest)
                if problem is not None and isinstance(aim, str):
                    yield self._shown(problem, aim)

    def all_of(self, digest: str, aim: str) -> Shown | None:
        """All that is kept for a problem and aim, or None where the problem is not known."""
        with self._database.reading():
            problem = self._problem(digest)
            return None if problem is None else self._shown(problem, aim)

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
                "SELECT aim FROM plan WHERE digest = ?1 UNION SELECT aim FROM bound WHERE digest = ?1"
                " UNION SELECT aim FROM run WHERE digest = ?1 UNION SELECT aim FROM issued WHERE digest = ?1"
                " ORDER BY 1",
                (digest,),
            ).fetchall()
            return tuple(
                self._shown(problem, aim)
                for (aim,) in aims
                if isinstance(aim, str)  # anything may stand in a file that somebody wrote into
            )

    def _only_one(self, word: str) -> str:
        with self._database.reading() as connection:
            found = connection.execute(
                "SELECT digest FROM problem WHERE digest >= ?1 AND digest < ?1 || 'g'"
                " AND substr(digest, 1, length(?1)) = ?1"
                " UNION SELECT digest FROM issued WHERE mark = ?2 LIMIT 6",
                (word.lower(), word.upper()),
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

    def _shown(self, problem: Problem, aim: str) -> Shown:
        found = self._database.connection.execute(
            f"SELECT {_names(rows.ISSUED)} FROM issued WHERE digest = ? AND aim = ? ORDER BY made, mark",
            (problem.digest, aim),
        )
        issued = _whole(lambda row: rows.issued_from(row, problem, aim), found.fetchall())
        return Shown(problem, aim, self._kept(problem, aim), self.runs(problem.digest, aim), tuple(issued))

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
