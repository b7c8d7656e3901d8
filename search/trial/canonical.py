"""One name for one problem: a canonical numbering of everything that a trial demands, and its digest.

Two trials that differ by names, order and wording alone get the same digest. The digest is taken over
the complete list of relations in canonical numbering, so equal digests mean equal problems; a canonical
numbering that would take too long is given up, and then the same problem may get another digest.
"""

from __future__ import annotations

from collections import Counter
from collections.abc import Iterable, Sequence
from dataclasses import dataclass
from fractions import Fraction
from hashlib import sha256
from typing import Any

import numpy as np

from search.foundation.documents import canonical_json
from search.trial.records import Trial
from search.trial.refinement import MOST_WORK, canonical_order
from search.trial.relations import Relations, relations, unpacked_cell, unpacked_pair
from search.trial.roles import Classes, block_classes, treatment_classes
from search.trial.tables import Ints

VERSION = "evenfield problem 1"
EMPTIER = "at most"
"""In the text, the mark of blocks that may stay partly empty."""


@dataclass(frozen=True, slots=True)
class Canonical:
    """The canonical numbering of a trial.

    Parameters
    ----------
    digest : sha256 of `text`, in hexadecimal
    treatments, blocks, replicates, contrasts : for each canonical place the trial's own number
    complete : False where the work limit was met and another numbering might give another digest
    text : version line and every relation; names, map and settings are not in it
    """

    digest: str
    treatments: tuple[int, ...]
    blocks: tuple[int, ...]
    replicates: tuple[int, ...]
    contrasts: tuple[int, ...]
    complete: bool
    text: str


def canonical(trial: Trial, most_work: int = MOST_WORK) -> Canonical:
    """The canonical numbering of a trial.

    Treatments, and blocks, that play the same part stand for each other: one of each class is numbered,
    and the others follow it. The kind of aim is not part of the problem, but what it asks of single
    treatments is: who is a control, the coefficients of contrasts and their weights.

    Parameters
    ----------
    trial : the trial
    most_work : how long the numbering may take, see `search.trial.refinement`
    """
    parts = _Parts.of(relations(trial))
    ordered = canonical_order(parts.colours(), parts.codes(), most_work)
    parts = parts.taken(ordered.order)
    text = _text(parts)
    return Canonical(
        digest=digest_of(text),
        treatments=tuple(i for members in parts.treatments for i in members),
        blocks=tuple(j for members in parts.blocks for j in members),
        replicates=parts.replicates(),
        contrasts=parts.contrasts,
        complete=ordered.complete,
        text=text,
    )


def digest_of(text: str) -> str:
    """The digest of a problem's text."""
    return sha256(text.encode()).hexdigest()


def text_as_numbered(trial: Trial) -> str:
    """The text of a trial in its own numbering; the canonical text where it is numbered so already."""
    return _text(_Parts.of(relations(trial)))


def _text(parts: _Parts) -> str:
    return f"{VERSION}\n{canonical_json(parts.document())}\n"


@dataclass(frozen=True, slots=True, eq=False)
class _Parts:
    """The relations between classes of treatments, classes of blocks, and contrasts, in some order."""

    rel: Relations
    treatments: Classes
    blocks: Classes
    contrasts: tuple[int, ...]

    @classmethod
    def of(cls, rel: Relations) -> _Parts:
        return cls(rel, treatment_classes(rel), block_classes(rel), tuple(range(len(rel.shares))))

    def taken(self, order: Sequence[int]) -> _Parts:
        """The same parts in another order, given over treatments, then blocks, then contrasts."""
        t, b = len(self.treatments), len(self.blocks)
        return _Parts(
            self.rel,
            tuple(self.treatments[x] for x in order if x < t),
            tuple(self.blocks[x - t] for x in order if t <= x < t + b),
            tuple(self.contrasts[x - t - b] for x in order if x >= t + b),
        )

    def replicates(self) -> tuple[int, ...]:
        """Replicates in the order in which the blocks meet them."""
        met = (int(self.rel.group[members[0]]) for members in self.blocks)
        return tuple(dict.fromkeys(g for g in met if g >= 0))

    # -- what one part is ------------------------------------------------------------------------

    def treatment_marks(self) -> list[tuple[int, ...]]:
        """Members, stated range, control, and how the members stand to each other."""
        rel = self.rel
        return [
            (len(members), *rel.ranges[members[0]], int(rel.controls[members[0]]), *self.inside(members))
            for members in self.treatments
        ]

    def inside(self, members: Sequence[int]) -> tuple[int, ...]:
        return unpacked_pair(int(self.rel.pairs[members[0], members[1]])) if len(members) > 1 else ()

    def block_marks(self) -> list[tuple[int, int]]:
        """Members and plots."""
        return [(len(members), int(self.rel.sizes[members[0]])) for members in self.blocks]

    def emptier(self) -> list[bool]:
        """Whether some of those plots may stay filler."""
        return [bool(self.rel.emptier[members[0]]) for members in self.blocks]

    def colours(self) -> Ints:
        """Equal numbers for parts that are alike in themselves."""
        grouped = (self.rel.group[[members[0] for members in self.blocks]] >= 0).tolist()
        marks: list[tuple[Any, ...]] = [(0, *mark) for mark in self.treatment_marks()]
        blocks = zip(self.block_marks(), grouped, self.emptier(), strict=True)
        marks += [(1, *mark, inside, emptier) for mark, inside, emptier in blocks]
        marks += [(2, self.rel.shares[c]) for c in self.contrasts]
        number = {mark: rank for rank, mark in enumerate(sorted(set(marks)))}
        return np.array([number[mark] for mark in marks], dtype=np.int64)

    # -- how two parts stand to each other -------------------------------------------------------

    def pairs(self) -> Ints:
        first = [members[0] for members in self.treatments]
        return self.rel.pairs[np.ix_(first, first)]

    def cells(self) -> Ints:
        return self.rel.cells[
            np.ix_([members[0] for members in self.treatments], [members[0] for members in self.blocks])
        ]

    def codes(self) -> Ints:
        """All relations in one symmetric table of numbers."""
        t, b, q = len(self.treatments), len(self.blocks), len(self.contrasts)
        table = np.zeros((t + b + q, t + b + q), dtype=np.int64)
        table[:t, :t] = self.pairs()
        table[:t, t : t + b] = self.cells()
        table[t : t + b, :t] = table[:t, t : t + b].T
        group = self.rel.group[[members[0] for members in self.blocks]]
        table[t : t + b, t : t + b] = (group[:, None] == group[None, :]) & (group >= 0)[:, None]
        table[:t, t + b :] = self.coefficients()
        table[t + b :, :t] = table[:t, t + b :].T
        return table

    def coefficients(self) -> Ints:
        """Ranks of the contrasts' coefficients, a row for each treatment part."""
        rows = [[self.rel.coefficients[c][members[0]] for c in self.contrasts] for members in self.treatments]
        rank = {x: number for number, x in enumerate(sorted({x for row in rows for x in row}))}
        ranks = [[rank[x] for x in row] for row in rows]
        return np.array(ranks, dtype=np.int64).reshape(len(self.treatments), len(self.contrasts))

    # -- the text --------------------------------------------------------------------------------

    def document(self) -> dict[str, Any]:
        """Every relation, by places in this order; the usual ones once, the others one by one."""
        place = {g: number for number, g in enumerate(self.replicates())}
        group = [int(self.rel.group[members[0]]) for members in self.blocks]
        # blocks that are fixed leave no entry: the digests of such trials stay what they always were
        ratio = self.rel.blocks_random
        random = {} if ratio is None else {"blocks_random": _rational(ratio)}
        return random | {
            "treatments": [list(mark) for mark in self.treatment_marks()],
            "blocks": [
                # A mark of its own where plots may stay filler; other blocks are written as ever.
                [*mark, place.get(g, -1), *([EMPTIER] if emptier else [])]
                for mark, g, emptier in zip(self.block_marks(), group, self.emptier(), strict=True)
            ],
            "pairs": self.pairs_document(),
            "cells": self.cells_document(),
            "contrasts": [self.contrast_document(c) for c in self.contrasts],
        }

    def pairs_document(self) -> dict[str, Any]:
        table = self.pairs()
        upper = np.triu(np.ones_like(table, dtype=np.bool_), 1)
        usual = _usual(table[upper].tolist())
        others = np.nonzero(upper & (table != usual))
        return {"usual": unpacked_pair(usual), "others": _listed(table, others, unpacked_pair)}

    def cells_document(self) -> dict[str, Any]:
        table = self.cells()
        sizes = np.array([size for _, size in self.block_marks()])
        usual = {
            size: _usual(table[:, sizes == size].ravel().tolist()) for size in sorted(set(sizes.tolist()))
        }
        expected = np.array([usual[size] for size in sizes.tolist()])
        others = np.nonzero(table != expected[None, :])
        return {
            "usual": [[size, *unpacked_cell(code)] for size, code in usual.items()],
            "others": _listed(table, others, unpacked_cell),
        }

    def contrast_document(self, contrast: int) -> list[Any]:
        row = self.rel.coefficients[contrast]
        of = [
            [place, _rational(row[members[0]])]
            for place, members in enumerate(self.treatments)
            if row[members[0]]
        ]
        return [_rational(self.rel.shares[contrast]), of]


def _usual(codes: Iterable[int]) -> int:
    """The commonest code, the least on ties."""
    counts = Counter(codes)
    return min(counts, key=lambda code: (-counts[code], code), default=0)


def _listed(table: Ints, places: tuple[Ints, ...], unpacked: Any) -> list[list[int]]:
    return [[i, j, *unpacked(int(table[i, j]))] for i, j in zip(*(x.tolist() for x in places), strict=True)]


def _rational(x: Fraction) -> str:
    return f"{x.numerator}/{x.denominator}"
