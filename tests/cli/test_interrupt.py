"""Ctrl-C at any moment ends with 130 and without a traceback."""

from __future__ import annotations

import json
import signal
import subprocess
import sys
import time
from pathlib import Path

import pytest

from tests.cli.asked import CONFIGS, environment

STARTED = "import sys, search.cli.entry as e; print('started', file=sys.stderr, flush=True); e.run()"
HARD = "trial: x\ntreatments: 43\nblocks: {count: 43, plots: 7}\nrules: {meet_at_most: 1}\n"
"""Takes the rule solver longer than anybody waits: a plane of order 6 (there is none: Tarry 1901)."""
DELAYS = (0.0, 0.02, 0.05, 0.1, 0.2, 0.4, 0.8, 1.6)


def interrupted(folder: Path, delay: float, *words: str | Path) -> tuple[int, str, str]:
    """Exit status, standard output and error of a command that is interrupted after so many seconds."""
    child = subprocess.Popen(
        [sys.executable, "-c", STARTED, *map(str, words)],
        cwd=folder,
        env=environment(),
        stdin=subprocess.PIPE,
        stdout=subprocess.PIPE,
        stderr=subprocess.PIPE,
        text=True,
    )
    assert child.stderr is not None
    assert child.stderr.readline() == "started\n"
    time.sleep(delay)
    child.send_signal(signal.SIGINT)
    out, err = child.communicate(timeout=30)
    return child.returncode, out, err


@pytest.mark.parametrize("delay", DELAYS)
def test_a_long_inspection_is_interrupted(delay: float, tmp_path: Path) -> None:
    """While it loads, reads, counts or asks the solver: 130, one line, no traceback."""
    path = tmp_path / "hard.yaml"
    path.write_text(HARD, encoding="utf-8")
    status, out, err = interrupted(tmp_path, delay, "inspect", path, "--seconds", "60")
    assert status == 130
    assert "Traceback" not in err
    assert out == ""


@pytest.mark.parametrize("delay", DELAYS[:6])
def test_a_short_one_is_done_or_interrupted(delay: float, tmp_path: Path) -> None:
    """Whichever comes first: the whole answer with 0, or none with 130."""
    path = CONFIGS / "first_trial.yaml"
    status, out, err = interrupted(tmp_path, delay, "inspect", path, "--json")
    assert status in (0, 130)
    assert "Traceback" not in err
    assert status == 130 or out.rstrip().endswith("}")


def test_a_question_is_interrupted(tmp_path: Path) -> None:
    """`new` that waits for an answer ends with 130, and writes nothing."""
    status, _, err = interrupted(tmp_path, 1.0, "new")
    assert status == 130
    assert "Traceback" not in err
    assert not list(tmp_path.iterdir())


@pytest.mark.parametrize("delay", [0.5, 3.0])
def test_an_interrupted_search_keeps_its_best_or_nothing(delay: float, tmp_path: Path) -> None:
    """`plan` ends with 130; what it leaves is a whole packet with a plan, or no plan at all."""
    words = ("plan", CONFIGS / "first_trial.yaml", "--seconds", "60", "--out", tmp_path / "out")
    status, _, err = interrupted(tmp_path, delay, *words, "--store", tmp_path / "store.sqlite")
    assert status == 130
    assert "Traceback" not in err
    plan = tmp_path / "out" / "plan.json"
    if plan.exists():
        document = json.loads(plan.read_text(encoding="utf-8"))
        assert document["ended_by"] == "interrupted"
        assert document["score"]["connected"]
    assert not list(tmp_path.rglob(".part-*"))
