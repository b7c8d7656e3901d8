"""Regular graphs up to isomorphism: as many as published, each of them once."""

from __future__ import annotations

from itertools import combinations

import networkx as nx
import numpy as np
import pytest

from search.efficiency.exhaustion.graphs import TooMany, regular_graphs
from search.foundation.stopping import Limits, Stop

PUBLISHED = {
    3: {4: 1, 6: 2, 8: 6, 10: 21, 12: 94, 14: 540, 16: 4207},
    4: {5: 1, 6: 1, 7: 2, 8: 6, 9: 16, 10: 60, 11: 266, 12: 1547},
    5: {6: 1, 8: 3, 10: 60},
}
"""Degree, vertices, number of regular graphs; OEIS A005638, A033301, A165626 (from memory)."""
CONNECTED = {3: {4: 1, 6: 2, 8: 5, 10: 19, 12: 85, 14: 509, 16: 4060}, 4: {9: 16, 10: 59, 11: 265, 12: 1544}}
"""OEIS A002851, A006820 (from memory)."""


@pytest.mark.parametrize(("d", "n"), [(d, n) for d, row in PUBLISHED.items() for n in row])
def test_as_many_as_published(d: int, n: int) -> None:
    """All regular graphs, and the connected ones among them."""
    graphs = regular_graphs(n, d)
    assert len(graphs) == PUBLISHED[d][n]
    assert (graphs.sum(axis=2) == d).all()
    assert (graphs == graphs.transpose(0, 2, 1)).all()
    if n in CONNECTED.get(d, {}):
        assert sum(nx.is_connected(nx.from_numpy_array(graph)) for graph in graphs) == CONNECTED[d][n]


@pytest.mark.slow
@pytest.mark.parametrize(("n", "d", "count"), [(18, 3, 42110), (13, 4, 10786), (12, 5, 7849), (14, 4, 88193)])
def test_as_many_as_published_where_there_are_many(n: int, d: int, count: int) -> None:
    """OEIS A005638, A033301, A165626 (from memory)."""
    assert len(regular_graphs(n, d)) == count


@pytest.mark.parametrize("n", range(3, 8))
def test_the_atlas_has_the_same(n: int) -> None:
    """Every regular graph of a general library's list of all small graphs is there, and no other."""
    atlas = [graph for graph in nx.graph_atlas_g() if len(graph) == n and nx.is_regular(graph)]
    for d in range(n):
        ours = [nx.from_numpy_array(graph) for graph in regular_graphs(n, d)]
        theirs = [graph for graph in atlas if graph.degree(0) == d]
        assert len(ours) == len(theirs)
        assert all(any(nx.is_isomorphic(one, other) for one in ours) for other in theirs)


def test_no_two_are_the_same() -> None:
    """No two quartic graphs on nine vertices are isomorphic."""
    graphs = [nx.from_numpy_array(graph) for graph in regular_graphs(9, 4)]
    assert not any(nx.is_isomorphic(one, other) for one, other in combinations(graphs, 2))


def test_what_is_left_out_is_listed_where_that_is_less() -> None:
    """Degree 8 on 11 vertices: the complements of unions of cycles."""
    graphs = regular_graphs(11, 8)
    left = 1 - np.eye(11, dtype=np.int64) - graphs
    assert len(graphs) == 6  # 11, 8+3, 7+4, 6+5, 5+3+3, 4+4+3
    assert (left.sum(axis=2) == 2).all()


def test_too_many_are_not_begun() -> None:
    """A limit on the number is kept, before and while they are listed."""
    with pytest.raises(TooMany):
        regular_graphs(24, 6)
    with pytest.raises(TooMany):
        regular_graphs(12, 4, most=1000)


def test_it_ends_when_asked() -> None:
    """An interrupt is heard while graphs are listed."""
    stop = Stop(Limits())
    stop.interrupt()
    with pytest.raises(KeyboardInterrupt):
        regular_graphs(20, 3, stop, most=600_000)
