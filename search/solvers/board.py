"""The kernel's board: from a trial's tables and block contents to its arrays, and back, in plain numpy."""

from __future__ import annotations

from typing import TYPE_CHECKING, Any, NamedTuple

import numpy as np
from numpy.typing import NDArray

from search.efficiency.evaluator import components, information_matrix, log_pseudo_determinant, pseudo_inverse
from search.efficiency.one_thread import one_thread
from search.solvers.compiled import kernel
from search.solvers.records import Problem
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
    """The aim's objective from scratch: `tr(W C⁺)`, or `−log pdet(C)/(t−1)`; inf if disconnected."""
    t = problem.tables.t
    if components(contents, t) > 1:
        return float("inf")
    information = information_matrix(contents, t)
    if problem.weights is None:
        return -log_pseudo_determinant(information) / (t - 1)
    return float((problem.weights * pseudo_inverse(information)).sum())


def unit_of(problem: Problem, value: float) -> float:
    """What tolerances of an objective are parts of: a trace is measured by its own size, a logarithm by 1."""
    return 1.0 if problem.weights is None else abs(value)


def board_of(problem: Problem, contents: Contents) -> Board:
    """A board with a plan on it; the tables of its metrics wait for `refresh`."""
    tables = problem.tables
    beds = _beds(tables)
    return Board(
        beds=beds,
        admitted=_admitted(tables),
        planting=_planting(tables, beds, contents),
        metrics=_metrics(tables, overall=problem.weights is None),
    )


def contents_on(board: Board) -> Contents:
    """Block contents of the plan on a board."""
    return contents_of(board.planting.copies.T.astype(np.int64))


def refresh(problem: Problem, board: Board) -> None:
    """Compute the tables of a connected plan from scratch."""
    t = problem.tables.t
    information = information_matrix(contents_on(board), t)
    with one_thread():
        inverse = np.linalg.inv(information + 1 / t)
        board.metrics.inverse[:, :t] = inverse
        if problem.weights is not None:
            board.metrics.worth[:, :t] = inverse @ problem.weights @ inverse
    board.metrics.stamps[:] = -1
    board.metrics.stamps[-1] = 0


def _beds(tables: Tables) -> Beds:
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
        home=_number(home), blocks=blocks, share=1.0 / tables.sizes, loose=_number(loose)
    )
    return beds


def _admitted(tables: Tables) -> Admitted:
    many = tables.t if tables.limits_meetings else 0  # nobody asks for them
    admitted: Admitted = kernel().Admitted(
        plots=_count(np.stack([tables.least, tables.most])),
        copies=_count(np.stack([tables.low.T, tables.high.T])),
        meetings=_count(np.stack([tables.meet_least, tables.meet_most])[:, :many, :many]),
        apart=_count(tables.apart),
        any_apart=bool(tables.apart.any()),
        any_meetings=tables.limits_meetings,
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


def _metrics(tables: Tables, *, overall: bool) -> Metrics:
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
        degrees=t - 1.0,
    )
    return metrics


def _number(array: NDArray[Any]) -> NDArray[np.uint32]:
    return np.ascontiguousarray(array, dtype=np.uint32)


def _count(array: NDArray[Any]) -> NDArray[np.int32]:
    return np.ascontiguousarray(array, dtype=np.int32)
