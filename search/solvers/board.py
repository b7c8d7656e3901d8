"""The kernel's board: from a trial's tables and block contents to its arrays, and back, in plain numpy."""

from __future__ import annotations

from dataclasses import replace
from typing import TYPE_CHECKING, Any, NamedTuple

import numpy as np
from numpy.typing import NDArray

from search.efficiency.balance import squared_meetings
from search.efficiency.evaluator import (
    information_matrix,
    is_estimable,
    log_pseudo_determinant,
    meetings_and_ties,
    pseudo_inverse,
)
from search.efficiency.one_thread import one_thread
from search.solvers.compiled import kernel
from search.solvers.filler import emptied
from search.solvers.records import Goal, Problem
from search.trial.records import Contents
from search.trial.tables import Tables, contents_of, incidence

if TYPE_CHECKING:
    from search.solvers.kernel import Admitted, Beds, Metrics, Planting


LANES = 8
"""Rows of the tables are filled up to a multiple of so many numbers: a vector of the processor."""


class Board(NamedTuple):
    """All that a move looks at or changes."""

    beds: Beds
    admitted: Admitted
    planting: Planting
    metrics: Metrics

    @property
    def plain(self) -> tuple[tuple[Any, ...], ...]:
        """The same arrays in plain tuples, as the entry points of the kernel take them."""
        return tuple(tuple(part) for part in self)


def objective(problem: Problem, contents: Contents) -> float:
    """The aim's objective from scratch, see `search.efficiency.evaluator.objective`; inf if disconnected."""
    t, ratio = problem.tables.t, problem.blocks_random
    if problem.filler:
        t -= problem.filler
        contents = emptied(contents, t)
    if not is_estimable(contents, t, ratio):
        return float("inf")
    information = information_matrix(contents, t, ratio)
    if problem.weights is None:
        return -log_pseudo_determinant(information) / (t - 1)
    inverse = pseudo_inverse(information)
    if problem.goal is Goal.WORST:
        own = np.diag(inverse)
        return float((own[:, None] + own[None, :] - 2 * inverse).max())
    mean = float((problem.weights[:t, :t] * inverse).sum())
    if problem.goal is Goal.MEETINGS:
        return meetings_and_ties(squared_meetings(contents, t), mean)
    return mean


def unit_of(problem: Problem, value: float) -> float:
    """What tolerances of an objective are parts of.

    A variance is measured by its own size, a logarithm by 1, and so is what ranks equally even plans.
    """
    return 1.0 if problem.weights is None or problem.goal is Goal.MEETINGS else abs(value)


def board_of(problem: Problem, contents: Contents) -> Board:
    """A board with a plan on it; the tables of its metrics wait for `refresh`.

    Where blocks are random the general mean is a point of its own, after the treatments: it has a weight of
    one over the ratio of the variances in every block, and no plot. `C(γ)` is what such a plan tells of the
    treatments, for a random block effect is an observation of that weight on the difference between the
    block and the mean.
    """
    weight = 0.0 if problem.blocks_random is None else float(1 / problem.blocks_random)
    tables = problem.tables if weight == 0 else _with_mean(problem.tables)
    beds = _beds(tables, weight)
    return Board(
        beds=beds,
        admitted=_admitted(tables, problem.tables.t - problem.filler if problem.filler else tables.t),
        planting=_planting(tables, beds, contents),
        metrics=_metrics(
            tables, overall=problem.weights is None, degrees=problem.tables.t - problem.filler - 1.0
        ),
    )


def _with_mean(tables: Tables) -> Tables:
    """The tables with one treatment more, which never has a plot."""
    last = ((0, 1), (0, 0))
    corner = ((0, 1), (0, 1))
    return replace(
        tables,
        low=np.pad(tables.low, last),
        high=np.pad(tables.high, last),
        least=np.pad(tables.least, (0, 1)),
        most=np.pad(tables.most, (0, 1)),
        apart=np.pad(tables.apart, corner),
        meet_least=np.pad(tables.meet_least, corner),
        meet_most=np.pad(tables.meet_most, corner, constant_values=tables.b),
        share=np.pad(tables.share, last),
    )


def contents_on(board: Board) -> Contents:
    """Block contents of the plan on a board."""
    return contents_of(board.planting.copies.T.astype(np.int64))


def refresh(problem: Problem, board: Board) -> None:
    """Compute the tables of a connected plan from scratch."""
    counts = board.planting.copies.T.astype(np.float64)
    counts[problem.tables.t :] = board.beds.mean
    t = len(counts)
    with one_thread():
        information = np.diag(counts.sum(axis=1)) - (counts * board.beds.share) @ counts.T
        inverse = np.linalg.inv(information + 1 / t)
        board.metrics.inverse[:, :t] = inverse
        if problem.weights is not None:
            known = inverse[:, : problem.tables.t]
            board.metrics.worth[:, :t] = known @ problem.weights @ known.T
    board.metrics.stamps[:] = -1
    board.metrics.stamps[-1] = 0


def _beds(tables: Tables, mean: float) -> Beds:
    module = kernel()
    order = np.argsort(tables.group, kind="stable")
    blocks = np.zeros((tables.b, 5), dtype=np.uint32)
    blocks[:, module.PLOTS] = tables.sizes
    blocks[order, module.FIRST] = np.cumsum(tables.sizes[order]) - tables.sizes[order]
    for group in np.unique(tables.group):
        members = tables.group == group
        blocks[members, module.POOL_FIRST] = blocks[members, module.FIRST].min()
        blocks[members, module.POOL_PLOTS] = tables.sizes[members].sum()
    loose = np.flatnonzero(tables.least < tables.most)
    blocks[:, module.REACH] = blocks[:, module.POOL_PLOTS] + len(loose) * (tables.group < 0)
    home = np.repeat(order, tables.sizes[order])
    beds: Beds = module.Beds(
        home=_number(home),
        blocks=blocks,
        share=1.0 / (tables.sizes + mean),
        loose=_number(loose),
        mean=mean,
    )
    return beds


def _admitted(tables: Tables, real: int) -> Admitted:
    many = tables.t if tables.limits_meetings else 0  # nobody asks for them
    admitted: Admitted = kernel().Admitted(
        plots=_count(np.stack([tables.least, tables.most])),
        copies=_count(np.stack([tables.low.T, tables.high.T])),
        meetings=_count(np.stack([tables.meet_least, tables.meet_most])[:, :many, :many]),
        apart=_count(tables.apart),
        any_apart=bool(tables.apart.any()),
        any_meetings=tables.limits_meetings,
        real=real,
    )
    return admitted


def _planting(tables: Tables, beds: Beds, contents: Contents) -> Planting:
    module = kernel()
    counts = incidence(contents, tables.t)
    planted = np.zeros(tables.n, dtype=np.uint32)
    for block, treatments in enumerate(contents):
        first = int(beds.blocks[block, module.FIRST])
        planted[first : first + len(treatments)] = treatments
    # whole numbers in floating point, where products of matrices are quick
    gate = (tables.apart.astype(np.float64) @ counts).astype(np.int64) if tables.apart.any() else 0 * counts
    gate += module.FULL * (counts >= tables.high) + module.PINNED * (counts <= tables.low)
    present = (counts > 0).astype(np.float64)[: tables.t if tables.limits_meetings else 0]
    meetings = present @ present.T
    np.fill_diagonal(meetings, 0)
    planting: Planting = module.Planting(
        planted=planted,
        plots=_count(counts.sum(axis=1)),
        copies=_count(counts.T),
        meetings=_count(meetings),
        gate=_count(gate.T),
        room=np.zeros(tables.t + tables.b, dtype=np.uint32),
    )
    return planting


def _metrics(tables: Tables, *, overall: bool, degrees: float) -> Metrics:
    module, t, b = kernel(), tables.t, tables.b
    width = -(-t // LANES) * LANES
    of_worth = (1, 1) if overall else (t, width)
    metrics: Metrics = module.Metrics(
        inverse=np.zeros((t, width)),
        worth=np.zeros(of_worth),
        means=np.zeros((1 if overall else 2, b, width)),
        inner=np.zeros((2, b)),
        stamps=np.zeros(b + 1, dtype=np.int64),
        work=np.zeros((6, width)),
        strip=np.zeros(module.STRIP_COLUMNS * module.STRIP),
        listed=np.zeros(4 * module.STRIP, dtype=np.uint32),
        overall=overall,
        degrees=degrees,
    )
    return metrics


def _number(array: NDArray[Any]) -> NDArray[np.uint32]:
    return np.ascontiguousarray(array, dtype=np.uint32)


def _count(array: NDArray[Any]) -> NDArray[np.int32]:
    return np.ascontiguousarray(array, dtype=np.int32)
