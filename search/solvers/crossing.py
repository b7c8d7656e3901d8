"""Ways across broken rules: from one island of plans to another, and from a broken plan to a whole one.

Rules can part the plans into islands that no single legal exchange or replacement joins. Here a move may
break rules, at a price for each breach, and later moves mend them: a chain of exchanges, two treatments
exchanged in two replicates at once, and whatever else is on the way between two plans that obey the rules.
Only block sizes and replicates hold throughout, and exchanges and replacements join any two such plans.
"""

from __future__ import annotations

import math
from dataclasses import replace

import numpy as np

from search.foundation.stopping import Stop
from search.solvers.anneal import Cooling, Found, Stream
from search.solvers.board import board_of, contents_on, objective
from search.solvers.compiled import kernel
from search.solvers.records import Goal, Problem
from search.solvers.walk import Report, Walk, quiet
from search.solvers.walks import walk_from
from search.trial.records import Contents
from search.trial.tables import Tables, incidence

PRICE = 2.0
"""A breach costs so many times the first temperature: few are there at once, and none when it is cold."""
MENDING = (0.15, 0.3, 0.6)
"""Temperatures of mending in turn, in breaches: a large plan settles at the first, a tiny one must leave
deep pits."""
MENDING_CALLS, MENDING_DRAWS = 18, 200_000
"""Calls of the kernel that mending may take, and moves drawn in each: 0.2 s in all on a slow processor."""
LEG, PER_PAIR, MOST_LEGS = 2_000, 10, 10
"""Scored moves of the shortest annealing worth its while, at least and for every ordered pair of plots; in
tiny trials a run is several of these, at most so many."""
DESCENT = 5
"""One move in so many of a run is left for its descent within the rules."""


def parts_plans(tables: Tables) -> bool:
    """Whether the rules may part the plans into islands.

    Sizes of blocks, replicates and ranges of plots alone do not: plans with the same counts are joined by
    exchanges (Ryser 1957).
    """
    uneven = (tables.high != tables.high.max(axis=0)).any() or (tables.low != tables.low.min(axis=0)).any()
    return bool(uneven or tables.apart.any() or tables.limits_meetings)


def relaxed(problem: Problem) -> Problem:
    """The problem without any rule but sizes of blocks and replicates, for the objective of such ways."""
    tables = problem.tables
    t, b = tables.t, tables.b
    loose = tables.least < tables.most  # the others keep their plots on every way, see the kernel
    return replace(
        problem,
        goal=Goal.SPREAD,  # what `Walk.cross` makes small, and so the unit of its temperatures
        tables=replace(
            tables,
            low=np.zeros_like(tables.low),
            high=np.ones_like(tables.high) * tables.sizes,
            least=np.where(loose, np.minimum(tables.least, 1), tables.least),
            most=np.where(loose, tables.n, tables.most),
            apart=np.zeros_like(tables.apart),
            meet_least=np.zeros((t, t), dtype=np.int64),
            meet_most=np.full((t, t), b),
        ),
    )


def breaches(tables: Tables, contents: Contents) -> int:
    """How far a plan is outside the rules, counted from scratch.

    Plots too many or too few, in a block or in all; pairs of plots of a block whose treatments never meet;
    meetings too many or too few.
    """
    counts = incidence(contents, tables.t)
    plots = counts.sum(axis=1)
    total = _outside(counts, tables.low, tables.high) + _outside(plots, tables.least, tables.most)
    together = counts @ counts.T
    total += int(together[np.triu(tables.apart)].sum())
    if tables.limits_meetings:
        present = (counts > 0).astype(np.int64)
        shared = present @ present.T
        total += _outside(*(np.triu(x, 1) for x in (shared, tables.meet_least, tables.meet_most)))
    return total


def _outside(counts: np.ndarray, least: np.ndarray, most: np.ndarray) -> int:
    return int((np.maximum(counts - most, 0) + np.maximum(least - counts, 0)).sum())


def mended(problem: Problem, contents: Contents, random: Stream, stop: Stop) -> Contents | None:
    """A plan within the rules near to one that breaks some, or None if none was found."""
    board = board_of(problem, contents)
    left = breaches(problem.tables, contents)
    for call in range(MENDING_CALLS):
        temperature = MENDING[call % len(MENDING)]
        left, _ = kernel().mend(board.plain, random, temperature, left, MENDING_DRAWS)
        if left == 0:
            return contents_on(board)
        if stop.due:
            break
    return None


def crossed(
    problem: Problem,
    start: Contents,
    random: Stream,
    moves: int,
    cooling: Cooling,
    stop: Stop,
    report: Report = quiet,
) -> Found:
    """Improve a connected plan by annealing through broken rules, then mend it and descend within the rules.

    Parameters
    ----------
    problem : rules and aim
    start : a connected plan that may break rules, but for block sizes and replicates
    random : random stream of the run
    moves : moves to score, but for the last scan of the descent
    cooling : temperatures
    stop : cuts the run short
    report : told of moves scored, call by call

    Returns
    -------
    Found : the objective is infinite where the plan could not be mended
    """
    shortest = max(LEG, PER_PAIR * problem.tables.n**2)
    legs = min(MOST_LEGS, max(1, moves // shortest))
    best = Found(start, math.inf, 0)
    for _ in range(legs):
        leg = _leg(problem, start, random, moves // legs, cooling, stop, report)
        scored = best.moves + leg.moves
        best = replace(leg if leg.objective < best.objective else best, moves=scored)
        if stop.due:
            break
    return best


def _leg(
    problem: Problem,
    start: Contents,
    random: Stream,
    moves: int,
    cooling: Cooling,
    stop: Stop,
    report: Report,
) -> Found:
    """One cooling, mended, and its descent."""
    walk = Walk(problem, start, random, stop, report)
    price, descent = PRICE * cooling.hot, moves // DESCENT
    walk.cross(cooling.hot, cooling.cold, price, breaches(problem.tables, start), moves - descent)
    contents = mended(problem, walk.contents, random, stop)
    if contents is None or not math.isfinite(objective(problem, contents)):
        return Found(start, math.inf, walk.moves)
    rest = walk_from(problem, contents, random, stop, report)
    rest.descend(descent)
    return Found(rest.contents, objective(problem, rest.contents), walk.moves + rest.moves)
