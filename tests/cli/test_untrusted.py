"""Plan files and stores come from anywhere: spoiled ones get a message, never a traceback."""

from __future__ import annotations

import contextlib
import io
import json
import sqlite3
from collections import Counter
from pathlib import Path
from random import Random
from typing import Any

from search.cli.main import invoke
from search.foundation.stopping import Limits
from search.runs.keeping import Keeping
from tests.drawn import tiny_trial
from tests.field.made import document_of, trial_with
from tests.proof.test_fuzz import mutated

JUNK: list[Any] = [
    None,
    0,
    -1,
    1e308,
    float("inf"),
    "",
    "x",
    "[[-1]]",
    "[[99999999]]",
    "{}",
    "null",
    b"\xff\xfe",
]
JUNK += ["9" * 5000, "1/0", "-1/2", 2**62, "2027-13-99", '{"kind": 3}', "<b>", "=1+1"]


def status_of(*words: str | Path) -> int:
    """Exit status of a command, which must print one JSON document that says the same."""
    out = io.StringIO()
    with contextlib.redirect_stdout(out):
        status = invoke([*map(str, words), "--json"])
    document = json.loads(out.getvalue())
    assert document["exit"] == status
    assert status in (0, 2), document["message"]
    return status


def test_spoiled_plan_files_draw_no_packet_and_no_traceback(tmp_path: Path) -> None:
    """`packet` of a plan file with junk in it: a packet, or exit 2."""
    plan = document_of(trial_with())
    path = tmp_path / "plan.json"
    found: Counter[int] = Counter()
    for seed in range(60):
        try:
            text = json.dumps(mutated(plan, Random(seed)))
        except ValueError:
            continue  # a whole number too long for anybody to write
        path.write_bytes(text.encode("utf-8", "surrogatepass"))
        found[status_of("packet", path, "--out", tmp_path / str(seed))] += 1
    assert found[2] > found[0]


def kept(path: Path) -> str:
    """A store with one plan; hands back the digest of its problem."""
    with Keeping(tiny_trial(), path) as keeping:
        plan = keeping.plan(limits=Limits(moves=100), seed=1, workers=1)
    return plan.digest


def test_damaged_stores_are_told(tmp_path: Path) -> None:
    """Bytes of the file turned, or its end cut off: what it holds, or exit 2."""
    kept(tmp_path / "whole.sqlite")
    _closed(tmp_path / "whole.sqlite")
    whole = (tmp_path / "whole.sqlite").read_bytes()
    found: Counter[int] = Counter()
    for seed in range(120):
        rng, data = Random(seed), bytearray(whole)
        for _ in range(rng.choice((1, 5, 50, 500))):
            data[rng.randrange(len(data))] = rng.randrange(256)
        path = tmp_path / f"{seed}.sqlite"
        path.write_bytes(data[: rng.choice((len(data), rng.randrange(len(data))))])
        found[status_of("kept", "list", "--store", path)] += 1
    assert min(found[0], found[2]) > 10


def _closed(path: Path) -> None:
    with contextlib.closing(sqlite3.connect(path)) as connection:
        connection.execute("PRAGMA wal_checkpoint(TRUNCATE)")


def test_rows_that_somebody_wrote_are_believed_in_nothing(tmp_path: Path) -> None:
    """Any column of any table may hold anything."""
    digest = kept(tmp_path / "whole.sqlite")
    _closed(tmp_path / "whole.sqlite")
    whole = (tmp_path / "whole.sqlite").read_bytes()
    for seed in range(60):
        rng, path = Random(seed), tmp_path / f"{seed}.sqlite"
        path.write_bytes(whole)
        with contextlib.closing(sqlite3.connect(path)) as connection:
            for _ in range(rng.choice((1, 2, 4))):
                table = rng.choice(["problem", "plan", "bound", "run", "meta"])
                column = rng.choice([row[1] for row in connection.execute(f"PRAGMA table_info({table})")])
                with contextlib.suppress(sqlite3.Error):
                    connection.execute(f"UPDATE {table} SET {column} = ?", (rng.choice(JUNK),))
            connection.commit()
        status_of("kept", "list", "--store", path)
        status_of("kept", "show", digest[:12], "--store", path)
