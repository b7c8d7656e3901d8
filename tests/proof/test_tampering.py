"""A file in which one number or name was changed, and sealed again, is refuted for that."""

from __future__ import annotations

import copy
from typing import Any

import pytest

from search.proof.verify import verify
from tests.proof.plans import balanced_file, sealed
from tests.proof.test_verify import uneven_files

Path = tuple[str | int, ...]


def changed(document: dict[str, Any], path: Path, value: Any) -> dict[str, Any]:
    """The document with one value changed and a seal that fits."""
    spoiled = copy.deepcopy(document)
    place: Any = spoiled
    for key in path[:-1]:
        place = place[key]
    place[path[-1]] = value(place[path[-1]]) if callable(value) else value
    return sealed(spoiled)


def without(document: dict[str, Any], path: Path) -> dict[str, Any]:
    """The document without one key, and a seal that fits."""
    spoiled = copy.deepcopy(document)
    place: Any = spoiled
    for key in path[:-1]:
        place = place[key]
    del place[path[-1]]
    return sealed(spoiled)


def a_little(x: float) -> float:
    """More by twice what is let pass."""
    return x * (1 + 2.5e-9)


TAMPERED: list[tuple[Path, Any, str]] = [
    (("mark",), "", "mark"),
    (("issued",), "yesterday", "mark"),
    (("trial", "trial"), "", "trial and blocks"),
    (("trial", "treatments", "T01"), {"plots": [2, 2]}, "counts"),
    (("trial", "blocks", "block 1"), 4, "counts"),
    (("trial", "rules", "never_share_block"), [["T01", "T02"]], "rules"),
    (("trial", "rules", "meet_at_least"), 2, "rules"),
    (("trial", "rules", "meet_at_most"), 0, "rules"),
    (("trial", "rules", "keep_out"), {"T01": ["block 1"]}, "rules"),
    (("trial", "rules", "must_hold"), {"block 2": ["T01"]}, "rules"),
    (("trial", "aim"), "overall", "bound"),
    (("blocks", "block 1", 0), "T03", "counts"),
    (("blocks", "block 1", 0), "T99", "trial and blocks"),
    (("blocks", "block 1", 0), "T02", "counts"),
    (("blocks", "block 1"), lambda names: names[:2], "counts"),
    (("blocks", "block 9"), ["T01"], "trial and blocks"),
    (("blocks", "block 1"), "T01", "trial and blocks"),
    (("plots", 0, "plot"), 104, "plots"),
    (("plots", 0, "block"), "block 2", "plots"),
    (("plots", 0, "line"), 2, "plots"),
    (("plots", 0, "place"), 9, "plots"),
    (("plots", 0, "treatment"), "T07", "plots"),
    (("plots",), lambda rows: rows[1:], "plots"),
    (("plots",), lambda rows: [*rows, rows[0]], "plots"),
    (("layout", "seed"), None, "layout"),
    (("layout", "scheme"), 3, "layout"),
    (("score", "aim"), a_little, "score"),
    (("score", "A"), a_little, "score"),
    (("score", "D"), a_little, "score"),
    (("score", "worst_pair_efficiency"), a_little, "score"),
    (("score", "average_pair_variance"), a_little, "score"),
    (("score", "average_pair_variance"), None, "score"),
    (("score", "largest_pair_variance"), a_little, "score"),
    (("score", "loss_to_replication_percent"), 1e-6, "score"),
    (("score", "loss_to_blocks_percent"), lambda x: x - 1e-6, "score"),
    (("score", "residual_df"), 9, "score"),
    (("score", "residual_df"), 8.0, "score"),
    (("score", "connected"), False, "score"),
    (("score", "meetings", "least"), 0, "meetings"),
    (("score", "meetings", "most"), 2, "meetings"),
    (("score", "meetings", "near_balanced"), "no", "meetings"),
    (("score", "meetings", "near_balanced"), "perhaps", "meetings"),
    (("bound", "aim"), "overall", "bound"),
    (("bound", "value"), a_little, "bound"),
    (("bound", "exact"), "77/100", "bound"),
    (("bound", "exact"), "-7/9", "bound"),
    (("bound", "argument"), "", "bound"),
    (("bound", "certificate", "kind"), "divination", "bound"),
    (("bound", "certificate", "kind"), "trace root", "bound"),
    (("bound", "certificate", "multipliers"), {"price": "1"}, "bound"),
    (("bound",), None, "gap"),
    (("gap_percent",), 1e-6, "gap"),
    (("gap_percent",), None, "gap"),
    (("standing",), "proven optimal", "standing"),
    (("standing",), "feasible", "standing"),
    (("ended_by",), "boredom", "ended by"),
    (("provenance", "seed"), "7", "provenance"),
    (("provenance", "moves"), -1, "provenance"),
    (("provenance", "seconds"), float("nan"), "provenance"),
]


@pytest.mark.parametrize(
    ("path", "value", "what"),
    TAMPERED,
)
def test_one_change_is_refuted(path: Path, value: Any, what: str) -> None:
    """The change is found by recomputation, under the heading where it belongs."""
    refuted = verify(changed(balanced_file(), path, value)).refuted
    assert what in {finding.what for finding in refuted}


def test_what_is_let_pass() -> None:
    """Numbers within one part in 10^9 hold: they are what floating point may do."""
    for key in ("aim", "A", "D", "average_pair_variance"):
        assert verify(changed(balanced_file(), ("score", key), lambda x: x * (1 + 5e-10))).holds


def test_the_seal_finds_accidents() -> None:
    """A change without a new seal breaks the seal."""
    document = balanced_file() | {"mark": "other"}
    assert [finding.what for finding in verify(document).refuted] == ["seal"]


def test_every_key_is_needed() -> None:
    """A file without one of its keys is refuted, whichever key it is."""
    document = balanced_file()
    paths: list[Path] = [(key,) for key in document if key not in ("format", "seal")]
    paths += [(part, key) for part in ("layout", "score", "bound", "provenance") for key in document[part]]
    paths += [("plots", 0, key) for key in document["plots"][0]]
    paths += [("score", "meetings", key) for key in document["score"]["meetings"]]
    paths += [("bound", "certificate", key) for key in document["bound"]["certificate"]]
    for path in paths:
        assert not verify(without(document, path)).holds, path


@pytest.mark.parametrize("number", range(7))
def test_bounds_below_their_certificates_are_refuted(number: int) -> None:
    """A bound told lower than its certificate proves is refuted, for every kind and aim."""
    document = uneven_files()[number]
    low = {"exact": "6/10", "value": 0.6}
    refuted = verify(sealed(document | {"bound": document["bound"] | low})).refuted
    assert any("the certificate proves no more than" in finding.detail for finding in refuted)


def test_treatments_may_not_change_places() -> None:
    """Two names exchanged in the blocks alone, or in the plots alone, no longer fit together."""
    document = balanced_file()
    swap = {"T01": "T02", "T02": "T01"}
    blocks = {name: [swap.get(x, x) for x in content] for name, content in document["blocks"].items()}
    assert not verify(sealed(document | {"blocks": blocks})).holds
    plots = [row | {"treatment": swap.get(row["treatment"], row["treatment"])} for row in document["plots"]]
    assert not verify(sealed(document | {"plots": plots})).holds
    assert verify(sealed(document | {"blocks": blocks, "plots": plots})).holds
