"""Commands killed at random moments, several at a time on one store; and what must hold after each kill."""

from __future__ import annotations

import contextlib
import csv
import json
import os
import signal
import sqlite3
import subprocess
import sys
import time
from collections import Counter
from dataclasses import dataclass, field
from pathlib import Path
from random import Random
from typing import Any

from search.foundation.stopping import Ended
from search.proof.verify import verify_file
from search.runs.store import Store
from tests.cli.asked import environment

SECONDS = 120.0
"""No command takes longer, however busy the machine."""


def trial_of(number: int) -> dict[str, Any]:
    """A small trial, another for each number."""
    t = 5 + number % 6
    sizes = [3 + (number // 6 + j) % 3 for j in range(4 + (number // 18) % 7)]
    return {
        "trial": f"killed {number}",
        "treatments": t,
        "blocks": {f"bay {j}": min(size, t) for j, size in enumerate(sizes)},
        "search": {"moves": 1000 + 2 * number, "seed": number},
    }


def moves_of(sweep: int) -> int:
    """The limit of a sweep's rows: an odd number, where that of a single trial is even."""
    return 1001 + 2 * sweep


def sweep_of(number: int) -> dict[str, Any]:
    """A sweep of six rows, every one another problem and limit than those of any other number."""
    base = {"trial": f"swept {number}", "treatments": 5, "blocks": {"count": 4, "plots": 3}}
    return {
        "sweep": f"killed sweep {number}",
        "base": base | {"search": {"moves": moves_of(number)}},
        "vary": {"treatments": [5, 6], "blocks.count": [6, 7, 8], "plots_each": [[1, 60 + number]]},
    }


@dataclass(slots=True)
class Field:
    """Commands on one store, killed again and again.

    Parameters
    ----------
    folder : where everything lies
    seed : of the moments and of the order of the commands
    workers : of the sweeps, in turn
    """

    folder: Path
    seed: int
    workers: tuple[int, ...] = (1, 2)
    rng: Random = field(init=False)
    kills: int = 0
    ended: int = 0
    last_trial: int = 0
    sweeps: list[int] = field(default_factory=list)
    seen: dict[str, tuple[Any, ...]] = field(default_factory=dict)
    """Every run that was ever found in the store, as it was found."""
    issued: dict[Path, bytes] = field(default_factory=dict)
    """Every plan that was ever found issued: none may change."""
    usual: dict[str, float] = field(default_factory=dict)

    def __post_init__(self) -> None:
        self.rng = Random(self.seed)

    @property
    def store(self) -> Path:
        """The store that all commands share."""
        return self.folder / "store.sqlite"

    # -- commands --------------------------------------------------------------------------------

    def plan(self, number: int) -> list[str]:
        """Plan a trial of its own."""
        file = self._written(f"trial-{number}.yaml", trial_of(number))
        return ["plan", file, "--workers", "1", "--out", str(self.folder / "plans" / str(number))]

    def sweep(self, number: int) -> list[str]:
        """Go on with a sweep."""
        file = self._written(f"sweep-{number}.yaml", sweep_of(number))
        workers = str(self.workers[number % len(self.workers)])
        return ["sweep", file, "--workers", workers, "--out", str(self.folder / "sweeps" / str(number))]

    def _written(self, name: str, document: dict[str, Any]) -> str:
        path = self.folder / name
        if not path.exists():
            path.write_text(json.dumps(document), encoding="utf-8")  # JSON is YAML
        return str(path)

    def started(self, command: list[str]) -> subprocess.Popen[bytes]:
        """A command in a process group of its own, so that its children die with it."""
        return subprocess.Popen(
            [sys.executable, "-m", "search.cli.entry", *command, "--store", str(self.store), "--json"],
            cwd=self.folder,
            env=environment(),
            stdout=subprocess.PIPE,
            stderr=subprocess.PIPE,
            start_new_session=True,
        )

    def whole(self, command: list[str]) -> dict[str, Any]:
        """What a command says that nobody kills."""
        process = self.started(command)
        out, err = process.communicate(timeout=SECONDS)
        assert process.returncode == 0, (command, out, err)
        document: dict[str, Any] = json.loads(out)
        return document

    # -- killing ---------------------------------------------------------------------------------

    def measure(self) -> None:
        """How long the commands take where nobody kills them."""
        for command in (self.plan(0), *(self.sweep(number) for number in range(len(self.workers)))):
            began = time.monotonic()
            self.whole(command)
            key = self._key(command)
            self.usual[key] = time.monotonic() - began
        self.check()

    @staticmethod
    def _key(command: list[str]) -> str:
        return f"{command[0]} {command[command.index('--workers') + 1]}"

    def round(self, at_once: int) -> None:
        """Start commands together, kill each at a moment of its own, and look at what is left."""
        running = []
        for slot in range(at_once):
            command = self._next(slot)
            moment = self.rng.uniform(0.1, 1.15) * self.usual[self._key(command)]
            running.append((moment, command, self.started(command)))
        began = time.monotonic()
        for moment, command, process in sorted(running, key=lambda one: one[0]):
            try:
                process.wait(max(0.0, began + moment - time.monotonic()))
            except subprocess.TimeoutExpired:
                self.kills += 1
            with_group_gone(process)
            out, err = process.communicate()
            if process.returncode == 0:
                self.ended += 1
                if command[0] == "sweep":
                    self.sweeps[self._slot(command)] += 100
            else:
                assert process.returncode == -signal.SIGKILL, (command, out, err)
        self.check()

    def _next(self, slot: int) -> list[str]:
        while len(self.sweeps) <= slot:
            self.sweeps.append(len(self.sweeps) + 2)
        if self.rng.random() < 0.5:
            return self.sweep(self.sweeps[slot])
        # One of the last plans again, or a new one; no two of a round alike.
        if self.rng.random() < 0.5 and self.last_trial > 3 * len(self.sweeps):
            return self.plan(self.last_trial - slot)
        self.last_trial += 1
        return self.plan(self.last_trial)

    def _slot(self, command: list[str]) -> int:
        return next(slot for slot, number in enumerate(self.sweeps) if f"sweep-{number}.yaml" in command[1])

    # -- what must hold --------------------------------------------------------------------------

    def check(self) -> None:
        """The store opens and is whole, no run is lost, changed or doubled, plans are whole or absent."""
        if self.store.exists():
            self._check_store()
        for path in self.folder.glob("plans/*/*"):
            if not path.name.startswith(".part-"):
                assert (path.parent / "plan.json").exists(), path
        for path in self.folder.glob("plans/*/plan.json"):
            if path not in self.issued:
                assert verify_file(path).holds, path
            assert self.issued.setdefault(path, path.read_bytes()) == path.read_bytes()
        for path in self.folder.glob("sweeps/*/sweep.csv"):
            with path.open(encoding="utf-8", newline="") as stream:
                assert len(list(csv.DictReader(stream))) == 6, path

    def _check_store(self) -> None:
        Store(self.store).close()
        with contextlib.closing(sqlite3.connect(self.store, timeout=60)) as connection:
            assert connection.execute("PRAGMA integrity_check").fetchall() == [("ok",)]
            assert connection.execute("PRAGMA foreign_key_check").fetchall() == []
            rows = connection.execute("SELECT * FROM run").fetchall()
            names = [about[1] for about in connection.execute("PRAGMA table_info(run)")]
            lines = connection.execute("SELECT digest, aim, score, runs FROM result").fetchall()
            plans = connection.execute("SELECT digest, aim, score FROM plan").fetchall()
        runs = {row[names.index("uid")]: row for row in rows}
        assert {uid: runs.get(uid) for uid in self.seen} == self.seen
        self.seen = runs
        digest, aim, limit, end = map(names.index, ("digest", "aim", "limit_moves", "ended_by"))
        swept = Counter(
            (row[digest], row[limit]) for row in rows if row[limit] % 2 == 1 and row[end] != Ended.INTERRUPTED
        )
        assert max(swept.values(), default=1) == 1
        # The short lines say what the tables say.
        counted = Counter((row[digest], row[aim]) for row in rows)
        assert {(line[0], line[1]): line[3] for line in lines} == counted
        assert {line[:3] for line in lines if line[2] is not None} == set(plans)

    def finish(self) -> None:
        """What was cut short goes on: a sweep has each of its rows, searched once, and packets are whole."""
        for number in self.sweeps:
            assert len(self.whole(self.sweep(number))["rows"]) == 6
            with Store(self.store, only_reading=True) as store:
                limits = [run.limit_moves for one in store.all_shown() for run in one.runs]
            assert limits.count(moves_of(number)) == 6
        for number in range(max(1, self.last_trial - 1), self.last_trial + 1):
            self.whole(self.plan(number))
            folder = self.folder / "plans" / str(number)
            files = {path.name for path in folder.iterdir() if not path.name.startswith(".part-")}
            assert files == self.usual_files()
        self.check()

    def usual_files(self) -> set[str]:
        """Files of a packet that nobody interrupted."""
        return {path.name for path in (self.folder / "plans" / "0").iterdir()}


def with_group_gone(process: subprocess.Popen[bytes]) -> None:
    """End a process and all that it started."""
    with contextlib.suppress(ProcessLookupError):
        os.killpg(process.pid, signal.SIGKILL)
