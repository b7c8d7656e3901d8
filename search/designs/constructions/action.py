"""A permutation group on points, its orbits on pairs, and subgroups that may hold a block still."""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import dataclass
from itertools import combinations
from math import gcd

import numpy as np
from numpy.typing import NDArray

Ints = NDArray[np.int64]
Bools = NDArray[np.bool_]

MOST_CLASSES = 14
"""Classes of cyclic subgroups up to which the subgroups that two of them generate are looked at."""


@dataclass(frozen=True, slots=True)
class Action:
    """A permutation group on points, with its orbits on pairs.

    Parameters
    ----------
    elements : (order, v) all permutations, the identity first
    labels : (v, v) number of the orbit of each pair; -1 on the diagonal
    lengths : pairs in each orbit
    """

    elements: Ints
    labels: Ints
    lengths: Ints

    @classmethod
    def of(cls, elements: Ints) -> Action:
        """The action of a group given by all its elements."""
        v = elements.shape[1]
        labels = np.full((v, v), -1, dtype=np.int64)
        lengths: list[int] = []
        for x in range(v):
            for y in range(x + 1, v):
                if labels[x, y] < 0:
                    labels[elements[:, x], elements[:, y]] = len(lengths)
                    labels[elements[:, y], elements[:, x]] = len(lengths)
                    lengths.append(int(np.count_nonzero(labels == len(lengths))) // 2)
        return cls(elements, labels, np.array(lengths, dtype=np.int64))

    @property
    def order(self) -> int:
        """Number of elements."""
        return len(self.elements)

    def developed(self, block: tuple[int, ...]) -> tuple[tuple[int, ...], ...]:
        """The orbit of a block."""
        images = np.sort(self.elements[:, list(block)], axis=1)
        return tuple(map(tuple, np.unique(images, axis=0).tolist()))


@dataclass(frozen=True, slots=True)
class Stabiliser:
    """A subgroup: its order, its orbits on points, and equal numbers for those that its normaliser joins."""

    order: int
    orbits: tuple[tuple[int, ...], ...]
    classes: tuple[int, ...]


def stabilisers(action: Action) -> list[Stabiliser]:
    """One cyclic subgroup of each class of conjugates, and what two of these generate; largest first."""
    elements = _Elements.of(action.elements)
    cyclic = list(_cyclic(elements))
    found = {inside.tobytes(): (inside, normal) for _, inside, normal in cyclic}
    if len(cyclic) <= MOST_CLASSES:
        products = [elements.products(generator) for generator, _, _ in cyclic]
        conjugates = [elements.conjugates(generator) for generator, _, _ in cyclic]
        for i, j in combinations(range(len(cyclic)), 2):
            inside = _generated(products[i], products[j])
            if inside.tobytes() not in found:
                found[inside.tobytes()] = inside, inside[conjugates[i]] & inside[conjugates[j]]
    largest_first = sorted(found.values(), key=lambda pair: -int(pair[0].sum()))
    return [
        _with_orbits(action.elements[inside], action.elements[normal]) for inside, normal in largest_first
    ]


@dataclass(frozen=True, slots=True)
class _Elements:
    """The elements of a group, each known by a number: a sum of random marks tells which it is."""

    rows: Ints
    inverse: Ints
    marks: Ints
    by_mark: Ints
    sorted_marks: Ints

    @classmethod
    def of(cls, rows: Ints) -> _Elements:
        marks: Ints = np.random.default_rng(0).integers(1 << 40, size=(rows.shape[1],))
        sums = rows @ marks
        by_mark = np.argsort(sums)
        return cls(rows, np.argsort(rows, axis=1), marks, by_mark, np.take(sums, by_mark))

    def numbers(self, rows: Ints) -> Ints:
        return self.by_mark[np.searchsorted(self.sorted_marks, rows @ self.marks)]

    def products(self, s: int) -> Ints:
        """For each element g the number of gs."""
        return self.numbers(self.rows[:, self.rows[s]])

    def conjugates(self, s: int) -> Ints:
        """For each element g the number of gsg⁻¹."""
        return self.numbers(np.take_along_axis(self.rows, self.rows[s][self.inverse], axis=1))


def _cyclic(elements: _Elements) -> Iterator[tuple[int, Bools, Bools]]:
    """For each class a generator, which elements are its powers, and which normalise them."""
    order = len(elements.rows)
    left = np.ones(order, dtype=np.bool_)
    for s in range(order):
        if not left[s]:
            continue
        after, powers = elements.products(s), [0]
        while (power := int(after[powers[-1]])) != 0:
            powers.append(power)
        inside = np.zeros(order, dtype=np.bool_)
        inside[powers] = True
        for i, power in enumerate(powers):
            if gcd(i, len(powers)) == 1:  # the other generators, and all that are conjugate
                left[elements.conjugates(power)] = False
        yield s, inside, inside[elements.conjugates(s)]


def _generated(first: Ints, second: Ints) -> Bools:
    """Which elements are products of two, given what multiplying by each does."""
    inside = np.zeros(len(first), dtype=np.bool_)
    inside[0] = True
    many = 0
    while many != (many := int(inside.sum())):
        inside[first[inside]] = True
        inside[second[inside]] = True
    return inside


def _with_orbits(subgroup: Ints, normaliser: Ints) -> Stabiliser:
    least = subgroup.min(axis=0)
    joined = least[normaliser].min(axis=0)
    leaders = sorted(set(least.tolist()), key=lambda x: (int(joined[x]), x))
    orbits = tuple(tuple(np.flatnonzero(least == x).tolist()) for x in leaders)
    return Stabiliser(len(subgroup), orbits, tuple(int(joined[x]) for x in leaders))
