"""Bays cut from a map: connected, even, compact, the same each time."""

from __future__ import annotations

from collections import Counter
from typing import Any

import networkx as nx
import pytest

from search.field.bays import ways_to_cut
from search.foundation.errors import BadInput
from search.trial.numbering import places
from search.trial.reading import trial_from_document
from search.trial.records import Trial
from search.trial.writing import trial_document

HOLLOW = "..xxxxxxxx..\n.xxxxxxxxxx.\n.xxxxxxxxxx.\n.xxxxxxxxxx.\n...xxxxxxxxx"


def bare(rows: str, asked: dict[str, Any], **more: Any) -> Trial:
    """A trial of eight treatments on a bare map."""
    ground = {"rows": rows, "plot_m": [1.5, 3.0]}
    return trial_from_document(
        {"trial": "bare", "treatments": 8, "blocks": {"wanted": asked}, "ground": ground, **more}
    )


def is_connected(trial: Trial, bay: int) -> bool:
    """Whether the plots of a bay share edges all the way, found by a general-purpose graph library."""
    at = {(site.row, site.column) for site in places(trial) if site.block == bay}
    graph = nx.Graph()
    graph.add_nodes_from(at)
    graph.add_edges_from((a, b) for a in at for b in ((a[0] + 1, a[1]), (a[0], a[1] + 1)) if b in at)
    return nx.is_connected(graph)


@pytest.mark.parametrize("asked", [{"plots": [7, 8]}, {"count": 6}, {"count": 9}])
def test_every_bay_is_connected_and_of_even_size(asked: dict[str, Any]) -> None:
    """Every plot is in one bay, bays are connected, and sizes differ by one at most."""
    for way in ways_to_cut(bare(HOLLOW, asked)):
        assert way.trial.wanted is None
        assert way.trial.n == HOLLOW.count("x")
        sizes = Counter(site.block for site in places(way.trial))
        assert max(sizes.values()) - min(sizes.values()) <= 1
        assert all(is_connected(way.trial, bay) for bay in range(way.trial.b))


def test_a_square_is_cut_into_its_quarters() -> None:
    """Four bays of a square of 4 × 4 square plots are its quarters: by symmetry nothing is rounder."""
    trial = trial_from_document(
        {
            "trial": "square",
            "treatments": 4,
            "blocks": {"wanted": {"count": 4}},
            "ground": {"rows": "\n".join(["xxxx"] * 4)},
        }
    )
    best = ways_to_cut(trial)[0]
    assert best.trial.ground is not None
    assert best.trial.ground.rows == ("aabb", "aabb", "ccdd", "ccdd")


def test_the_best_way_comes_first_and_always_the_same() -> None:
    """Efficiency is judged before shape; a second run cuts alike; the cut survives the plan file."""
    trial = bare(HOLLOW, {"plots": [5, 8]}, rules={"must_hold": {"every block": ["T01"]}})
    ways = ways_to_cut(trial)
    assert 2 <= len(ways) <= 3
    assert [way.bound for way in ways] == sorted((way.bound for way in ways), reverse=True)
    assert ways == ways_to_cut(trial)
    for way in ways:
        assert len(way.trial.rules.must_hold) == way.trial.b
        assert trial_from_document(trial_document(way.trial)) == way.trial
        assert "bays of" in way.told


def test_a_gap_in_the_field_does_not_stop_the_cut() -> None:
    """Parts that no edge joins are cut all the same; here each part holds whole bays."""
    best = ways_to_cut(bare("xxxx...xxxx\nxxxx...xxxx", {"count": 4}))[0]
    assert all(is_connected(best.trial, bay) for bay in range(4))


def test_more_than_52_bays_become_a_table() -> None:
    """Letters run out at 52; the plan then lists its plots."""
    trial = bare("\n".join(["x" * 12] * 18), {"count": 54}, plots_each=[1, 60])
    best = ways_to_cut(trial)[0]
    assert best.trial.b == 54
    assert best.trial.ground is not None
    assert len(best.trial.ground.spots) == 216
    assert trial_from_document(trial_document(best.trial)) == best.trial


def test_an_uncut_trial_has_no_plots_yet() -> None:
    """Nobody numbers plots of bays that are not there."""
    with pytest.raises(BadInput, match="not cut"):
        places(bare(HOLLOW, {"count": 6}))
