"""Can the rules be met at all? The hard CP-SAT model of a trial."""

from __future__ import annotations

from typing import TYPE_CHECKING

import numpy as np

from search.foundation.cpsat import Answer, solve
from search.foundation.errors import Impossible, Undecided
from search.foundation.stopping import Stop
from search.trial.limits import Limits, cliques
from search.trial.records import Contents
from search.trial.tables import Ints, Tables, contents_of

if TYPE_CHECKING:
    from ortools.sat.python.cp_model import CpModel, IntVar

MOST_MEETING_VARIABLES = 2_000_000
MEETING_VARIABLES_A_SECOND = 25_000
"""So many are written down within a second: a model that takes longer than it may be solved is not begun."""


def decide(
    tables: Tables,
    limits: Limits,
    *,
    seed: int,
    seconds: float,
    effort: float | None = None,
    stop: Stop | None = None,
) -> Contents:
    """A plan within the rules; where plots may stay filler, one with as few of them as was found.

    Parameters
    ----------
    tables : rules with the implied replication
    limits : the implied limits, given to the solver as redundant counts
    seed, seconds, effort, stop : see `search.foundation.cpsat.solve`

    Raises
    ------
    Impossible : infeasible, confirmed with a second seed
    Undecided : not decided in the time
    """
    pairs = len(_limited_pairs(tables))
    if pairs * tables.b > min(MOST_MEETING_VARIABLES, MEETING_VARIABLES_A_SECOND * seconds):
        raise Undecided(
            f"{pairs:,} limited pairs in {tables.b} blocks are too many for the rule solver in {seconds:g} s"
        )
    model, variables = _model(tables, limits)
    flat = [v for row in variables for v in row]
    solved = solve(model, flat, seconds=seconds, effort=effort, seed=seed, stop=stop)
    if solved.answer is Answer.INFEASIBLE:
        raise Impossible(
            ["the rules together leave no plan, though each count by itself can be met"],
            "the rule solver, with two seeds",
        )
    if solved.answer is Answer.UNKNOWN:
        raise Undecided(
            f"whether the rules can be met was not decided within {seconds:g} s: allow more with --seconds"
        )
    return contents_of(np.array(solved.values, dtype=np.int64).reshape(tables.t, tables.b))


def _model(tables: Tables, limits: Limits) -> tuple[CpModel, list[list[IntVar]]]:
    from ortools.sat.python import cp_model

    model = cp_model.CpModel()
    t, b = tables.t, tables.b
    x = [
        [model.new_int_var(int(tables.low[i, j]), int(tables.high[i, j]), "") for j in range(b)]
        for i in range(t)
    ]
    fewest, fullest = tables.sizes, tables.sizes
    if not tables.exact:
        fewest, fullest = limits.fewest, limits.fullest
        planted = sum(v for row in x for v in row)
        model.add_linear_constraint(planted, *limits.planted)
        model.maximize(planted)
    for j in range(b):
        model.add_linear_constraint(sum(x[i][j] for i in range(t)), int(fewest[j]), int(fullest[j]))
    for i in range(t):
        model.add_linear_constraint(sum(x[i]), int(tables.least[i]), int(tables.most[i]))
        for g in range(tables.share.shape[1]):
            inside = np.flatnonzero(tables.group == g)
            model.add(sum(x[i][j] for j in inside) == int(tables.share[i, g]))
    for s in limits.sums:
        model.add(sum(v for i in s.treatments for v in x[i]) <= s.most)
    present = _presence(model, tables, x)
    for members in cliques(tables.apart):
        for j in range(b):
            model.add_at_most_one(present[i][j] for i in members)
    _add_meetings(model, tables, present)
    return model, x


def _presence(model: CpModel, tables: Tables, x: list[list[IntVar]]) -> list[list[IntVar]]:
    """Whether a treatment stands in a block; the count itself where it cannot stand there twice."""
    present = []
    for i, row in enumerate(x):
        line = []
        for j, count in enumerate(row):
            if tables.high[i, j] <= 1:
                line.append(count)
                continue
            stands = model.new_bool_var("")
            model.add(count >= stands)
            model.add(count <= int(tables.high[i, j]) * stands)
            line.append(stands)
        present.append(line)
    return present


def _limited_pairs(tables: Tables) -> Ints:
    limited = (tables.meet_least > 0) | ((tables.meet_most < tables.b) & ~tables.apart)
    return np.argwhere(np.triu(limited, 1))


def _add_meetings(model: CpModel, tables: Tables, present: list[list[IntVar]]) -> None:
    shared: dict[tuple[int, int], list[IntVar]] = {}
    for i, j in _limited_pairs(tables):
        line = []
        for block in range(tables.b):
            both = model.new_bool_var("")
            model.add_implication(both, present[i][block])
            model.add_implication(both, present[j][block])
            model.add_bool_or(both, present[i][block].negated(), present[j][block].negated())
            line.append(both)
        shared[int(i), int(j)] = line
        model.add_linear_constraint(sum(line), int(tables.meet_least[i, j]), int(tables.meet_most[i, j]))
    if len(shared) == tables.t * (tables.t - 1) // 2 and (tables.high <= 1).all() and tables.exact:
        # Redundant, and what makes dense limits decidable: a treatment meets k − 1 others in a block.
        for i in range(tables.t):
            for block in range(tables.b):
                meets = sum(shared[min(i, j), max(i, j)][block] for j in range(tables.t) if j != i)
                model.add(meets == int(tables.sizes[block] - 1) * present[i][block])
