"""Whatever has happened to the file, the disk or the folder: a clear message, exit 2, and nothing lost."""

from __future__ import annotations

import contextlib
import io
import json
import multiprocessing
import os
import shutil
import sqlite3
import subprocess
import sys
import tempfile
import time
from collections import Counter
from collections.abc import Callable, Iterator
from dataclasses import replace
from fractions import Fraction
from pathlib import Path
from random import Random
from typing import Any

import pytest

from search.cli.main import invoke
from search.foundation.stopping import Limits
from search.runs import database
from search.runs.keeping import Keeping
from search.runs.kept import KeptBound
from search.runs.store import Store
from tests.cli.asked import environment
from tests.drawn import tiny_trial
from tests.runs.made import made_plan
from tests.runs.test_store import AIM, GOOD, bound, plan, problem, run

PAST = Path(__file__).parent / "stores" / "version-1.sqlite"
ROOT = hasattr(os, "geteuid") and os.geteuid() == 0
NOBODY = 65534


def told(*words: str | Path) -> tuple[int, str]:
    """Exit status and message of a command, which must print one JSON document that says the same."""
    out = io.StringIO()
    with contextlib.redirect_stdout(out):
        status = invoke([*map(str, words), "--json"])
    document = json.loads(out.getvalue())
    assert document["exit"] == status
    return status, str(document["message"])


def large(path: Path) -> bytes:
    """A store of many pages, closed, as bytes."""
    shutil.copyfile(PAST, path)
    with Store(path) as store:
        for number in range(60):
            store.keep(problem(f"{number:064x}"), AIM, plan=plan(0.5), run=run(0.5), bound=_long_bound())
    return path.read_bytes()


def _long_bound() -> KeptBound:
    certificate = {"kind": "first order", "statement": "s" * 2000, "multipliers": {}}
    return replace(bound(Fraction(9, 10)), certificate=certificate)


COMMANDS: tuple[Callable[[Path, Path], list[str | Path]], ...] = (
    lambda store, _: ["kept", "list", "--store", store],
    lambda store, _: ["kept", "show", "405493ca", "--store", store],
    lambda store, out: ["kept", "export", out / "x.jsonl", "--store", store],
    lambda store, out: ["kept", "export", out / "x.csv", "--store", store],
    lambda store, out: ["kept", "merge", store, "--store", out / "other.sqlite"],
    lambda store, _: ["kept", "prune", "--treatments", "7", "--issued-too", "--yes", "--store", store],
)


def _spoiled(whole: bytes) -> Iterator[tuple[str, bytes]]:
    """The file cut off at many points, with bits turned, with pages of junk, and as nothing but junk."""
    for cut in (
        1,
        15,
        16,
        99,
        100,
        101,
        512,
        4095,
        4096,
        4097,
        len(whole) // 2,
        len(whole) - 4096,
        len(whole) - 1,
    ):
        yield f"cut at {cut}", whole[:cut]
    for seed in range(25):
        rng, data = Random(seed), bytearray(whole)
        for _ in range(rng.choice((1, 8, 64))):
            data[rng.randrange(len(data))] ^= 1 << rng.randrange(8)
        yield f"bits {seed}", bytes(data)
    for seed in range(12):
        rng, data = Random(seed), bytearray(whole)
        page = rng.randrange(len(data) // 4096)
        data[4096 * page : 4096 * (page + 1)] = rng.randbytes(4096)
        yield f"page {page}", bytes(data)
    yield "junk", Random(1).randbytes(20_000)
    yield "head and junk", whole[:100] + Random(2).randbytes(20_000)


def test_a_spoiled_file_is_told_by_every_command(tmp_path: Path) -> None:
    """What can still be read, or exit 2 with a message that names the file; never a traceback."""
    whole = large(tmp_path / "whole.sqlite")
    found: Counter[int] = Counter()
    for number, (what, data) in enumerate(_spoiled(whole)):
        folder = tmp_path / str(number)
        folder.mkdir()
        for at, command in enumerate(COMMANDS):
            store = folder / f"{at}.sqlite"
            store.write_bytes(data)
            status, message = told(*command(store, folder))
            assert status in (0, 2), (what, message)
            if status == 2:
                assert str(store) in message or "refused" in message, (what, message)
                assert not list(folder.glob(".part-*")), what
            found[status] += 1
    assert min(found[0], found[2]) > 50


def test_a_trial_is_not_planned_into_a_spoiled_store(tmp_path: Path) -> None:
    """`plan` says so before it searches, and leaves the file to whoever wants to mend it."""
    path = tmp_path / "store.sqlite"
    path.write_bytes(Random(3).randbytes(9_000))
    before = path.read_bytes()
    trial = tmp_path / "tiny.yaml"
    trial.write_text("trial: tiny\ntreatments: 3\nblocks: {count: 3, plots: 2}\n")
    status, message = told("plan", trial, "--out", tmp_path / "out", "--store", path)
    assert status == 2
    assert "no database" in message
    assert path.read_bytes() == before
    assert not (tmp_path / "out" / "plan.json").exists()


def test_a_foreign_database_is_refused_by_every_command(tmp_path: Path) -> None:
    """Another program's file is neither read nor changed, not even where it is the other store of a merge."""
    path = tmp_path / "foreign.sqlite"
    with contextlib.closing(sqlite3.connect(path)) as connection:
        connection.execute("CREATE TABLE result (digest, aim)")
        connection.execute("CREATE VIEW problem AS SELECT 1")
        connection.commit()
    before = path.read_bytes()
    for command in COMMANDS:
        status, message = told(*command(path, tmp_path))
        assert (status, "another program's" in message) == (2, True)
    assert path.read_bytes() == before


def test_folders_and_missing_files_are_told(tmp_path: Path) -> None:
    """A folder in place of the file, a folder that is none, and a file that is not there."""
    (tmp_path / "file").write_text("x")
    for path in (tmp_path, tmp_path / "file" / "store.sqlite", tmp_path / "nowhere.sqlite"):
        for command in COMMANDS:
            status, message = told(*command(path, tmp_path))
            assert status == 2
            assert str(path) in message
    status, message = told("kept", "import", tmp_path / "nowhere.jsonl", "--store", tmp_path / "s.sqlite")
    assert (status, "cannot read" in message) == (2, True)
    assert told("kept", "export", tmp_path / "x.txt", "--store", PAST)[0] == 2
    assert told("kept", "merge", PAST, "--store", PAST) == (
        2,
        f"{PAST} is the store itself; name the other one",
    )


def test_a_file_that_is_there_is_not_overwritten(tmp_path: Path) -> None:
    """An export never takes the place of another file."""
    out = tmp_path / "x.csv"
    out.write_text("mine")
    status, message = told("kept", "export", out, "--store", PAST)
    assert (status, "stays as it is" in message) == (2, True)
    assert out.read_text() == "mine"


def test_a_store_that_another_program_holds_for_long_is_told(
    tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    """A plan that cannot be kept is issued all the same, and the message says both."""
    monkeypatch.setattr(database, "WAIT_SECONDS", 0.2)
    path = tmp_path / "store.sqlite"
    with Store(path) as store:
        store.keep(problem(), AIM, plan=plan(0.5))
    trial = tmp_path / "tiny.yaml"
    trial.write_text("trial: tiny\ntreatments: 3\nblocks: {count: 3, plots: 2}\nsearch: {moves: 50}\n")
    with contextlib.closing(sqlite3.connect(path, isolation_level=None)) as holder:
        holder.execute("BEGIN IMMEDIATE")
        status, message = told("plan", trial, "--out", tmp_path / "out", "--store", path)
        assert status == 2
        assert "is written to" in message
        assert "another program has held it" in message
        assert (tmp_path / "out" / "plan.json").exists()
        assert told("kept", "list", "--store", path)[0] == 0
        assert told("kept", "prune", "--treatments", "3", "--yes", "--store", path)[0] == 2
        holder.execute("ROLLBACK")
    with Store(path) as store:
        assert store.count() == 1


# -- no room, no permission: in a process of its own, which may be given less than this one -----------


def apart(path: Path, number: int, before: str = "") -> subprocess.CompletedProcess[str]:
    """Results counted, and kept, by a process of its own, from which something was taken away `before`."""
    code = (
        "import os, resource, signal, sys, uuid, encodings.idna\n"
        "from search.foundation.errors import BadInput\n"
        "from search.runs.store import Store\n"
        "from tests.runs.test_store import AIM, plan, problem, run\n"
        "plan(0.5), run(0.5)\n"
        f"{before}\n"
        "kept, held = 0, 0\n"
        "try:\n"
        "    if os.path.exists(sys.argv[1]):\n"
        "        with Store(sys.argv[1], only_reading=True) as store:\n"
        "            held = len(list(store.all_shown()))\n"
        "    with Store(sys.argv[1]) as store:\n"
        "        for number in range(int(sys.argv[2])):\n"
        "            store.keep(problem(f'{number:064x}'), AIM, plan=plan(0.6), run=run(0.6))\n"
        "            kept += 1\n"
        "except BadInput as error:\n"
        "    print(held, kept, error)\n"
        "    sys.exit(2)\n"
    )
    return subprocess.run(
        [sys.executable, "-c", code, str(path), str(number)],
        env=environment(),
        capture_output=True,
        text=True,
        timeout=120,
    )


def holds(path: Path, kept: int) -> None:
    """The store is whole and has every result that was told to be kept."""
    with Store(path) as store:
        assert store.count() >= kept
        assert store._database.connection.execute("PRAGMA integrity_check").fetchone() == ("ok",)


@pytest.mark.skipif(sys.platform != "linux", reason="limits of files are known on Linux")
def test_a_limit_of_the_file_size_is_told_and_loses_nothing(tmp_path: Path) -> None:
    """A file that may not grow: the message says so, and what was kept stays."""
    path = tmp_path / "store.sqlite"
    ended = apart(
        path,
        3000,
        "signal.signal(signal.SIGXFSZ, signal.SIG_IGN)\n"
        "resource.setrlimit(resource.RLIMIT_FSIZE, (2_000_000, 2_000_000))",
    )
    assert ended.returncode == 2, ended.stderr
    _, kept, message = ended.stdout.split(maxsplit=2)
    assert int(kept) > 10
    assert message.startswith(f"cannot write to the store {path}: ")
    assert "--store FILE" in message or "make room" in message
    holds(path, int(kept))


@pytest.fixture
def small_disk(tmp_path: Path) -> Iterator[Path]:
    """A disk of a megabyte."""
    disk = tmp_path / "disk"
    disk.mkdir()
    mount = shutil.which("mount")
    options = ["-t", "tmpfs", "-o", "size=1m", "none", str(disk)]
    if not ROOT or mount is None or subprocess.run([mount, *options], capture_output=True).returncode:
        pytest.skip("only root may make a disk, and not everywhere")
    yield disk
    subprocess.run(["umount", str(disk)], check=True)


def test_a_full_disk_is_told_and_loses_nothing(small_disk: Path) -> None:
    """A disk that runs full: the message says so, and what was kept stays and can be read."""
    path = small_disk / "store.sqlite"
    ended = apart(path, 5000)
    assert ended.returncode == 2, ended.stderr
    _, kept, message = ended.stdout.split(maxsplit=2)
    assert int(kept) > 10
    assert "disk is full" in message
    status, _ = told("kept", "list", "--store", path)
    assert status == 0
    status, message = told("kept", "export", small_disk / "all.jsonl", "--store", path)
    assert status == 2
    assert "cannot write" in message
    for left in small_disk.iterdir():
        assert left.name.startswith("store.sqlite")
    holds(path, int(kept))


@pytest.mark.skipif(sys.platform == "win32", reason="permissions are others there")
@pytest.mark.parametrize("closed", ["file", "folder"])
def test_what_may_only_be_read_is_read(closed: str) -> None:
    """A store in a folder, or a file, that cannot be written to: it is listed, and keeping says why not."""
    # Not in the folder of the tests, into which nobody else may look.
    folder = Path(tempfile.mkdtemp())
    path = folder / "store.sqlite"
    shutil.copyfile(PAST, path)
    Store(path).close()
    path.chmod(0o444)
    folder.chmod(0o555 if closed == "folder" else 0o755)
    become_nobody = f"os.setgid({NOBODY}); os.setuid({NOBODY})" if ROOT else ""
    try:
        ended = apart(path, 1, become_nobody)
        assert ended.returncode == 2, ended.stderr
        held, kept, message = ended.stdout.split(maxsplit=2)
        assert (held, kept) == ("5", "0")
        assert message.startswith("cannot ")
        assert "--store FILE" in message
    finally:
        folder.chmod(0o755)
        shutil.rmtree(folder)


# -- many at once -------------------------------------------------------------------------------------


def _keep_for(path: Path, first: int, seconds: float, told_by: Any) -> None:
    kept, end = 0, time.monotonic() + seconds
    trial = tiny_trial()
    try:
        while time.monotonic() < end:
            rng = Random(1000 * first + kept)
            with Keeping(trial, path) as keeping:
                for _ in range(5):
                    score = rng.uniform(0.1, 0.7)
                    digest = f"{rng.randrange(20):064x}"
                    keeping.store.keep(problem(digest), AIM, plan=plan(score), run=run(score, seed=first))
                    kept += 1
                keeping.issued(replace(made_plan(trial, GOOD)), f"K{first}-QX")
                keeping.store.list()
            if rng.random() < 0.05:
                with Store(path, only_reading=True) as store:
                    list(store.all_shown())
        told_by.put((first, kept, ""))
    except BaseException as error:
        told_by.put((first, kept, f"{type(error).__name__}: {error}"))


def written_at_once(path: Path, processes: int, seconds: float) -> int:
    """Processes that write, read, open and close one store; hands back how many results they kept."""
    with Keeping(tiny_trial(), path) as keeping:
        keeping.plan(limits=Limits(moves=10), seed=1, workers=1)
    context = multiprocessing.get_context("forkserver")
    context.set_forkserver_preload([__name__])
    told_by = context.Queue()
    running = [
        context.Process(target=_keep_for, args=(path, first, seconds, told_by)) for first in range(processes)
    ]
    for process in running:
        process.start()
    ended = [told_by.get(timeout=seconds + 120) for _ in running]
    for process in running:
        process.join()
    assert [error for _, _, error in ended if error] == []
    kept = sum(many for _, many, _ in ended)
    with Store(path) as store:
        best: dict[str, float] = {}
        runs = 0
        for shown in store.all_shown():
            for one in shown.runs:
                runs += 1
                best[shown.problem.digest] = max(best.get(shown.problem.digest, 0), one.score)
            assert shown.kept.plan is not None
            assert shown.kept.plan.score == pytest.approx(best[shown.problem.digest], abs=1e-12)
        assert runs == kept + 1
    holds(path, 1)
    return kept


def test_eight_processes_write_for_some_seconds(tmp_path: Path) -> None:
    """No error reaches anybody, every run is there, and of each problem the best plan."""
    assert written_at_once(tmp_path / "store.sqlite", 8, 5.0) >= 40


@pytest.mark.slow
def test_eight_processes_write_for_a_minute(tmp_path: Path) -> None:
    """The same for a minute."""
    kept = written_at_once(tmp_path / "store.sqlite", 8, 60.0)
    print(f"{kept} results kept in a minute by eight processes, and no error")
    assert kept > 400


def test_a_store_that_is_pruned_while_others_write_stays_whole(tmp_path: Path) -> None:
    """Pruning takes its turn among the writers, and gives no room back where that would be in their way."""
    path = tmp_path / "store.sqlite"
    with Store(path) as one, Store(path) as other:
        for number in range(20):
            one.keep(problem(f"{number:064x}"), AIM, plan=plan(0.5 + number / 100))
        assert told("kept", "prune", "--standing", "feasible", "--yes", "--store", path)[0] == 0
        assert other.count() == 0
        one.keep(problem(), AIM, plan=plan(0.5))
        assert other.count() == 1
    status, message = told("kept", "prune", "--yes", "--store", path)
    assert (status, "say which results" in message) == (2, True)
