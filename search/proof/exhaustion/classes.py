"""Regular graphs up to isomorphism, found by switching edges and known to be all by their weight.

Two edges ab and cd become ac and bd: the switches of a regular graph reach every other one of its degree
(Petersen 1891; Taylor 1981, from memory). That all classes were found is not left to that: a class of graphs
on n vertices has n!/|Aut| members, and these must add up to the number of all labelled regular graphs, which
is counted for itself. Graphs with different invariants belong to different classes; if ever two classes had
the same invariant the weight would fall short, and nothing is claimed.
"""

from __future__ import annotations

from collections.abc import Iterator
from fractions import Fraction
from functools import cache
from itertools import combinations, product
from math import comb, factorial

import numpy as np
from numpy.typing import NDArray

from search.foundation.errors import Undecided

Graph = NDArray[np.uint64]
"""(n, n) adjacency, 0 and 1."""

FEW = 24
"""Switches of a graph that are tried at first."""
ROUNDS = 3
MIX, OTHER = np.uint64(0x9E3779B97F4A7C15), np.uint64(0xC2B2AE3D27D4EB4F)
MOST_CLASSES = 120_000


def labelled(n: int, d: int) -> int:
    """Number of d-regular graphs on n labelled vertices.

    One vertex after the other is joined to others that lack edges; only how many lack how many counts.
    """

    @cache
    def ways(lacking: tuple[int, ...]) -> int:
        """`lacking[f]` vertices lack f edges."""
        f = max((f for f, count in enumerate(lacking) if count), default=0)
        if f == 0:
            return 1
        rest = list(lacking)
        rest[f] -= 1
        total = 0
        for chosen in product(*(range(min(f, rest[g]) + 1) for g in range(1, d + 1))):
            if sum(chosen) != f:
                continue
            after, many = rest.copy(), 1
            for g, count in enumerate(chosen, start=1):
                many *= comb(rest[g], count)
                after[g] -= count
                after[g - 1] += count
            total += many * ways(tuple(after))
        return total

    return ways((*[0] * d, n)) if d else 1


def classes(n: int, d: int) -> list[Graph]:
    """One graph of every class of d-regular graphs on n vertices.

    Raises
    ------
    Undecided : there are too many, or the classes that were found do not weigh what all graphs do
    """
    if n * d % 2:
        return []
    if 2 * d > n - 1:
        return [(1 - np.eye(n, dtype=np.uint64)) - graph for graph in classes(n, n - 1 - d)]
    if d == 0:
        return [np.zeros((n, n), np.uint64)]
    wanted = Fraction(labelled(n, d), factorial(n))
    if wanted > MOST_CLASSES:
        raise Undecided("there are more graphs than are listed again")
    random = np.random.default_rng(1)
    found: dict[int, Graph] = {}
    weight = Fraction(0)

    def add(graphs: Graph) -> list[Graph]:
        """Keep those of new classes."""
        nonlocal weight
        new = {}
        for key, graph in zip(_invariant(graphs).tolist(), graphs, strict=True):
            if key not in found:
                found[key] = new[key] = graph
                weight += Fraction(1, symmetries(graph))
        return list(new.values())

    waiting = add(np.array([_first(n, d), *_apart(n, d)]))
    for limit in (FEW, None):
        while waiting and weight < wanted:
            waiting += add(_switched(waiting.pop(), random, limit))
        waiting = sorted(found.values(), key=symmetries) if weight < wanted else []
    if weight != wanted:
        raise Undecided("the graphs that were found do not weigh what all graphs do")
    return list(found.values())


def _apart(n: int, d: int) -> Iterator[Graph]:
    """Graphs of two parts without an edge between them: few switches lead there."""
    for size in range(d + 1, n // 2 + 1):
        if size * d % 2 == 0 and (n - size) * d % 2 == 0:
            for one, other in product(classes(size, d), classes(n - size, d)):
                graph = np.zeros((n, n), np.uint64)
                graph[:size, :size], graph[size:, size:] = one, other
                yield graph


def _first(n: int, d: int) -> Graph:
    """Each vertex joined to the next ones around a circle, and for odd d to the one across."""
    graph = np.zeros((n, n), np.uint64)
    steps = [*range(1, d // 2 + 1), *([n // 2] if d % 2 else [])]
    for v, step in product(range(n), steps):
        graph[v, (v + step) % n] = graph[(v + step) % n, v] = 1
    return graph


def _switched(graph: Graph, random: np.random.Generator, limit: int | None) -> Graph:
    """Graphs that one switch of two edges leads to, all or some of them."""
    edges = np.argwhere(np.triu(graph))
    quadruples = []
    for (a, b), (c, d) in combinations(edges.tolist(), 2):
        if len({a, b, c, d}) == 4:
            quadruples += [(a, b, c, d), (a, b, d, c)]
    picked = np.array([(a, b, c, d) for a, b, c, d in quadruples if not graph[a, c] and not graph[b, d]])
    if limit is not None and len(picked) > limit:
        picked = picked[random.choice(len(picked), limit, replace=False)]
    many = np.repeat(graph[None], len(picked), axis=0)
    at = np.arange(len(picked))
    if len(picked):
        a, b, c, d = picked.T
        for v, w, has in ((a, b, 0), (c, d, 0), (a, c, 1), (b, d, 1)):
            many[at, v, w] = many[at, w, v] = has
    return many


def _scrambled(x: Graph) -> Graph:
    x = (x ^ (x >> np.uint64(29))) * MIX
    x = (x ^ (x >> np.uint64(32))) * OTHER
    return x ^ (x >> np.uint64(31))


def _colours(graphs: Graph) -> Graph:
    """A colour for each ordered pair of vertices that no numbering of the vertices changes.

    A pair's colour is its own and the multiset of the colours on the ways over each third vertex.
    """
    unit = np.eye(graphs.shape[-1], dtype=np.uint64)
    colours = _scrambled(graphs + unit * np.uint64(2) + np.uint64(1))
    for _ in range(ROUNDS):
        ways = _scrambled(colours) @ _scrambled(colours + MIX)
        colours = _scrambled(colours * OTHER + ways + np.swapaxes(ways, -1, -2))
    return colours


def _invariant(graphs: Graph) -> NDArray[np.uint64]:
    """A number for each graph that no numbering of its vertices changes."""
    return np.asarray(_scrambled(_colours(graphs)).sum(axis=(1, 2), dtype=np.uint64))


def symmetries(graph: Graph) -> int:
    """Order of the automorphism group: the product of the orbits, one vertex after the other held fixed."""
    colours = _colours(graph[None])[0]
    order, n = 1, len(graph)
    for fixed in range(n):
        images = [
            w
            for w in range(fixed, n)
            if colours[w, w] == colours[fixed, fixed] and (colours[w, :fixed] == colours[fixed, :fixed]).all()
        ]
        if len(images) > 1:
            order *= sum(w == fixed or _extends(graph, colours, fixed, w) for w in images)
    return order


def _extends(graph: Graph, colours: Graph, fixed: int, image: int) -> bool:
    """Whether an automorphism holds all vertices before `fixed` and takes that one to its image."""
    n, images = len(graph), [*range(fixed), image]

    def candidates(v: int) -> Iterator[int]:
        for w in range(n):
            if w in images or colours[w, w] != colours[v, v]:
                continue
            if (colours[w, images] == colours[v, : len(images)]).all() and (
                graph[w, images] == graph[v, : len(images)]
            ).all():
                yield w

    if not (graph[image, :fixed] == graph[fixed, :fixed]).all():
        return False
    waiting = [candidates(len(images))] if len(images) < n else []
    while waiting:
        v = fixed + len(waiting)
        del images[v:]
        w = next(waiting[-1], None)
        if w is None:
            waiting.pop()
            continue
        images.append(w)
        if len(images) == n:
            return True
        waiting.append(candidates(len(images)))
    return not waiting and len(images) == n
