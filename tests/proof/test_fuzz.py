"""Whatever is done to a plan file, the answer is a verdict or bad input, never a traceback."""

from __future__ import annotations

import copy
import json
import random
from collections.abc import Iterator
from typing import Any

import pytest

from search.foundation.errors import BadInput
from search.proof.verify import verify
from tests.proof.plans import balanced_file, sealed
from tests.proof.test_verify import uneven_files

Path = tuple[str | int, ...]

JUNK: list[Any] = [
    None, True, False, 0, -1, 1, 2, 101, 0.5, 10**30, 10**400, -(10**400), 10**5000, 1e308, 5e-324,
    float("nan"), float("inf"), "", "x", "A", "T01", "block 1", "\ud800", "\x00", "٣", "1e5", "1/0",
    "0/1", "-3/7", "9" * 400, "9" * 401 + "/7", "all pairs", "overall", "against control",
    [], {}, [[]], [None], ["T01"], {"a": 1}, {"T01": "x"},
]  # fmt: skip


def paths(value: Any, path: Path = ()) -> Iterator[Path]:
    """Every place within a document."""
    if path:
        yield path
    inner = value.items() if isinstance(value, dict) else enumerate(value) if isinstance(value, list) else ()
    for key, item in inner:
        yield from paths(item, (*path, key))


def mutated(document: dict[str, Any], draw: random.Random) -> dict[str, Any]:
    """The document after one to four changes at random places."""
    spoiled = copy.deepcopy(document)
    for _ in range(draw.choice((1, 1, 1, 2, 4))):
        top = draw.choice(list(spoiled))
        *before, last = draw.choice([path for path in paths(spoiled) if path[0] == top])
        place: Any = spoiled
        for key in before:
            place = place[key]
        match draw.choice(("put", "put", "put", "drop", "double", "add", "scale")):
            case "put":
                place[last] = copy.deepcopy(draw.choice(JUNK))
            case "drop":
                del place[last]
            case "double" if isinstance(place, list):
                place.append(copy.deepcopy(place[last]))
            case "add" if isinstance(place, dict):
                key = draw.choice(("new", "plots", "price", "7", "T01", "block 1"))
                place[key] = copy.deepcopy(draw.choice(JUNK))
            case "scale" if isinstance(place[last], int | float):
                place[last] = place[last] * draw.choice((2, -1, 0)) + draw.choice((0, 1))
        if not spoiled:
            break
    return spoiled


def check(draw: random.Random, files: list[dict[str, Any]]) -> None:
    """One mutated file gives a verdict that can be told and written, or is bad input."""
    spoiled = mutated(draw.choice(files), draw)
    if draw.random() < 0.8:
        try:
            spoiled = sealed(spoiled)
        except ValueError:  # a whole number too long for any JSON text
            return
    try:
        verdict = verify(spoiled)
    except BadInput:
        return
    json.dumps(verdict.document())
    assert all(str(finding) for finding in verdict.findings)


@pytest.mark.parametrize("seed", range(4))
def test_no_mutation_gives_a_traceback(seed: int) -> None:
    """Hundreds of files with junk in random places are all answered."""
    draw, files = random.Random(seed), [balanced_file(), *uneven_files()]
    for _ in range(150):
        check(draw, files)


@pytest.mark.slow
def test_no_mutation_gives_a_traceback_at_length() -> None:
    """Tens of thousands of files with junk in random places are all answered."""
    draw, files = random.Random(99), [balanced_file(), *uneven_files()]
    for _ in range(30_000):
        check(draw, files)


def test_endless_nesting_is_answered() -> None:
    """Lists in lists, thousands deep, are refuted wherever they stand."""
    deep: Any = []
    for _ in range(20_000):
        deep = [deep]
    for key in balanced_file():
        document = balanced_file() | {key: deep}
        if key == "format":
            with pytest.raises(BadInput):
                verify(document)
        else:
            assert not verify(document).holds
    document = balanced_file()
    document["bound"]["certificate"]["multipliers"] = {"rows": deep}
    assert not verify(document).holds
