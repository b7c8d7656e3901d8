"""Commands killed at random moments, several at a time on one store; and what must hold after each kill."""

from __future__ import annotations

import contextlib
import csv
import json
import signal
import sqlite3
import time
from collections import Counter
from dataclasses import dataclass, field
from pathlib import Path
from random import Random
from typing import Any

from search.foundation.stopping import Ended
from search.proof.verify import verify_file
from search.runs.store import Store
from tests.cli.nursery import Command, start

ROWS = 4
"""Of a sweep."""
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
    """A sweep of four rows, every one another problem and limit than those of any other number."""
    base = {"trial": f"swept {number}", "treatments": 5, "blocks": {"count": 4, "plots": 3}}
    return {
        "sweep": f"killed sweep {number}",
        "base": base | {"search": {"moves": moves_of(number)}},
        "vary": {"treatments": [5, 6], "blocks.count": [6, 7], "plots_each": [[1, 60 + number]]},
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
    workers: tuple[int, ...] = (1, 1, 1, 1, 2)
    rng: Random = field(init=False)
    started_: int = 0
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

    def started(self, words: list[str]) -> Command:
        """A command on the store."""
        self.started_ = self.started_ + 1
        out = self.folder / f"{self.started_}.out"
        return start((*words, "--store", str(self.store), "--json"), out)

    def whole(self, words: list[str]) -> dict[str, Any]:
        """What a command says that nobody kills."""
        command = self.started(words)
        assert command.ends_within(SECONDS), command
        command.kill()  # whatever it left running
        assert command.status == 0, command
        document: dict[str, Any] = json.loads(command.out.read_text(encoding="utf-8"))
        return document

    # -- killing ---------------------------------------------------------------------------------

    def measure(self) -> None:
        """How long the commands take where nobody kills them."""
        for command in (self.plan(0), *(self.sweep(number) for number in {0, len(self.workers) - 1})):
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
        began = time.monotonic()
        for slot in range(at_once):
            words = self._next(slot)
            moment = self.rng.uniform(0.0, 1.0) * self.usual[self._key(words)]
            running.append((moment, words, self.started(words)))
        for moment, words, command in sorted(running, key=lambda one: one[0]):
            command.ends_within(began + moment - time.monotonic())
            command.kill()
            if command.status == -signal.SIGKILL:
                self.kills += 1
                continue
            assert command.status == 0, command
            self.ended += 1
            if words[0] == "sweep":
                self.sweeps[self._slot(words)] += 100
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
                assert len(list(csv.DictReader(stream))) == ROWS, path

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
            assert len(self.whole(self.sweep(number))["rows"]) == ROWS
            with Store(self.store, only_reading=True) as store:
                limits = [run.limit_moves for one in store.all_shown() for run in one.runs]
            assert limits.count(moves_of(number)) == ROWS
        for number in range(max(1, self.last_trial - 1), self.last_trial + 1):
            self.whole(self.plan(number))
            folder = self.folder / "plans" / str(number)
            files = {path.name for path in folder.iterdir() if not path.name.startswith(".part-")}
            assert files == self.usual_files()
        self.check()

    def usual_files(self) -> set[str]:
        """Files of a packet that nobody interrupted."""
        return {path.name for path in (self.folder / "plans" / "0").iterdir()}
