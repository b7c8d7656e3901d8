"""Connected regular graphs up to isomorphism: each once, by orderly generation. Compiled.

Edges are laid in order, each between the least vertex that still lacks some and a later one. A graph stands
for its class if no numbering of its vertices gives a lesser list of edges; then the same holds of every list
that it begins with, so that a beginning which another numbering makes less is not continued.

Source: orderly generation, Read 1978 and Faradžev 1978; for regular graphs Meringer 1999 (from memory).
A neighbourhood is a whole number, bit v for vertex v.
"""

from __future__ import annotations

from typing import Any

import numpy as np
from numba import njit
from numpy.typing import NDArray

Whole = NDArray[np.int64]

TOO_MANY, STOPPED = -1, -2
"""Answers in place of a count."""


@njit(cache=True, nogil=True)
def connected_graphs(n: int, d: int, most_tests: int, found: Whole, stop: Any) -> int:
    """Write down every connected graph on n vertices of degree d, 1 ≤ d < n ≤ 62.

    Parameters
    ----------
    n, d : vertices, degree
    most_tests : so often the numbering of a beginning may be tested
    found : (most, n) neighbourhoods of the graphs that are found
    stop : one flag, set from another thread to end early

    Returns
    -------
    number of graphs, `TOO_MANY` where one of the limits is met, `STOPPED`
    """
    rows = np.zeros(n, np.int64)  # neighbours of each vertex
    later = np.zeros(n, np.int64)  # those with a greater number
    degree = np.zeros(n, np.int64)
    edges = n * d // 2
    one, other = np.zeros(edges, np.int64), np.zeros(edges, np.int64)
    touched_before = np.zeros(edges, np.int64)
    count = tests = laid = 0
    touched = 1  # vertices 0 to touched − 1 have edges; only the next one may be touched for the first time
    i, j = 0, 1
    while True:
        while j < n and j <= touched and degree[j] == d:
            j += 1
        if j <= touched and n - j >= d - degree[i]:
            one[laid], other[laid], touched_before[laid] = i, j, touched
            touched = max(touched, j + 1)
            rows[i] |= 1 << j
            rows[j] |= 1 << i
            later[i] |= 1 << j
            degree[i] += 1
            degree[j] += 1
            laid += 1
            j += 1
            if degree[i] < d:
                continue
            lacking = i
            while lacking < touched and degree[lacking] == d:
                lacking += 1
            # where nothing touched lacks an edge a component is complete
            if (lacking == touched) == (laid == edges):
                tests += 1
                if tests > most_tests:
                    return TOO_MANY
                if stop[0]:
                    return STOPPED
                if _is_least(rows, later, n, i):
                    if laid < edges:
                        i, j = lacking, lacking + 1
                        continue
                    if count == len(found):
                        return TOO_MANY
                    found[count] = rows
                    count += 1
        if laid == 0:
            return count
        laid -= 1
        i, j, touched = one[laid], other[laid], touched_before[laid]
        rows[i] &= ~(1 << j)
        rows[j] &= ~(1 << i)
        later[i] &= ~(1 << j)
        degree[i] -= 1
        degree[j] -= 1
        j += 1


@njit(cache=True, nogil=True)
def _is_least(rows: Whole, later: Whole, n: int, last: int) -> bool:
    """Whether no other numbering gives a lesser list of edges.

    Numbers are given one after the other, each to a neighbour of the vertex through which the list reaches
    that number first. Row p of the new list is known as soon as all vertices up to p have their numbers; of
    two rows the lesser one has the lowest bit in which they differ.

    Parameters
    ----------
    rows, later : neighbours of each vertex, and those with a greater number
    n : vertices
    last : the last row with edges to later vertices
    """
    near, degree = np.zeros((n, n), np.int64), np.zeros(n, np.int64)
    for v in range(n):
        for w in range(n):
            if rows[v] >> w & 1:
                near[v, degree[v]] = w
                degree[v] += 1
    before = np.zeros(n + 1, np.int64)  # numbers that are given before row p is read
    through = np.zeros(n, np.int64)  # the row that reaches a number first
    total = 1
    for p in range(last + 1):
        before[p] = total
        new = later[p] >> total
        while new:
            through[total] = p
            total += 1
            new >>= 1
    number, vertex = np.full(n, -1, np.int64), np.zeros(n, np.int64)
    open_, read = np.zeros(n + 1, np.int64), np.zeros(n + 1, np.int64)
    for start in range(total):
        number[start], vertex[0], numbered = 0, start, 1 << start
        q, forward = 1, True
        while q > 0:
            if forward:
                # q numbers are given: read the rows that they decide
                p, equal, first = read[q], True, read[q]
                while equal and p < q and p <= last and before[p] == q:
                    row = _row(near, degree, number, vertex[p], p, q)
                    if row != later[p]:
                        if _less(row, later[p]):
                            return False
                        equal = False
                    p += 1
                if equal and q < total and first < p < q:
                    # the next row as far as it is decided
                    part = _row(near, degree, number, vertex[p], p, n) & ((1 << q) - 1)
                    known = later[p] & ((1 << q) - 1)
                    if part != known:
                        if _less(part, known):
                            return False
                        equal = False
                open_[q] = 0
                if equal and q < total:
                    read[q + 1] = p
                    open_[q] = rows[vertex[through[q]]] & ~numbered
                forward = False
            if open_[q]:
                bit = open_[q] & -open_[q]
                open_[q] ^= bit
                v = 0
                while bit >> v != 1:
                    v += 1
                p = read[q + 1]
                if p < q:
                    # row p agrees with the list up to here, so that its bit q decides
                    has, should = rows[vertex[p]] >> v & 1, later[p] >> q & 1
                    if has > should:
                        return False
                    if has < should:
                        continue
                number[v], vertex[q] = q, v
                numbered |= bit
                q, forward = q + 1, True
            else:
                q -= 1
                v = vertex[q]
                number[v] = -1
                numbered &= ~(1 << v)
    return True


@njit(cache=True, nogil=True)
def _row(near: Whole, degree: Whole, number: Whole, v: int, p: int, next_: int) -> int:
    """Later neighbours of v, which has the number p; those without a number get the next ones."""
    row, new = 0, 0
    for e in range(degree[v]):
        of = number[near[v, e]]
        if of > p:
            row |= 1 << of
        elif of < 0 and next_ + new < 62:
            row |= 1 << (next_ + new)
            new += 1
    return row


@njit(cache=True, nogil=True)
def _less(row: int, than: int) -> bool:
    """Whether a row comes before another, different one."""
    differ = row ^ than
    return (row & (differ & -differ)) != 0
