"""What the documents say can be done is done here: every command of every document is run."""

from __future__ import annotations

import os
import re
import shlex
import shutil
import subprocess
import sys
from collections.abc import Iterator
from pathlib import Path

import pytest

ROOT = Path(__file__).parents[1]
PAPERS = ("README.md", "DEVELOPERS.md")
CHECKS = re.compile(r"^\.venv/bin/(ruff|mypy|python -m pytest)\b")
"""Commands that check the project itself: CI runs them, the suite cannot run inside itself."""


def blocks(paper: str, language: str) -> list[str]:
    """The fenced blocks of a document in one language."""
    text = (ROOT / paper).read_text(encoding="utf-8")
    return re.findall(rf"^```{language}\n(.*?)^```", text, flags=re.M | re.S)


def commands(paper: str) -> Iterator[str]:
    """Every shell command of a document, one part of an `&&` chain at a time, comments cut."""
    for block in blocks(paper, "sh"):
        for line in block.splitlines():
            for part in line.split(" #")[0].split(" && "):
                if part.strip():
                    yield part.strip()


@pytest.fixture(scope="module")
def field_office(tmp_path_factory: pytest.TempPathFactory) -> Path:
    """A folder like a fresh clone, as far as a user of the command sees it."""
    folder = tmp_path_factory.mktemp("clone")
    shutil.copytree(ROOT / "configs", folder / "configs")
    for number, block in enumerate(blocks("README.md", "yaml")):
        name = re.match(r"# (\S+\.yaml)", block)
        (folder / (name[1] if name else f"example-{number}.yaml")).write_text(block, encoding="utf-8")
    return folder


def run(command: str, folder: Path) -> subprocess.CompletedProcess[str]:
    """Run one evenfield command as a user would."""
    words = shlex.split(command.removeprefix(".venv/bin/"))
    return subprocess.run(
        [sys.executable, "-m", "search.cli.main", *words[1:]],
        cwd=folder,
        env=os.environ | {"PYTHONPATH": str(ROOT), "COLUMNS": "100"},
        capture_output=True,
        text=True,
        timeout=120,
        check=False,
    )


@pytest.mark.parametrize("paper", PAPERS)
def test_every_command_of_a_document_runs(paper: str, field_office: Path) -> None:
    """Commands run in the order of the document; `# exits 3` says with which status one ends."""
    known = ("python3 -m venv", ".venv/bin/pip install")
    for block in blocks(paper, "sh"):
        for line in block.splitlines():
            said = re.search(r"# exits (\d+)", line)
            for part in line.split(" #")[0].split(" && "):
                command = part.strip()
                if not command or command.startswith(known) or CHECKS.match(command):
                    continue
                assert command.removeprefix(".venv/bin/").startswith("evenfield "), command
                done = run(command, field_office)
                wanted = int(said[1]) if said else 0
                assert done.returncode == wanted, f"{command}\n{done.stdout}\n{done.stderr}"


def test_the_python_of_the_readme_runs(field_office: Path) -> None:
    """The Python lines of the README run as they stand."""
    for block in blocks("README.md", "python"):
        done = subprocess.run(
            [sys.executable, "-c", block],
            cwd=field_office,
            env=os.environ | {"PYTHONPATH": str(ROOT)},
            capture_output=True,
            text=True,
            timeout=120,
            check=False,
        )
        assert done.returncode == 0, done.stderr


def test_the_first_lines_set_everything_up() -> None:
    """Two command lines of the README do all the set-up, and CI takes the second from there."""
    setups = [
        line for block in blocks("README.md", "sh") for line in block.splitlines() if "venv .venv" in line
    ]
    assert len(setups) == 2
    assert setups[0].endswith(".venv/bin/evenfield plan configs/odd_bays.yaml")
    assert setups[1].endswith(".venv/bin/python -m pytest")


@pytest.mark.slow
def test_both_lines_work_in_a_fresh_clone(tmp_path: Path) -> None:
    """In a clone without anything installed, both set-up lines end well (the second collects only)."""
    clone = tmp_path / "clone"
    subprocess.run(["git", "clone", "--quiet", str(ROOT), str(clone)], check=True)
    lines = [
        line for block in blocks("README.md", "sh") for line in block.splitlines() if "venv .venv" in line
    ]
    for line in (lines[0], f"{lines[1]} --collect-only --quiet"):
        done = subprocess.run(["sh", "-euc", line], cwd=clone, capture_output=True, text=True, check=False)
        assert done.returncode == 0, done.stdout[-2000:] + done.stderr[-2000:]


def test_no_machine_path_and_no_registry_is_named() -> None:
    """No file of the project names a folder of somebody's machine or a registry's address."""
    listed = subprocess.run(["git", "ls-files"], cwd=ROOT, capture_output=True, text=True, check=False)
    for name in listed.stdout.split():
        path = ROOT / name
        if path.suffix in (".py", ".md", ".toml", ".yaml", ".json", "") and path.is_file():
            text = path.read_text(encoding="utf-8", errors="ignore")
            for word in ("/" + "home/", "/" + "work/", "pypi" + ".org", "index" + "-url"):
                assert word not in text, f"{name}: {word}"
