"""All regular graphs on some vertices up to isomorphism, connected or not, as far as they are few."""

from __future__ import annotations

import threading
from collections.abc import Iterator
from math import exp, lgamma

import numpy as np
from numpy.typing import NDArray

from search.foundation.compiling import keep_compiled
from search.foundation.stopping import Stop

Graphs = NDArray[np.int64]
"""(graphs, vertices, vertices) adjacency, 0 and 1."""

MOST_GRAPHS = 100_000
MOST_TESTS = 4_000_000
"""Work limits that do not depend on the clock; about a minute."""


class TooMany(Exception):
    """There are more graphs than are looked at."""


def regular_graphs(n: int, d: int, stop: Stop | None = None, most: int = MOST_GRAPHS) -> Graphs:
    """Every d-regular graph on n vertices, one of each isomorphism class.

    Where the graph has more than half of all pairs, those that it leaves out are listed.

    Parameters
    ----------
    n, d : vertices and degree, 0 ≤ d < n
    stop : ends the listing from outside
    most : so many graphs are listed, no more

    Raises
    ------
    TooMany : there are more, or finding them takes too long
    KeyboardInterrupt : somebody asked for an end
    """
    if n * d % 2:
        return np.zeros((0, n, n), np.int64)
    if 2 * d > n - 1:
        all_pairs = np.ones((n, n), np.int64) - np.eye(n, dtype=np.int64)
        return all_pairs - regular_graphs(n, n - 1 - d, stop, most)
    if about(n, d) > 3 * most:
        raise TooMany
    graphs: list[Graphs] = []
    for parts in _unions(n, d, stop, most):
        if len(graphs) == most:
            raise TooMany
        graph, at = np.zeros((n, n), np.int64), 0
        for rows in parts:
            size = len(rows)
            graph[at : at + size, at : at + size] = np.array(rows)[:, None] >> np.arange(size) & 1
            at += size
        graphs.append(graph)
    return np.array(graphs, np.int64).reshape(len(graphs), n, n)


def about(n: int, d: int) -> float:
    """How many there are, about; mostly too few, since graphs with symmetries are counted in part.

    Labelled regular graphs over n! (Bender and Canfield 1978, from memory).
    """
    d = min(d, n - 1 - d)
    logarithm = (
        lgamma(n * d + 1) - lgamma(n * d / 2 + 1) - n * d / 2 * 0.6931471805599453 - n * lgamma(d + 1)
    ) - lgamma(n + 1)
    return exp(min(logarithm - (d * d - 1) / 4, 100.0))


Rows = tuple[int, ...]


def _unions(n: int, d: int, stop: Stop | None, most: int) -> Iterator[tuple[Rows, ...]]:
    """Every choice of connected graphs with n vertices together, the smaller ones first."""

    def grow(left: int, size: int, first: int) -> Iterator[tuple[Rows, ...]]:
        for next_size in range(size, left + 1):
            if next_size != left and left - next_size < next_size:
                continue
            graphs = _connected(next_size, d, stop, most)
            for at in range(first if next_size == size else 0, len(graphs)):
                if next_size == left:
                    yield (graphs[at],)
                else:
                    for rest in grow(left - next_size, next_size, at):
                        yield (graphs[at], *rest)

    yield from grow(n, d + 1, 0)


_kept: dict[tuple[int, int], tuple[Rows, ...]] = {}


def _connected(n: int, d: int, stop: Stop | None, most: int) -> tuple[Rows, ...]:
    if d == 0:
        return ((0,),) if n == 1 else ()
    if n * d % 2:
        return ()
    if (n, d) not in _kept:
        _kept[n, d] = _listed(n, d, stop, most)
    return _kept[n, d]


def _listed(n: int, d: int, stop: Stop | None, most: int) -> tuple[Rows, ...]:
    """Ask the compiled listing, in a thread of its own, so that an interrupt is heard."""
    keep_compiled()
    from search.efficiency.exhaustion.orderly import TOO_MANY, connected_graphs

    found, flag, answers = np.zeros((most, n), np.int64), np.zeros(1, np.bool_), []
    done = threading.Event()

    def work() -> None:
        try:
            answers.append(connected_graphs(n, d, MOST_TESTS, found, flag))
        finally:
            done.set()

    threading.Thread(target=work, daemon=True).start()
    try:
        while not done.wait(0.05):
            if stop is not None and stop.interrupted:
                raise KeyboardInterrupt
    except KeyboardInterrupt:
        flag[0] = True
        raise
    if not answers:
        raise RuntimeError("the listing of graphs failed")
    if answers[0] == TOO_MANY:
        raise TooMany
    return tuple(tuple(rows) for rows in found[: answers[0]].tolist())
