"""The checker's own listing: as many graphs as published, and their weights add up."""

from __future__ import annotations

from math import factorial

import networkx as nx
import numpy as np
import pytest
from networkx.algorithms.isomorphism import GraphMatcher

from search.proof.exhaustion.classes import classes, labelled, symmetries

PUBLISHED = {
    (8, 3): 6,
    (10, 3): 21,
    (12, 3): 94,
    (9, 4): 16,
    (10, 4): 60,
    (11, 4): 266,
    (10, 5): 60,
    (9, 2): 4,
}
"""(vertices, degree): number of regular graphs; OEIS A005638, A033301, A165626 (from memory)."""
LABELLED = {4: 1, 6: 70, 8: 19355, 10: 11180820}
"""Labelled cubic graphs, OEIS A002829 (from memory)."""


@pytest.mark.parametrize(("n", "d"), PUBLISHED)
def test_as_many_as_published(n: int, d: int) -> None:
    """Found by switching edges, known to be all by their weight."""
    graphs = classes(n, d)
    assert len(graphs) == PUBLISHED[n, d]
    assert all((graph.sum(axis=0) == d).all() for graph in graphs)


@pytest.mark.slow
@pytest.mark.parametrize(("n", "d", "count"), [(12, 4, 1547), (14, 3, 540), (16, 3, 4207), (12, 5, 7849)])
def test_as_many_as_published_where_there_are_many(n: int, d: int, count: int) -> None:
    """OEIS A005638, A033301, A165626 (from memory)."""
    assert len(classes(n, d)) == count


@pytest.mark.parametrize("n", [4, 6, 8, 10])
def test_labelled_cubic_graphs(n: int) -> None:
    """OEIS A002829 (from memory)."""
    assert labelled(n, 3) == LABELLED[n]


def test_labelled_graphs_of_one_circle_or_pairs() -> None:
    """Degree 1: the ways to pair; degree n − 1: one."""
    assert labelled(6, 1) == 15
    assert labelled(6, 5) == 1
    assert labelled(7, 0) == 1


@pytest.mark.parametrize("n", [6, 7, 8])
def test_symmetries_are_those_of_a_general_library(n: int) -> None:
    """The order of the group, against counting all automorphisms."""
    for d in (2, 3, 4):
        for graph in classes(n, d):
            plain = nx.from_numpy_array(graph.astype(int))
            assert symmetries(graph) == sum(1 for _ in GraphMatcher(plain, plain).isomorphisms_iter())


def test_symmetries_of_known_graphs() -> None:
    """Petersen's graph has 120, four triangles 6⁴·4!, no edges n!."""
    petersen = nx.to_numpy_array(nx.petersen_graph()).astype(np.uint64)
    assert symmetries(petersen) == 120
    triangles = np.kron(np.eye(4), 1 - np.eye(3)).astype(np.uint64)
    assert symmetries(triangles) == 6**4 * 24
    assert symmetries(np.zeros((5, 5), np.uint64)) == factorial(5)
