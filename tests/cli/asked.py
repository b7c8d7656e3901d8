"""The command line as a user runs it: in this process, or in one of its own."""

from __future__ import annotations

import json
import os
import subprocess
import sys
from pathlib import Path
from typing import Any

import pytest

from search.cli.main import invoke

ROOT = Path(__file__).parents[2]
CONFIGS = ROOT / "configs"


def answer(capsys: pytest.CaptureFixture[str], *words: str | Path) -> tuple[int, dict[str, Any]]:
    """Exit status and the one JSON document on standard output."""
    capsys.readouterr()
    status = invoke([*map(str, words), "--json"])
    return status, json.loads(capsys.readouterr().out)


def said(capsys: pytest.CaptureFixture[str], *words: str | Path) -> tuple[int, str, str]:
    """Exit status, standard output and standard error, for people."""
    capsys.readouterr()
    status = invoke([*map(str, words)])
    out, err = capsys.readouterr()
    return status, out, err


def environment() -> dict[str, str]:
    """The surroundings of a process that finds the package."""
    return os.environ | {"PYTHONPATH": str(ROOT), "PYTHONHASHSEED": "0"}


def process(folder: Path, *words: str | Path, code: str) -> subprocess.Popen[str]:
    """`inspect` in a process of its own, through a few lines of Python."""
    return subprocess.Popen(
        [sys.executable, "-c", code, "inspect", *map(str, words)],
        cwd=folder,
        env=environment(),
        stdout=subprocess.PIPE,
        stderr=subprocess.PIPE,
        text=True,
    )
