"""A canonical order of things that have colours and pairwise relations.

Colour refinement tells things apart by what surrounds them. What it leaves alike falls into pieces that
do not touch (relative to the usual relation between two colours): pieces are ordered one by one, and like
pieces may follow each other in any order. Where one piece is left, each thing of one colour is singled
out in turn and the least result is taken; results that agree reveal a symmetry and save the others.

A work limit keeps hopeless cases short. Past it the order still is an order, no longer the canonical one.

McKay 1981, "Practical graph isomorphism", for refinement, individualisation and the use of symmetries.
"""

from __future__ import annotations

from dataclasses import dataclass
from typing import NamedTuple

import numpy as np
from numpy.typing import NDArray

from search.trial.tables import Bools, Ints

MOST_WORK = 300_000_000
"""Table entries read before the order stops being canonical: 0.2 to 0.3 s."""
CALL_WORK = 80_000
"""What a small step costs beside the entries it reads, in entries."""

BIG_ENDIAN = ">u4"
"""Bytes of such numbers compare like the numbers, on every machine."""

Hashes = NDArray[np.uint64]


@dataclass(frozen=True, slots=True, eq=False)
class Ordered:
    """Things in canonical order; `complete` is False where the work limit cut the search short."""

    order: tuple[int, ...]
    complete: bool


def canonical_order(colours: Ints, codes: Ints, most_work: int = MOST_WORK) -> Ordered:
    """Order things so that things which differ by their numbers alone come out alike.

    Parameters
    ----------
    colours : (m,) colour of each thing
    codes : (m, m) symmetric, relation of each pair; the diagonal is not looked at
    most_work : table entries that may be read

    Returns
    -------
    order : colours and codes taken in this order are the same for every numbering of the things
    """
    codes = np.searchsorted(np.unique(codes), codes)
    np.fill_diagonal(codes, 0)
    search = _Search(most_work)
    order = search.order(_Piece(np.unique(colours, return_inverse=True)[1], codes))
    return Ordered(tuple(order.tolist()), search.work <= most_work)


class _Piece(NamedTuple):
    """Things with colours 0, 1, … and codes 0, 1, …; both mean the same in every numbering."""

    colours: Ints
    codes: Ints

    def of(self, members: Ints) -> _Piece:
        return _Piece(self.colours[members], self.codes[np.ix_(members, members)])

    def form(self, order: Ints) -> tuple[bytes, bytes]:
        """What is seen when the things are taken in an order."""
        taken = self.of(order)
        return taken.colours.astype(BIG_ENDIAN).tobytes(), taken.codes.astype(BIG_ENDIAN).tobytes()


class _Search:
    def __init__(self, most_work: int) -> None:
        self.most_work = most_work
        self.work = 0

    def order(self, piece: _Piece) -> Ints:
        """A canonical order of the things of a piece."""
        self.work += 4 * (piece.codes.size + CALL_WORK)
        colours, _ = self.refined(piece.colours, _hashes(piece.codes))
        refined = _Piece(colours, piece.codes)
        counts = np.bincount(colours)
        alone = np.flatnonzero(counts[colours] == 1)
        loose = np.flatnonzero(counts[colours] > 1)
        pieces = _pieces(refined, loose)
        if len(alone) == 0 and len(pieces) == 1:
            return self.best_after_singling_out(refined)
        parts = []
        for members in pieces:
            part = refined.of(members)
            inner = self.order_of_part(part)
            parts.append((part.form(inner), members[inner]))
        parts.sort(key=lambda part: part[0])
        return np.concatenate([alone[np.argsort(colours[alone])], *(part[1] for part in parts)])

    def order_of_part(self, part: _Piece) -> Ints:
        order = np.argsort(part.colours, kind="stable")
        discrete = len(np.unique(part.colours)) == len(order)
        return order if discrete else self.order(_Piece(_ranks(part.colours), part.codes))

    def best_after_singling_out(self, piece: _Piece) -> Ints:
        """Single out each thing of the smallest colour class, and take the least form that follows."""
        hashes = _hashes(piece.codes)
        counts = np.bincount(piece.colours)
        cell = np.flatnonzero(piece.colours == int(np.argmin(counts)))
        symmetries = _Symmetries(len(piece.colours))
        least: tuple[bytes, tuple[bytes, bytes]] | None = None
        best = cell
        for thing in cell.tolist():
            if symmetries.reaches(thing):
                continue
            symmetries.explored.append(thing)
            colours = 2 * piece.colours + 1
            colours[thing] -= 1
            colours, trace = self.refined(_ranks(colours), hashes)
            if least is not None and trace > least[0]:
                continue
            order = self.order(_Piece(colours, piece.codes))
            form = trace, piece.form(order)
            if form == least:
                symmetries.add(best, order)
            elif least is None or form < least:
                least, best = form, order
            if self.work > self.most_work:
                break
        return best

    def refined(self, colours: Ints, hashes: Hashes) -> tuple[Ints, bytes]:
        """Colours split until things of one colour see the same colours, and a trace of the splitting."""
        while True:
            self.work += hashes.size + CALL_WORK
            seen = hashes @ _mixed(colours.astype(np.uint64))
            order = np.lexsort((seen, colours))
            steps = (np.diff(colours[order]) != 0) | (np.diff(seen[order]) != 0)
            split = np.empty_like(colours)
            split[order] = np.concatenate([[0], np.cumsum(steps)])
            if split[order[-1]] == colours.max():
                return split, split[order].astype(BIG_ENDIAN).tobytes() + seen[order].astype(">u8").tobytes()
            colours = split


class _Symmetries:
    """Which things can be carried onto each other by the symmetries found so far."""

    def __init__(self, size: int) -> None:
        self.parent = list(range(size))
        self.explored: list[int] = []

    def root(self, thing: int) -> int:
        while self.parent[thing] != thing:
            self.parent[thing] = self.parent[self.parent[thing]]
            thing = self.parent[thing]
        return thing

    def add(self, order: Ints, image: Ints) -> None:
        """Learn that taking the things in either order shows the same."""
        for a, b in zip(order.tolist(), image.tolist(), strict=True):
            self.parent[self.root(a)] = self.root(b)

    def reaches(self, thing: int) -> bool:
        """Whether an explored thing is carried onto this one."""
        return any(self.root(other) == self.root(thing) for other in self.explored)


def _pieces(piece: _Piece, loose: Ints) -> list[Ints]:
    """Connected pieces of the loose things; usual relations between colours do not connect."""
    if len(loose) == 0:
        return []
    colours = _ranks(piece.colours[loose])
    codes = piece.codes[np.ix_(loose, loose)]
    usual = _usual(colours, codes)
    linked = codes != usual[colours[:, None], colours[None, :]]
    np.fill_diagonal(linked, False)
    return [loose[members] for members in _connected(linked)]


def _usual(colours: Ints, codes: Ints) -> Ints:
    """The commonest code between any two colours, the least on ties.

    Things of one colour see the same codes in each colour, so one of each colour is asked.
    """
    first = np.unique(colours, return_index=True)[1]
    cells, kinds = len(first), int(codes.max()) + 1
    keys = (np.arange(cells)[:, None] * cells + colours[None, :]) * kinds + codes[first]
    keys[np.arange(cells), first] = -1
    found, counts = np.unique(keys[keys >= 0], return_counts=True)
    by_count = np.lexsort((-found, counts))
    usual = np.zeros(cells * cells, dtype=np.int64)
    usual[found[by_count] // kinds] = found[by_count] % kinds
    return usual.reshape(cells, cells)


def _connected(linked: Bools) -> list[Ints]:
    left = np.ones(len(linked), dtype=np.bool_)
    found = []
    for start in range(len(linked)):
        if not left[start]:
            continue
        left[start] = False
        members, at = [start], 0
        while at < len(members):
            new = np.flatnonzero(linked[members[at]] & left)
            left[new] = False
            members.extend(new.tolist())
            at += 1
        found.append(np.array(sorted(members), dtype=np.int64))
    return found


def _ranks(colours: Ints) -> Ints:
    return np.unique(colours, return_inverse=True)[1].astype(np.int64)


def _hashes(codes: Ints) -> Hashes:
    hashes = _mixed(codes.astype(np.uint64) + np.uint64(1 << 32))
    np.fill_diagonal(hashes, 0)
    return hashes


def _mixed(numbers: Hashes) -> Hashes:
    """Well-mixed 64 bits of each number, the same on every machine (Steele, Lea, Flood 2014)."""
    x = (numbers + np.uint64(1)) * np.uint64(0x9E3779B97F4A7C15)
    x = (x ^ (x >> np.uint64(30))) * np.uint64(0xBF58476D1CE4E5B9)
    x = (x ^ (x >> np.uint64(27))) * np.uint64(0x94D049BB133111EB)
    return x ^ (x >> np.uint64(31))
