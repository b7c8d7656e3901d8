"""Hostile input gets a clear message within 5 s and 500 MiB; nothing gets a traceback."""

from __future__ import annotations

import contextlib
import io
import json
import tempfile
import time
from collections import Counter
from collections.abc import Callable
from pathlib import Path
from random import Random

import pytest
import yaml
from hypothesis import given, settings

from search.cli.main import invoke
from search.cli.plan import default_folder
from search.trial.reading import trial_from_document
from tests.cli.asked import process
from tests.drawn import small_documents
from tests.mutations import drawn_text, mutated

MOST_SECONDS = 5.0
MOST_BYTES = 500 * 2**20
WITH_PEAK = """\
import re, resource, sys
from pathlib import Path
from search.cli.main import invoke
status = invoke(sys.argv[1:])
own = Path("/proc/self/status")
if own.exists():  # what getrusage tells there is the peak of the parent too
    peak = int(re.search(r"VmHWM:\\s+(\\d+)", own.read_text())[1])
else:
    peak = resource.getrusage(resource.RUSAGE_SELF).ru_maxrss
print(peak * 1024, file=sys.stderr)
sys.exit(status)
"""
HEAD = "trial: x\ntreatments: [A, B, C]\n"
BLOCKS = "blocks: {count: 3, plots: 2}\n"


def bomb() -> str:
    """A few lines that would unfold into a hundred million values."""
    lines = ["a: &a [x, x, x, x, x, x, x, x, x, x]"]
    for name, before in zip("bcdefgh", "abcdefg", strict=True):
        lines.append(f"{name}: &{name} [{', '.join([f'*{before}'] * 10)}]")
    return "\n".join(lines) + "\n"


def text(content: str) -> Callable[[Path], None]:
    """Writes a text."""
    return lambda path: path.write_text(content, encoding="utf-8", errors="surrogatepass") and None


def large(path: Path) -> None:
    """A hundred megabytes."""
    with path.open("wb") as stream:
        stream.truncate(100 * 2**20)


REFUSED: dict[str, tuple[Callable[[Path], None], str]] = {
    "aliases that explode": (text(bomb()), "unfolded"),
    "a tag that would run a command": (
        text(HEAD + "blocks: !!python/object/apply:os.system ['true']\n"),
        "without tags",
    ),
    "binary": (lambda path: path.write_bytes(bytes(range(256)) * 40) and None, "text"),
    "100 MB": (large, "at most 1,048,576 bytes"),
    "a billion treatments": (text("trial: x\ntreatments: 1000000000\n" + BLOCKS), "5,000"),
    "a billion plots": (text(HEAD + "blocks: {count: 5000, plots: 99999}\n"), "100,000"),
    "ten digits of blocks": (text(HEAD + "blocks: {count: 9999999999, plots: 2}\n"), "5,000"),
    "tables beyond memory": (
        text("trial: x\ntreatments: 2000\nblocks: {count: 5000, plots: 20}\n"),
        "2,500,000",
    ),
    "a million brackets": (text("[" * 1_000_000), "bracket"),
    "a million braces and brackets": (text("[{" * 500_000), "bracket"),
    "half a million dashes": (text("- " * 500_000), "deep"),
    "a number of a million digits": (text(HEAD + BLOCKS + f"plots_each: {'9' * 1_000_000}\n"), "plots_each"),
    "a name of 10,000 characters": (text(f"trial: x\ntreatments: [A, {'n' * 10_000}]\n" + BLOCKS), "10,000"),
    "a control character": (text("trial: x\x1b[2J\n" + HEAD[9:] + BLOCKS), "U+001B"),
    "a control character, escaped": (text('trial: "x\\x1b[2J"\n' + HEAD[9:] + BLOCKS), "U+001B"),
    "a right-to-left mark": (text("trial: x\ntreatments: [A, \u202eB]\n" + BLOCKS), "U+202E"),
    "a hundred thousand unknown keys": (
        text(HEAD + BLOCKS + "".join(f"k{i}:\n" for i in range(90_000))),
        'the key "k1"',
    ),
    "a hundred thousand unknown names": (
        text(HEAD + BLOCKS + "rules:\n  never_share_block:\n" + "    - [A, Bx]\n" * 60_000),
        '"Bx"',
    ),
}


@pytest.mark.parametrize("case", REFUSED)
def test_hostile_files_are_refused_in_time_and_memory(case: str, tmp_path: Path) -> None:
    """Exit 2, what is wrong, no traceback, at most 5 s and 500 MiB, and nothing written."""
    write, words = REFUSED[case]
    path = tmp_path / "trial.yaml"
    write(path)
    started = time.monotonic()
    child = process(tmp_path, path, code=WITH_PEAK)
    out, err = child.communicate(timeout=60)
    assert time.monotonic() - started < MOST_SECONDS
    *message, peak = err.rstrip().splitlines()
    assert child.returncode == 2
    assert out == ""
    assert int(peak) < MOST_BYTES
    assert words in "\n".join(message)
    assert "Traceback" not in err
    assert [entry.name for entry in tmp_path.iterdir()] == ["trial.yaml"]


NAMES = [
    "<b>bold</b>",
    "=1+1",
    "../../etc/passwd",
    "[red]no[/red]",
    "a/b\\c",
    "-rf",
    "${HOME}",
    "%s%n",
    "☃",
    "حقل",
]


@pytest.mark.parametrize("name", NAMES)
def test_odd_names_stay_text(name: str, tmp_path: Path, capsys: pytest.CaptureFixture[str]) -> None:
    """Markup, formulas, paths and other scripts are names like others: printed as typed, never obeyed."""
    document = {"trial": name, "treatments": [name, "B", "C"], "blocks": {"count": 6, "plots": 2}}
    path = tmp_path / "trial.yaml"
    path.write_text(json.dumps(document, ensure_ascii=False), encoding="utf-8")
    assert invoke(["inspect", str(path)]) == 0
    assert capsys.readouterr().out.splitlines()[0] == name
    folder = default_folder(trial_from_document(document))
    assert folder.parts[0] == "results"
    assert len(folder.parts) == 2
    assert ".." not in folder.parts[1]


def test_a_new_file_stays_in_its_folder(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    """A name full of path separators names a file in the working folder."""
    work = tmp_path / "work"
    work.mkdir()
    monkeypatch.chdir(work)
    words = ["new", "--name", "../../out", "--treatments", "4", "--plots", "3", "--bays", "4", "--json"]
    assert invoke(words) == 0
    assert [path.name for path in work.iterdir()] == ["out.yaml"]
    assert [path.name for path in tmp_path.iterdir()] == ["work"]


def test_a_packet_stays_in_its_folder(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    """Whatever trial, treatments and blocks are called, everything is written below the working folder."""
    work = tmp_path / "a" / "b"
    work.mkdir(parents=True)
    monkeypatch.chdir(work)
    blocks = {"../../up": 3, "=2+2": 3, "<i>b</i>": 3, "c:\\d": 3}
    document = {
        "trial": "../../../etc/passwd",
        "treatments": ["../x", "=1+1", "<b>", "a/b"],
        "blocks": blocks,
    }
    (work / "trial.yaml").write_text(json.dumps(document), encoding="utf-8")
    assert invoke(["plan", "trial.yaml", "--moves", "500", "--json"]) == 0
    written = [path for path in tmp_path.rglob("*") if path.is_file()]
    assert len(written) >= 4
    assert all(path.is_relative_to(work / "results") for path in written if path.name != "trial.yaml")


def status_of(content: str, path: Path, seconds: str = "0.05") -> int:
    """Exit status of `inspect`, which must print one JSON document and nothing else."""
    path.write_bytes(content.encode("utf-8", "surrogatepass"))
    out = io.StringIO()
    with contextlib.redirect_stdout(out):
        status = invoke(["inspect", str(path), "--seconds", seconds, "--json"])
    document = json.loads(out.getvalue())
    assert document["exit"] == status, document
    assert status in (0, 2, 3, 4), document["message"]
    if status == 2:
        for fault in document["faults"]:
            assert fault["found"], content
            assert fault["must_hold"], content
            assert fault["why"], content
            assert fault["try"], content
        assert document["faults"]
    return status


def spoil(seeds: range, path: Path) -> Counter[int]:
    """Statuses of so many spoiled files."""
    found: Counter[int] = Counter()
    for seed in seeds:
        rng = Random(seed)
        found[status_of(mutated(drawn_text(rng), rng), path)] += 1
    return found


def test_spoiled_files_never_get_a_traceback(tmp_path: Path) -> None:
    """Three hundred spoiled files: an answer for each, and every fault in five parts."""
    found = spoil(range(300), tmp_path / "trial.yaml")
    assert min(found[0], found[2]) > 20


@pytest.mark.slow
@pytest.mark.parametrize("batch", range(16))
def test_sixteen_thousand_spoiled_files(batch: int, tmp_path: Path) -> None:
    """The same for 16,000 more."""
    spoil(range(1000 * (batch + 1), 1000 * (batch + 2)), tmp_path / "trial.yaml")


@settings(max_examples=60, deadline=None)
@given(small_documents())
def test_drawn_files_never_get_a_traceback(document: dict[str, object]) -> None:
    """Drawn files with every rule mixed in: possible, impossible or undecided, never more than that."""
    _drawn(document)


@pytest.mark.slow
@settings(max_examples=4000, deadline=None)
@given(small_documents())
def test_four_thousand_drawn_files(document: dict[str, object]) -> None:
    """The same for 4,000."""
    _drawn(document)


def _drawn(document: dict[str, object]) -> None:
    with tempfile.TemporaryDirectory() as folder:
        content = yaml.safe_dump(document, sort_keys=False, allow_unicode=True)
        assert status_of(content, Path(folder) / "trial.yaml", "2") in (0, 2, 3, 4)
