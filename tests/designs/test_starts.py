"""Plans to start from."""

from __future__ import annotations

from itertools import combinations
from typing import Any

import pytest

from search.designs.starts import Start, starts
from search.trial.checker import broken_rules
from search.trial.reading import trial_from_document
from search.trial.records import Trial


def _trial(treatments: int, blocks: Any, **more: Any) -> Trial:
    return trial_from_document({"trial": "made up", "treatments": treatments, "blocks": blocks, **more})


def _started(trial: Trial) -> list[Start]:
    found = list(starts(trial))
    assert all(not broken_rules(trial, start.contents) for start in found)
    return found


def _replicates(many: int, blocks: int) -> dict[str, list[str]]:
    return {f"rep {g}": [f"block {g * blocks + j + 1}" for j in range(blocks)] for g in range(many)}


def _meetings(start: Start) -> set[int]:
    t = max(x for block in start.contents for x in block) + 1
    pairs = [pair for block in start.contents for pair in combinations(block, 2)]
    return {pairs.count(pair) for pair in combinations(range(t), 2)}


def test_a_trial_with_balanced_sizes_starts_balanced() -> None:
    """13 treatments in 13 blocks of 4: every pair meets once."""
    first = _started(_trial(13, {"count": 13, "plots": 4}))[0]
    assert first.balanced
    assert _meetings(first) == {1}
    assert "PG(2, 3)" in first.where_from


def test_labels_obey_barred_and_required_blocks() -> None:
    """A labelling is found that keeps out and holds whom the rules say, and the design stays balanced."""
    rules = {
        "keep_out": {"T01": ["block 1", "block 2"], "T05": ["block 3"]},
        "must_hold": {"block 4": ["T02", "T07"], "block 5": ["T01"]},
    }
    first = _started(_trial(13, {"count": 13, "plots": 4}, rules=rules))[0]
    assert first.balanced
    assert _meetings(first) == {1}


def test_replicates_are_matched() -> None:
    """Nine treatments in four replicates of three threes, and one block that must hold a pair."""
    rules = {"replicates": _replicates(4, 3), "must_hold": {"block 5": ["T03", "T08"]}}
    first = _started(_trial(9, {"count": 12, "plots": 3}, rules=rules))[0]
    assert first.balanced
    assert _meetings(first) == {1}


def test_pairs_kept_apart_rule_balance_out() -> None:
    """Where two treatments never share a block nothing balanced is offered, but the nearest is."""
    trial = _trial(
        13, {"count": 13, "plots": 4}, plots_each=[3, 5], rules={"never_share_block": [["T01", "T02"]]}
    )
    found = _started(trial)
    assert found
    assert not any(start.balanced for start in found)
    assert "nearest balanced design" in found[0].where_from


@pytest.mark.parametrize(
    ("treatments", "blocks", "rules", "words"),
    [
        (36, {"count": 18, "plots": 6}, {"replicates": _replicates(3, 6)}, "square lattice in 3 replicates"),
        (12, {"count": 12, "plots": 3}, {}, "rectangular lattice in 3 replicates"),
        (20, {"count": 16, "plots": 5}, {}, "linked blocks"),
    ],
)
def test_lattices_and_linked_blocks_are_offered(
    treatments: int, blocks: dict[str, int], rules: dict[str, Any], words: str
) -> None:
    """Each for the sizes that it is known for."""
    found = _started(_trial(treatments, blocks, **({"rules": rules} if rules else {})))
    assert any(words in start.where_from for start in found)


def test_linked_blocks_share_equally_many_treatments() -> None:
    """In the dual of (16, 4, 1) any two blocks share one treatment (Youden 1951)."""
    first = _started(_trial(20, {"count": 16, "plots": 5}))[0]
    blocks = [set(block) for block in first.contents]
    assert {len(one & other) for one, other in combinations(blocks, 2)} == {1}


def test_the_nearest_design_is_changed_to_fit() -> None:
    """12 treatments in blocks of 4 and one of 3: (13, 4, 1) without a treatment and a block, told so."""
    sizes = {f"bay {j}": 4 for j in range(12)} | {"bay 11": 3}
    found = _started(_trial(12, sizes))
    assert any(
        "13 treatments in 13 blocks of 4 (1 treatment taken out, 1 block taken out" in s.where_from
        for s in found
    )


def test_treatments_that_may_stand_twice_are_not_bunched() -> None:
    """With repeats allowed the nearest design keeps a treatment to one plot of a block."""
    trial = _trial(7, {"count": 7, "plots": 3}, rules={"twice_in_block": True})
    assert all(len(set(block)) == len(block) for start in _started(trial) for block in start.contents)
