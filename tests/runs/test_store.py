"""What the store promises, held by every store; and what a user sees when the file is not one."""

from __future__ import annotations

import multiprocessing
import os
import sqlite3
import sys
from collections.abc import Callable, Iterator
from dataclasses import replace
from fractions import Fraction
from pathlib import Path
from typing import Any

import pytest

from search.foundation.errors import BadInput
from search.runs.kept import IssuedPlan, Kept, KeptBound, KeptPlan, Problem, Run
from search.runs.store import Store

AIM = "all pairs"
CERTIFICATE = {"kind": "first order", "statement": "no plan is better", "multipliers": {}}
GOOD = ((0, 1), (0, 2), (1, 2))


def problem(digest: str = "a" * 64, name: str = "tiny") -> Problem:
    return Problem(digest, "evenfield problem 1\n{}\n", 3, 3, 6, (2, 2, 2), name)


def plan(score: float, contents: Any = GOOD) -> KeptPlan:
    return KeptPlan(contents, score, 0.5, seed=7, moves=100, seconds=0.1, start="greedy")


def bound(exact: Fraction) -> KeptBound:
    return KeptBound(exact, "first order", CERTIFICATE)


def run(score: float, seed: int = 1) -> Run:
    return Run(seed, 2, None, 100, 100, 0.1, "moves", score, "greedy")


class StoreContract:
    """What every store keeps to, whatever lies under it."""

    @pytest.fixture
    def opened(self) -> Iterator[Callable[[], Any]]:
        """Opens the same store again and again."""
        raise NotImplementedError

    def test_nothing_is_kept_at_first(self, opened: Callable[[], Any]) -> None:
        """A new store holds nothing."""
        with opened() as store:
            assert store.best("a" * 64, AIM) is None
            assert store.list() == ()
            assert store.count() == 0

    def test_what_is_kept_comes_back_whole(self, opened: Callable[[], Any]) -> None:
        """Plan, bound and run come back as they went in, also after the store was closed."""
        best, tight, ran = plan(0.75), bound(Fraction(10**40 + 1, 10**40)), run(0.75)
        with opened() as store:
            store.keep(problem(), AIM, plan=best, bound=tight, run=ran)
        with opened() as store:
            assert store.best("a" * 64, AIM) == Kept(best, tight)
            assert store.runs("a" * 64, AIM) == (ran,)
            assert store.best("a" * 64, "overall") is None

    def test_a_worse_plan_replaces_nothing(self, opened: Callable[[], Any]) -> None:
        """Only a better plan replaces the kept one, and only a tighter bound the kept bound."""
        with opened() as store:
            store.keep(problem(), AIM, plan=plan(0.7), bound=bound(Fraction(9, 10)))
            store.keep(problem(), AIM, plan=plan(0.6), bound=bound(Fraction(95, 100)))
            store.keep(problem(), AIM, plan=plan(0.7 + 1e-14, ((0, 1), (0, 1), (0, 2))))
            kept = store.best("a" * 64, AIM)
            assert (kept.plan.score, kept.plan.contents, kept.bound.exact) == (0.7, GOOD, Fraction(9, 10))
            store.keep(problem(), AIM, plan=plan(0.72), bound=bound(Fraction(89, 100)))
            kept = store.best("a" * 64, AIM)
            assert (kept.plan.score, kept.bound.exact) == (0.72, Fraction(89, 100))

    def test_bounds_are_compared_exactly(self, opened: Callable[[], Any]) -> None:
        """Two bounds that are one float are still told apart."""
        loose, tight = Fraction(3 * 10**30 + 1, 4 * 10**30), Fraction(3, 4)
        assert float(loose) == float(tight)
        with opened() as store:
            store.keep(problem(), AIM, bound=bound(loose))
            store.keep(problem(), AIM, bound=bound(tight))
            store.keep(problem(), AIM, bound=bound(loose))
            assert store.best("a" * 64, AIM).bound.exact == tight

    def test_every_run_is_logged_once(self, opened: Callable[[], Any]) -> None:
        """Each run has a line of its own, and the same run twice has one."""
        first, second = run(0.6), run(0.5, seed=2)
        with opened() as store:
            for ran in (first, second, first):
                store.keep(problem(), AIM, plan=plan(ran.score), run=ran)
            assert {ran.uid for ran in store.runs("a" * 64, AIM)} == {first.uid, second.uid}

    def test_the_list_tells_the_latest_first(self, opened: Callable[[], Any]) -> None:
        """The list has one line for each problem and aim, with gap and number of runs."""
        with opened() as store:
            old = replace(plan(0.6), made="2020-01-01T00:00:00Z")
            store.keep(problem("b" * 64, "old"), AIM, plan=old, bound=bound(Fraction(3, 4)), run=run(0.6))
            store.keep(problem("c" * 64, "new"), "overall", plan=plan(0.5))
            new, old_entry = store.list()
            assert (new.name, new.aim, new.gap_percent, new.runs) == ("new", "overall", None, 0)
            assert (old_entry.name, old_entry.sizes, old_entry.runs) == ("old", (2, 2, 2), 1)
            assert old_entry.gap_percent == pytest.approx(20)
            assert len(store.list(limit=1)) == 1
            assert store.count() == 2

    def test_a_prefix_or_a_mark_shows_one_problem(self, opened: Callable[[], Any]) -> None:
        """The first letters of a digest, or a mark, show all that is kept; others are refused with words."""
        with opened() as store:
            store.keep(problem("ab" * 32), AIM, plan=plan(0.6), run=run(0.6))
            store.keep(problem("ab" * 32), "overall", bound=bound(Fraction(1)))
            store.keep(problem("ac" * 32), AIM, plan=plan(0.6))
            store.issued("ac" * 32, AIM, IssuedPlan("K7-QX", GOOD, 0.6))
            shown = store.show("AB")
            assert [entry.aim for entry in shown] == [AIM, "overall"]
            assert len(shown[0].runs) == 1
            assert store.show("k7-qx")[0].problem.digest == "ac" * 32
            for word, told in (
                ("a", "several"),
                ("%", "nothing"),
                ("", "nothing"),
                ("k7-qy", "nothing"),
                ("g", "nothing"),
            ):
                with pytest.raises(BadInput, match=told):
                    store.show(word)

    def test_a_false_plan_can_be_dropped(self, opened: Callable[[], Any]) -> None:
        """After a plan and a bound are dropped, any other may take their place."""
        with opened() as store:
            store.keep(problem(), AIM, plan=plan(0.9), bound=bound(Fraction(1, 2)))
            store.forget_plan("a" * 64, AIM)
            store.forget_bound("a" * 64, AIM)
            assert store.best("a" * 64, AIM) is None
            store.keep(problem(), AIM, plan=plan(0.2))
            assert store.best("a" * 64, AIM).plan.score == 0.2


class TestFile(StoreContract):
    """The store in a file."""

    @pytest.fixture
    def opened(self, tmp_path: Path) -> Callable[[], Store]:
        """The folder is made with the file."""
        return lambda: Store(tmp_path / "results" / "evenfield.sqlite")


class TestOpenFile(StoreContract):
    """The same on a file that is opened once and stays open, as a sweep has it."""

    @pytest.fixture
    def opened(self, tmp_path: Path) -> Iterator[Callable[[], Any]]:
        """One store, never closed between uses."""
        store = Store(tmp_path / "one.sqlite")

        class Open:
            def __enter__(self) -> Store:
                return store

            def __exit__(self, *_: object) -> None:
                pass

        yield Open
        store.close()


def written_to(path: Path, statement: str, *values: Any) -> None:
    connection = sqlite3.connect(path)
    with connection:
        connection.execute(statement, values)
    connection.close()


DAMAGE = {
    "no list": "{}",
    "no JSON": "[[0,1],[0,2],[1,2]",
    "a number that JSON has not": "[[0,1],[0,2],[1,NaN]]",
    "a block too few": "[[0,1],[0,2]]",
    "a plot too many": "[[0,1],[0,2],[1,2,2]]",
    "an unknown treatment": "[[0,1],[0,2],[1,3]]",
    "a negative treatment": "[[0,1],[0,2],[1,-1]]",
    "true for a number": "[[0,1],[0,2],[1,true]]",
    "lists without end": "[" * 100_000,
    "a blob": b"\x00\x01",
}


@pytest.mark.parametrize("text", DAMAGE.values(), ids=DAMAGE.keys())
def test_damaged_contents_are_passed_over_and_replaced(tmp_path: Path, text: Any) -> None:
    """A record without the shape of a plan counts for nothing, however good it claims to be."""
    path = tmp_path / "store.sqlite"
    with Store(path) as store:
        store.keep(problem(), AIM, plan=plan(0.9), bound=bound(Fraction(95, 100)))
    written_to(path, "UPDATE plan SET contents = ?", text)
    with Store(path) as store:
        assert store.best("a" * 64, AIM) == Kept(None, store.best("a" * 64, AIM).bound)  # type: ignore[union-attr]
        store.keep(problem(), AIM, plan=plan(0.3))
        assert store.best("a" * 64, AIM).plan.score == 0.3  # type: ignore[union-attr]


@pytest.mark.parametrize("exact", ["", "1", "1/0", "0/1", "-1/2", "1/x", "٣/4", "9" * 5000 + "/1"])
def test_damaged_bounds_are_passed_over(tmp_path: Path, exact: str) -> None:
    """A bound that is no rational above 0 counts for nothing."""
    path = tmp_path / "store.sqlite"
    with Store(path) as store:
        store.keep(problem(), AIM, bound=bound(Fraction(95, 100)))
    written_to(path, "UPDATE bound SET exact = ?", exact)
    with Store(path) as store:
        assert store.best("a" * 64, AIM) is None


@pytest.mark.parametrize(
    ("column", "value"),
    [("score", "high"), ("score", 1.5), ("score", 9e999), ("seed", "x"), ("versions", "[]")],
)
def test_values_of_the_wrong_kind_are_passed_over(tmp_path: Path, column: str, value: Any) -> None:
    """A plan with an absurd score or a value of another kind counts for nothing, and is not listed."""
    path = tmp_path / "store.sqlite"
    with Store(path) as store:
        store.keep(problem(), AIM, plan=plan(0.9))
    written_to(path, f"UPDATE plan SET {column} = ?", value)
    with Store(path) as store:
        assert store.best("a" * 64, AIM) is None
        assert len(store.list()) == 1
    if column == "score":
        written_to(path, "UPDATE result SET score = ?", value)
        with Store(path) as store:
            assert store.list() == ()


def test_a_file_that_is_no_database_is_refused(tmp_path: Path) -> None:
    """Text in place of a store is refused with what to do, and left as it is."""
    path = tmp_path / "store.sqlite"
    path.write_text("treatments: 12\n" * 100)
    with pytest.raises(BadInput, match=r"no database.*--store"):
        Store(path)
    assert path.read_text().startswith("treatments")


def test_another_programs_database_is_refused(tmp_path: Path) -> None:
    """A database of somebody else is refused and not touched."""
    path = tmp_path / "other.sqlite"
    written_to(path, "CREATE TABLE plan (x)")
    before = path.read_bytes()
    with pytest.raises(BadInput, match="another program's"):
        Store(path)
    assert path.read_bytes() == before


def test_a_damaged_store_is_refused(tmp_path: Path) -> None:
    """A store with pages overwritten is told from a whole one."""
    path = tmp_path / "store.sqlite"
    with Store(path) as store:
        store.keep(problem(), AIM, plan=plan(0.9))
    data = bytearray(path.read_bytes())
    data[200:] = b"\xff" * (len(data) - 200)
    path.write_bytes(bytes(data))
    with pytest.raises(BadInput, match=r"damaged.*--store"), Store(path) as store:
        store.best("a" * 64, AIM)


def test_a_newer_store_is_refused(tmp_path: Path) -> None:
    """A store of another schema is refused by name, not read wrongly."""
    path = tmp_path / "store.sqlite"
    Store(path).close()
    written_to(path, "UPDATE meta SET value = '99' WHERE key = 'schema'")
    for only_reading in (False, True):
        with pytest.raises(
            BadInput, match=r'schema "99", this version reads up to \d+: use the version that'
        ):
            Store(path, only_reading=only_reading)
    written_to(path, "UPDATE meta SET value = 'x' WHERE key = 'schema'")
    with pytest.raises(BadInput, match=r'schema "x".*--store'):
        Store(path)


def test_a_store_that_is_not_there_is_made_only_where_asked(tmp_path: Path) -> None:
    """Looking into a store makes none; planning does."""
    path = tmp_path / "deep" / "store.sqlite"
    with pytest.raises(BadInput, match="no store at"):
        Store(path, create=False)
    assert not path.parent.exists()
    Store(path).close()
    Store(path, create=False).close()


def test_an_empty_file_becomes_a_store(tmp_path: Path) -> None:
    """A file without content, as a killed process may leave it, is used."""
    path = tmp_path / "store.sqlite"
    path.touch()
    with Store(path) as store:
        assert store.count() == 0


@pytest.mark.skipif(sys.platform != "linux", reason="the folder of processes is there on Linux alone")
def test_a_folder_that_takes_no_files_is_told() -> None:
    """Where no file can be made the message says where else to."""
    with pytest.raises(BadInput, match=r"cannot open the store.*--store FILE"):
        Store("/proc/evenfield.sqlite")


def test_a_file_in_place_of_a_folder_is_told(tmp_path: Path) -> None:
    """A path through a file, and a folder in place of the file, are refused with words."""
    (tmp_path / "file").touch()
    for path in (tmp_path / "file" / "store.sqlite", tmp_path):
        with pytest.raises(BadInput, match="cannot open the store"):
            Store(path)


@pytest.mark.skipif(not hasattr(os, "geteuid") or os.geteuid() == 0, reason="root may write anywhere")
def test_a_read_only_store_is_told(tmp_path: Path) -> None:
    """A store that cannot be written to says so when something is to be kept."""
    path = tmp_path / "store.sqlite"
    Store(path).close()
    path.chmod(0o444)
    tmp_path.chmod(0o555)
    try:
        with pytest.raises(BadInput, match=r"cannot .* the store"), Store(path) as store:
            store.keep(problem(), AIM, plan=plan(0.5))
    finally:
        tmp_path.chmod(0o755)


def test_a_failed_write_is_an_error_and_keeps_nothing_of_it(tmp_path: Path) -> None:
    """Where the store may not grow, keeping fails with a message, and what was kept before stays."""
    path = tmp_path / "store.sqlite"
    with Store(path) as store:
        store.keep(problem(), AIM, plan=plan(0.5))
        connection = store._database.connection
        connection.execute(f"PRAGMA max_page_count = {connection.execute('PRAGMA page_count').fetchone()[0]}")
        long = replace(problem("d" * 64), text="x" * 200_000)
        with pytest.raises(BadInput, match=r"cannot write to the store.*disk is full"):
            store.keep(long, AIM, plan=plan(0.6))
        assert store.best("d" * 64, AIM) is None
        assert store.best("a" * 64, AIM).plan.score == 0.5  # type: ignore[union-attr]


def _keep_many(path: Path, first: int) -> None:
    with Store(path) as store:
        for number in range(20):
            store.keep(problem(), AIM, plan=plan((first * 20 + number) / 1000), run=run(0.5))


def test_many_processes_write_at_once(tmp_path: Path) -> None:
    """Four processes that make and fill one store at the same time lose nothing, and the best stays."""
    path = tmp_path / "store.sqlite"
    context = multiprocessing.get_context("spawn" if sys.platform == "win32" else "fork")
    processes = [context.Process(target=_keep_many, args=(path, first)) for first in range(4)]
    for process in processes:
        process.start()
    for process in processes:
        process.join()
        assert process.exitcode == 0
    with Store(path) as store:
        assert len(store.runs("a" * 64, AIM)) == 80
        assert store.best("a" * 64, AIM).plan.score == 0.079  # type: ignore[union-attr]
