"""Which side of a trial is searched: its treatments, or its blocks with the two names exchanged.

To exchange u in block a for v in block c takes a from u's blocks for c, and c from v's for a: with blocks
as treatments and treatments as blocks it is an exchange too. Where replications r stay as they are, the
information on blocks is `L = K − N' R⁻¹ N`, b by b, and for a connected plan

    tr C⁺ = (t − b + tr((K − kk'/n) L⁺)) / r        where r is the same for all treatments
    log pdet C = log pdet L + Σ log r_i − Σ log k_j + log(t/b)

(`N'N` and `NN'` have the same nonzero eigenvalues; both cofactors count the spanning trees of one graph).
So where blocks are fewer than treatments theirs is the smaller side, and the kernel need not know.
"""

from __future__ import annotations

from collections.abc import Callable, Sequence
from dataclasses import dataclass, replace

import numpy as np

from search.foundation.stopping import Stop
from search.solvers.crew import Watch
from search.solvers.records import Floats, Goal, Outcome, Problem
from search.solvers.rounds import KEPT, Prover, none_better, search
from search.trial.records import Contents
from search.trial.tables import Tables, turned


@dataclass(frozen=True, slots=True, eq=False)
class Side:
    """The blocks of a trial taken for its treatments.

    Parameters
    ----------
    problem : the trial turned round
    scale, constant : the trial's objective is that of the side times the one plus the other
    """

    problem: Problem
    scale: float
    constant: float


def other_side(problem: Problem) -> Side | None:
    """The side of the blocks, where it is the smaller one and says the same.

    It does for the overall aim, and for all pairs where replications are equal; no rule may speak of pairs of
    treatments or of replicates, and blocks must be fixed.
    """
    tables = problem.tables
    plain = problem.goal is Goal.SPREAD and not problem.filler and problem.blocks_random is None
    if tables.b >= tables.t or not plain or not _turns(tables):
        return None
    t, b, n, plots = tables.t, tables.b, tables.n, tables.least
    rules = replace(
        tables,
        sizes=plots,
        fewest=plots,
        low=np.ascontiguousarray(tables.low.T),
        high=np.ascontiguousarray(tables.high.T),
        least=tables.sizes,
        most=tables.sizes,
        apart=np.zeros((b, b), dtype=np.bool_),
        meet_least=np.zeros((b, b), dtype=np.int64),
        meet_most=np.full((b, b), t, dtype=np.int64),
        group=np.full(t, -1, dtype=np.int64),
        share=np.zeros((b, 0), dtype=np.int64),
    )
    if problem.weights is None:
        known = np.log(plots).sum() - np.log(tables.sizes).sum() + np.log(t / b)
        return Side(Problem(rules, None), (b - 1) / (t - 1), -float(known) / (t - 1))
    level = _level(problem.weights)
    if level is None or plots.min() < plots.max():
        return None
    each = level / float(plots[0])
    sizes = tables.sizes.astype(np.float64)
    weights = each * (np.diag(sizes) - np.outer(sizes, sizes) / n)
    return Side(Problem(rules, weights), 1.0, each * (t - b))


def _turns(tables: Tables) -> bool:
    """Whether the rules can be told from the side of the blocks."""
    return bool(
        (tables.least == tables.most).all()
        and (tables.group < 0).all()
        and not tables.apart.any()
        and not tables.limits_meetings
    )


def _level(weights: Floats) -> float | None:
    """The c of `W = c (I − J/t)`, or None if W is another matrix."""
    t = len(weights)
    level = float(weights[0, 0]) / (1 - 1 / t)
    for i, row in enumerate(weights):  # row by row: the matrix may be large
        if abs(row[i] - level * (1 - 1 / t)) > 1e-12 * level:
            return None
        if np.abs(np.delete(row, i) + level / t).max() > 1e-12 * level:
            return None
    return level


def search_smaller_side(
    problem: Problem,
    start: Contents,
    *,
    kept: Contents | None,
    target: Callable[[int], float],
    stop: Stop,
    seed: int,
    workers: int,
    watch: Watch,
    known: str = KEPT,
    others: Sequence[Contents] = (),
    prover: Prover = none_better,
) -> Outcome:
    """Search the best plan for a problem on the side of it that is smaller; see `rounds.search`."""
    side = other_side(problem)
    if side is None:
        return search(
            problem, start, kept=kept, target=target, stop=stop, seed=seed, workers=workers, watch=watch,
            known=known, others=others, prover=prover,
        )  # fmt: skip
    t, b, scale, constant = problem.tables.t, problem.tables.b, side.scale, side.constant

    def proved(number: int, best: Contents) -> Contents | None:
        better = prover(number, turned(best, b))
        return None if better is None else turned(better, t)

    outcome = search(
        side.problem,
        turned(start, t),
        kept=None if kept is None else turned(kept, t),
        target=lambda number: (target(number) - constant) / scale,
        stop=stop,
        seed=seed,
        workers=workers,
        watch=lambda value, moves, seconds: watch(scale * value + constant, moves, seconds),
        known=known,
        others=[turned(other, t) for other in others],
        prover=proved,
    )
    return replace(
        outcome,
        contents=turned(outcome.contents, b),
        objective=scale * outcome.objective + constant,
    )
