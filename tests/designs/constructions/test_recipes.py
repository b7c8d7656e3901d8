"""The stored recipes."""

from __future__ import annotations

import networkx as nx  # type: ignore[import-untyped]
import pytest

from search.designs.building import directly
from search.designs.conditions import conditions
from search.designs.constructions.recipes import recipes
from search.designs.constructions.stored import RECIPES


@pytest.mark.parametrize("key", sorted(RECIPES))
def test_every_recipe_is_a_design(key: tuple[int, int, int]) -> None:
    """By a general graph library: the pairs of all blocks make a complete graph, each edge λ times."""
    t, k, meetings = key
    sizes = conditions(t, meetings * t * (t - 1) // (k * (k - 1)), k).allowed
    assert sizes is not None
    built = recipes(sizes, directly)
    assert built is not None
    graph = nx.MultiGraph()
    for block in built.blocks:
        assert len(block) == k
        graph.add_edges_from(nx.complete_graph(block).edges)
    assert graph.number_of_nodes() == t
    assert {graph.number_of_edges(x, y) for x, y in nx.complete_graph(t).edges} == {meetings}
    assert RECIPES[key].found
