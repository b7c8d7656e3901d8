"""A trial built from the canonical text of its problem: the same demands, under names of no meaning.

The text says everything that a trial demands, so a plan or a bound that is kept by its problem alone can
be judged without the file that once asked for it. Whoever wrote the text is not trusted: the trial that
was built is written down again, and only where that gives the same text does it count.
"""

from __future__ import annotations

import json
import re
from collections.abc import Iterator
from dataclasses import dataclass
from fractions import Fraction
from itertools import accumulate, combinations
from typing import Any

import numpy as np

from search.foundation.errors import BadInput
from search.trial.canonical import EMPTIER, VERSION, text_as_numbered
from search.trial.catalogue import MOST_BLOCKS, MOST_CELLS, MOST_PLOTS, MOST_TREATMENTS
from search.trial.records import (
    Aim,
    AimKind,
    Block,
    Contrast,
    Meeting,
    Replicate,
    Rules,
    Treatment,
    Trial,
)
from search.trial.tables import Ints

Spans = tuple[range, ...]
"""For each class the numbers of its members; classes follow one another."""


def rebuilt(text: str, aim: str, name: str = "problem") -> Trial:
    """The trial of a problem, numbered as its text numbers it.

    Parameters
    ----------
    text : canonical text of the problem
    aim : the kind of aim, which is no part of the text
    name : what to call the trial

    Raises
    ------
    BadInput : this is no text of a problem, or not one of such an aim
    """
    try:
        trial = _trial(_document(text), AimKind(aim), name)
        same = text_as_numbered(trial) == text
    except (ArithmeticError, AttributeError, LookupError, RecursionError, TypeError, ValueError) as error:
        raise BadInput("the text of the problem cannot be read") from error
    if not same or not _is_asked_of(trial):
        raise BadInput(f"the text is not that of a problem for the aim {aim}")
    return trial


def _is_asked_of(trial: Trial) -> bool:
    """Whether there is what the aim asks of: controls, contrasts, or nothing but treatments."""
    kind = trial.aim.kind
    return bool(trial.controls) == (kind is AimKind.AGAINST_CONTROL) and bool(trial.aim.contrasts) == (
        kind is AimKind.CONTRASTS
    )


def _document(text: str) -> dict[str, Any]:
    head, _, body = text.partition("\n")
    if head != VERSION:
        raise ValueError(head)
    document: dict[str, Any] = json.loads(body)
    return document


def _trial(document: dict[str, Any], kind: AimKind, name: str) -> Trial:
    marks, grounds = document["treatments"], document["blocks"]
    members, fields = [mark[0] for mark in marks], [mark[0] for mark in grounds]
    # Before anything is unfolded: a few letters could ask for any number of treatments.
    plots = sum(count * mark[1] for count, mark in zip(fields, grounds, strict=True))
    if not (_fits(members, MOST_TREATMENTS) and _fits(fields, MOST_BLOCKS) and 0 < plots <= MOST_PLOTS):
        raise ValueError(plots)
    if sum(members) * sum(fields) > MOST_CELLS:
        raise ValueError(members)
    treatments, blocks = _spans(members), _spans(fields)
    if sum(members) < 2:
        raise ValueError(members)
    pairs = _pairs(document["pairs"], marks, treatments)
    sizes = [mark[1] for mark, span in zip(grounds, blocks, strict=True) for _ in span]
    if min(sizes) < 1:
        raise ValueError(sizes)
    emptier = [mark[3:] == [EMPTIER] for mark, span in zip(grounds, blocks, strict=True) for _ in span]
    fewest = [1 if may else size for may, size in zip(emptier, sizes, strict=True)]
    cells = _cells(document["cells"], [mark[1] for mark in grounds], treatments, blocks)
    return Trial(
        name=name,
        treatments=tuple(
            Treatment(f"T{i + 1}", mark[1], mark[2], own_range=True, control=bool(mark[3]))
            for mark, span in zip(marks, treatments, strict=True)
            for i in span
        ),
        blocks=tuple(Block(f"block {j + 1}", size, emptier[j]) for j, size in enumerate(sizes)),
        rules=_rules(pairs, cells, fewest, _replicates(grounds, blocks)),
        aim=Aim(kind, _contrasts(document["contrasts"], treatments)),
        blocks_random=_ratio(document["blocks_random"]) if "blocks_random" in document else None,
    )


def _fits(counts: list[Any], most: int) -> bool:
    return all(type(count) is int and count > 0 for count in counts) and sum(counts) <= most


def _spans(counts: list[int]) -> Spans:
    ends = list(accumulate(counts))
    return tuple(range(end - count, end) for count, end in zip(counts, ends, strict=True))


@dataclass(frozen=True, slots=True, eq=False)
class _Pairs:
    """Fewest and most meetings of each pair, and who is apart; shape (t, t), symmetric."""

    least: Ints
    most: Ints
    apart: Ints


def _pairs(document: dict[str, Any], marks: list[Any], spans: Spans) -> _Pairs:
    t = spans[-1].stop
    tables = [np.full((t, t), value, dtype=np.int64) for value in document["usual"]]
    for place, other, *values in document["others"]:
        for table, value in zip(tables, values, strict=True):
            table[np.ix_(spans[place], spans[other])] = value
            table[np.ix_(spans[other], spans[place])] = value
    for mark, span in zip(marks, spans, strict=True):
        if len(span) > 1:
            for table, value in zip(tables, mark[4:], strict=True):
                table[np.ix_(span, span)] = value
    return _Pairs(*tables)


@dataclass(frozen=True, slots=True, eq=False)
class _Cells:
    """Fewest and most plots of each treatment in each block, and in its replicate; shape (t, b)."""

    low: Ints
    high: Ints
    share: Ints


def _cells(document: dict[str, Any], sizes: list[int], treatments: Spans, blocks: Spans) -> _Cells:
    shape = treatments[-1].stop, blocks[-1].stop
    tables = [np.zeros(shape, dtype=np.int64) for _ in range(3)]
    usual = {size: values for size, *values in document["usual"]}
    for size, span in zip(sizes, blocks, strict=True):
        for table, value in zip(tables, usual[size], strict=True):
            table[:, span] = value
    for place, block, *values in document["others"]:
        for table, value in zip(tables, values, strict=True):
            table[np.ix_(treatments[place], blocks[block])] = value
    return _Cells(*tables)


def _replicates(grounds: list[Any], spans: Spans) -> tuple[Replicate, ...]:
    held: dict[int, list[int]] = {}
    for mark, span in zip(grounds, spans, strict=True):
        if mark[2] >= 0:
            held.setdefault(mark[2], []).extend(span)
    return tuple(Replicate(f"replicate {g + 1}", tuple(held[g])) for g in range(len(held)))


def _rules(pairs: _Pairs, cells: _Cells, fewest: list[int], replicates: tuple[Replicate, ...]) -> Rules:
    t, b = cells.low.shape
    inside = [replicate.blocks[0] for replicate in replicates]
    twice = bool((cells.high > 1).any())
    # What a block must hold of everything, only because it is so large.
    forced = np.array(fewest, dtype=np.int64) // t if twice else np.zeros(b, dtype=np.int64)
    kept_out = cells.high == 0
    held = (cells.low > 0) & ((cells.low != forced) | kept_out)
    free = (cells.low == 0) & ~kept_out & (forced > 0)
    return Rules(
        never_share_block=tuple(_where(np.triu(pairs.apart, 1))),
        meet_at_least=tuple(_meetings(pairs.least, -1)),
        meet_at_most=tuple(_meetings(np.where(pairs.apart, b, pairs.most), b)),
        keep_out=tuple(_where(kept_out)),
        unforced=tuple(_where(free)),
        must_hold=tuple(_where(held)),
        replicates=replicates,
        per_replicate=tuple((i, int(cells.share[i, inside[0]])) for i in range(t) if inside),
        twice_in_block=twice,
    )


def _where(table: Any) -> Iterator[tuple[int, int]]:
    return zip(*(numbers.tolist() for numbers in np.nonzero(table)), strict=True)


def _meetings(limits: Ints, sign: int) -> Iterator[Meeting]:
    """One limit for all pairs, and one for each pair under a tighter one.

    Parameters
    ----------
    limits : (t, t) number of meetings
    sign : -1 for the fewest, which say nothing at 0; else the most, which say nothing at this number
    """
    t = len(limits)
    upper = limits[np.triu_indices(t, 1)]
    loosest, nothing = (int(upper.min()), 0) if sign < 0 else (int(upper.max()), sign)
    if loosest != nothing:
        yield Meeting(loosest)
    for i, j in combinations(range(t), 2):
        if limits[i, j] != loosest:
            yield Meeting(int(limits[i, j]), (i, j))


def _contrasts(rows: list[Any], spans: Spans) -> tuple[Contrast, ...]:
    contrasts = []
    for number, (share, of) in enumerate(rows, start=1):
        weights = tuple((i, _ratio(value)) for place, value in of for i in spans[place])
        if not weights or sum((value for _, value in weights), Fraction()) or _ratio(share) <= 0:
            raise ValueError(number)
        contrasts.append(Contrast(f"contrast {number}", _ratio(share), weights))
    return tuple(contrasts)


def _ratio(text: str) -> Fraction:
    if not re.fullmatch(r"-?[0-9]{1,400}/[0-9]{1,400}", text):
        raise ValueError(text)
    return Fraction(text)
