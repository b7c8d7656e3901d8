"""Problems for the tests of the search."""

from __future__ import annotations

from collections.abc import Iterator, Sequence
from dataclasses import replace

import numpy as np
from numpy.typing import NDArray

from search.foundation.stopping import Limits, Stop
from search.solvers import records
from search.solvers.board import Board
from search.solvers.filler import filled, spare_of, with_filler
from search.solvers.records import Problem
from search.solvers.start import feasible_start
from search.trial.limits import limits
from search.trial.records import Contents, Trial
from search.trial.tables import Tables, contents_of, incidence, tables

FOREVER = Stop(Limits())
"""A stop that never comes."""


def pairs(t: int) -> NDArray[np.float64]:
    """W of the aim all pairs: `2(I − J/t)/(t − 1)`."""
    return np.asarray(2 * (np.eye(t) - 1 / t) / (t - 1))


def plain_tables(
    t: int, sizes: Sequence[int], *, plots: tuple[int, int] | None = None, twice: bool = False
) -> Tables:
    """Tables without rules; as even as can be where no range of plots is given."""
    b, n = len(sizes), sum(sizes)
    least, most = plots or (n // t, -(-n // t))
    of_blocks = np.array(sizes, dtype=np.int64)
    return Tables(
        sizes=of_blocks,
        fewest=of_blocks,
        low=np.zeros((t, b), dtype=np.int64),
        high=np.ones((t, b), dtype=np.int64) * (of_blocks if twice else 1),
        least=np.full(t, least),
        most=np.full(t, most),
        apart=np.zeros((t, t), dtype=np.bool_),
        meet_least=np.zeros((t, t), dtype=np.int64),
        meet_most=np.full((t, t), b),
        group=np.full(b, -1),
        share=np.zeros((t, 0), dtype=np.int64),
    )


def in_turn(t: int, sizes: Sequence[int]) -> Contents:
    """The plan that takes the treatments in turn, over and over."""
    ends = np.cumsum(sizes).tolist()
    return tuple(
        tuple(sorted(i % t for i in range(end - size, end))) for end, size in zip(ends, sizes, strict=True)
    )


def plain(t: int, b: int, k: int) -> tuple[Problem, Contents]:
    """b blocks of k plots without rules, for all pairs, and a plan."""
    sizes = [k] * b
    return Problem(plain_tables(t, sizes), pairs(t)), in_turn(t, sizes)


def problem_of(trial: Trial) -> Problem:
    """The search's problem of a trial of exact blocks, with the replication that its rules imply."""
    implied = limits(trial)
    return records.problem_of(trial, replace(tables(trial), least=implied.least, most=implied.most))


def filled_problem(trial: Trial) -> tuple[Problem, Contents]:
    """The search's problem of any trial, filler among its treatments, and a plan."""
    implied = limits(trial)
    rules = replace(tables(trial), least=implied.least, most=implied.most)
    start, _ = feasible_start(trial, rules, implied, seed=1, seconds=20)
    spare = spare_of(rules, start)
    return records.problem_of(trial, with_filler(rules, spare), sum(spare)), filled(rules, start)


def moves_from(board: Board) -> Iterator[tuple[int, int, Contents]]:
    """Every exchange of unlike treatments in two blocks and every replacement, legal or not.

    Returns
    -------
    moves : plot and partner as the kernel numbers them, and the contents that the move leads to
    """
    planted, home = board.planting.planted.tolist(), board.beds.home.tolist()
    n, (b, t) = len(planted), board.planting.copies.shape
    t -= int(board.beds.mean > 0)  # the general mean is never planted
    for plot in range(n):
        for partner in [*range(plot + 1, n), *range(n, n + t)]:
            after = list(planted)
            if partner < n:
                after[plot], after[partner] = planted[partner], planted[plot]
            else:
                after[plot] = partner - n
            if after[plot] == planted[plot] or (partner < n and home[plot] == home[partner]):
                continue
            counts = np.zeros((t, b), dtype=np.int64)
            np.add.at(counts, (after, home), 1)
            yield plot, partner, contents_of(counts)


def within(table: Tables, contents: Contents) -> bool:
    """Whether a plan keeps the ranges of plots and of copies in a block."""
    counts = incidence(contents, table.t)
    plots = counts.sum(axis=1)
    return bool(
        (counts <= table.high).all()
        and (counts >= table.low).all()
        and (plots <= table.most).all()
        and (plots >= table.least).all()
    )
