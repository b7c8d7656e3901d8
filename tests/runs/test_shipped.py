"""What comes with the program is true, found at once, and used as a start."""

from __future__ import annotations

import random
import time
from pathlib import Path
from typing import Any

import pytest

from search.foundation.stopping import Limits
from search.proof.results import proved
from search.runs.keeping import Keeping, recall
from search.runs.shipped import all_shipped, ship, shipped
from search.runs.store import Store
from search.trial.canonical import canonical
from search.trial.reading import trial_from_document

RESULTS = list(all_shipped())
PLAIN = {
    "trial": "thirteen under other names",
    "treatments": [f"sort {letter}" for letter in "MLKJIHGFEDCBA"],
    "blocks": {f"row {number}": 6 for number in range(13)},
}


def test_there_are_many() -> None:
    """At least 1,500 problems, each of them once, each with a plan and a bound."""
    assert len({(result["digest"], result["aim"]) for result in RESULTS}) == len(RESULTS) >= 1500
    assert all(result["plan"] and result["bound"] for result in RESULTS)


def replayed(many: int, seed: int) -> None:
    """Prove a random sample: rules, score, bound and that no plan is above its bound."""
    for result in random.Random(seed).sample(RESULTS, many):
        proved(result)


def test_a_sample_is_proved_again() -> None:
    """Every claim of a few results is derived anew in exact arithmetic."""
    replayed(25, 1)


@pytest.mark.slow
def test_a_large_sample_is_proved_again() -> None:
    """The same for a fifth of all."""
    replayed(len(RESULTS) // 5, 2)


def test_a_shipped_problem_is_answered_at_once(tmp_path: Path) -> None:
    """Other names, another order, an empty store: plan and proven gap in under 0.2 s."""
    trial = trial_from_document(PLAIN)
    with Store(tmp_path / "new.sqlite") as store:
        best = 1.0
        for _ in range(3):  # the least of three: the machine may be busy
            begun = time.perf_counter()
            found = recall(store, trial, canonical(trial))
            best = min(best, time.perf_counter() - begun)
    assert found.contents is not None
    assert found.plan is not None
    assert found.shipped is not None
    assert 0.999 < found.plan.score / found.shipped.value <= 1 + 1e-9
    assert best < 0.2


def test_a_search_is_never_worse_than_what_is_shipped(tmp_path: Path) -> None:
    """A search of almost no moves hands out the shipped plan with the shipped bound, and keeps it."""
    trial = trial_from_document(PLAIN)
    with Keeping(trial, tmp_path / "new.sqlite") as keeping:
        plan = keeping.plan(limits=Limits(moves=1000), seed=1, workers=1)
        ready = recall(keeping.store, trial, keeping.numbering)
    assert ready.plan is not None
    assert ready.shipped is not None
    assert plan.bound is not None
    assert plan.score.aim >= ready.plan.score - 1e-12
    assert plan.bound.exact <= ready.shipped.exact


def test_writing_and_reading(tmp_path: Path) -> None:
    """An archive made from a store gives back the store's results, the same bytes every time."""
    trial = trial_from_document({"trial": "five", "treatments": 5, "blocks": {"count": 5, "plots": 2}})
    with Keeping(trial, tmp_path / "kept.sqlite") as keeping:
        keeping.plan(limits=Limits(moves=1000), seed=1, workers=1)
        results = list(keeping.store.all_shown())
    files = tmp_path / "one.zip", tmp_path / "two.zip"
    assert [ship(results, file) for file in files] == [1, 1]
    assert files[0].read_bytes() == files[1].read_bytes()
    found = shipped(keeping.numbering.digest, "all pairs", files[0])
    assert found is not None
    assert found.kept == results[0].kept
    assert found.runs == ()


@pytest.mark.parametrize("damage", [b"", b"no archive", None])
def test_without_an_archive_nothing_is_known(tmp_path: Path, damage: bytes | None) -> None:
    """A damaged or missing archive is no reason to fail."""
    file = tmp_path / "damaged.zip"
    if damage is not None:
        file.write_bytes(damage)
    some: dict[str, Any] = RESULTS[0]
    assert shipped(some["digest"], some["aim"], file) is None
