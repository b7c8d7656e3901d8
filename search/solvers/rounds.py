"""The whole search: rounds of runs, each run with a random stream of its own.

Only between rounds is the target asked for, may the search end, and is the best plan so far looked at;
what a run does follows from the problem, its number and that plan. So the same seed leads to the same
plan, whoever works on which run, unless the clock or an interrupt cuts in.
"""

from __future__ import annotations

import math
from collections.abc import Callable, Iterable, Sequence
from dataclasses import dataclass

from search.efficiency.one_thread import one_thread
from search.foundation.stopping import Ended, Stop
from search.solvers.anneal import Cooling, Found, anneal, calibrated, connected, movable, scrambled
from search.solvers.board import objective, unit_of
from search.solvers.compiled import warm_up
from search.solvers.crew import Crew, Watch
from search.solvers.records import PROVER, Outcome, Problem
from search.solvers.streams import stream
from search.solvers.walk import ROUNDING, Report
from search.trial.records import Contents

__all__ = [
    "Best",
    "Outcome",
    "Problem",
    "Run",
    "best_of",
    "end",
    "job",
    "left",
    "prepared",
    "runs_of",
    "search",
]

KEPT = "kept plan"

RUNS = 6
"""Runs of a round: one, two or three workers share them evenly."""
REHEATED = 4
"""Of these, from the second round on, runs that start from the best plan so far."""
SHORTEST, PER_PAIR = 20_000, 10
"""Moves of a run in the first round: at least so many, and so many for every ordered pair of plots."""
GROWTH, GROWING = 1.2, 25
"""From round to round runs grow by this factor, for so many rounds."""
SPARE = 0.01
"""A limit in moves is met when this part of it is left."""
MET = 1e-9
"""A plan whose objective is this near to the target has reached it."""
CONNECTING, MOVING, CALIBRATING = -1, -2, -3
"""Random streams of what comes before the runs."""


@dataclass(frozen=True, slots=True)
class Best:
    """The best plan so far; run -1 is that of a plan which the search was given."""

    contents: Contents
    objective: float
    run: int
    start: str


@dataclass(frozen=True, slots=True)
class Run:
    """A run to make: gently from a plan as it is, or from what scrambling makes of it."""

    number: int
    origin: Contents
    start: str
    gently: bool
    moves: int


Prover = Callable[[int, Contents], Contents | None]


def none_better(number: int, best: Contents) -> Contents | None:
    """No proof is tried."""


def search(
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
    """Search the best plan for a problem.

    Parameters
    ----------
    problem : rules and aim
    start : a plan within the rules
    kept : a good plan within the rules, of an earlier search mostly: the outcome is never worse
    target : called with the number of each round before it; an objective that reaches it ends the search
    stop : limits in seconds and in moves, and interrupts
    seed : any whole number; the same one gives the same plan with any number of workers
    workers : threads
    watch : told the best objective, the moves scored and the seconds gone, a few times a second
    known : where the kept plan comes from, in words
    prover : called like `target`, before it, with the best plan so far; may hand back a better one
    others : more plans within the rules; runs start from them in turn, for rules can part the plans into
        islands that no legal move joins

    Returns
    -------
    Outcome : of equal plans that of the lowest run; with an infinite objective where the start is
        disconnected and no way of legal moves to a connected plan was found
    """
    warm_up(problem.goal)
    with one_thread(), Crew(workers, stop, watch) as crew:
        origins, best, cooling = crew.one(lambda: prepared(problem, start, kept, seed, stop, known, others))
        number = moves = 0
        while True:
            if (proposed := prover(number, best.contents)) is not None:
                best = better_of(problem, best, proposed)
            if (ended := end(problem, best, target(number), moves, stop)) is not None or cooling is None:
                break
            runs = runs_of(number, problem, origins, best, kept is not None, left(moves, stop))
            found = crew.round([job(problem, run, cooling, seed, stop) for run in runs], best.objective)
            best = best_of(problem, best, runs, found)
            moves += sum(what.moves for what in found if what is not None)
            number += 1
    return Outcome(
        contents=best.contents,
        objective=best.objective,
        moves=moves,
        seconds=stop.elapsed,
        ended=ended or Ended.MOVES,
        run=best.run,
        start=best.start,
    )


def better_of(problem: Problem, best: Best, proposed: Contents) -> Best:
    """The best plan so far, or the one that was handed back by a proof where it is better."""
    value = objective(problem, proposed)
    return Best(proposed, value, -1, PROVER) if value < best.objective else best


def prepared(
    problem: Problem,
    start: Contents,
    kept: Contents | None,
    seed: int,
    stop: Stop,
    known: str = KEPT,
    others: Sequence[Contents] = (),
) -> tuple[tuple[Contents, ...], Best, Cooling | None]:
    """What comes before the first round.

    Returns
    -------
    origins : what runs scramble, in turn: the start, connected where that is in reach, and the others
        that are connected; of all these those that have a legal move
    best : the best of them and the kept plan
    cooling : the temperatures of all runs; None where nothing can be searched, since no connected plan or
        no legal move was found
    """
    origin = connected(problem, start, stream(seed, CONNECTING), stop) or kept or start
    best = Best(origin, objective(problem, origin), -1, "first plan")
    if kept is not None and (of_kept := objective(problem, kept)) <= best.objective:
        best = Best(kept, of_kept, -1, known)
    connected_others = [other for other in others if math.isfinite(objective(problem, other))]
    for other in connected_others:
        if (of_other := objective(problem, other)) < best.objective:
            best = Best(other, of_other, -1, "first plan")
    plans = [origin, *connected_others] if math.isfinite(objective(problem, origin)) else connected_others
    origins = tuple(plan for plan in plans if movable(problem, plan, stream(seed, MOVING), stop))
    if not origins:
        return origins, best, None
    return origins, best, calibrated(problem, origins[0], stream(seed, CALIBRATING), stop)


def end(problem: Problem, best: Best, target: float, moves: int, stop: Stop) -> Ended | None:
    """Whether the search ends before the next round, and why."""
    slack = MET * unit_of(problem, target) if math.isfinite(target) else 0.0
    if best.objective <= target + slack:
        return Ended.BOUND_MET
    if stop.interrupted:
        return Ended.INTERRUPTED
    if stop.out_of_time:
        return Ended.SECONDS
    return Ended.MOVES if left(moves, stop) == 0 else None


def left(moves: int, stop: Stop) -> float:
    """The moves that may still be scored; none where next to nothing of a limit is left."""
    limit = stop.limits.moves
    if limit is None:
        return math.inf
    return limit - moves if limit - moves > SPARE * limit else 0


def runs_of(
    number: int, problem: Problem, origins: Sequence[Contents], best: Best, kept: bool, moves: float
) -> list[Run]:
    """The runs of a round.

    Parameters
    ----------
    number : of the round
    problem : gives the length of runs, by the plots
    origins : what runs scramble, in turn
    best : the best plan so far, from which some runs start as it is
    kept : whether one does so in the first round already
    moves : moves that may still be scored; the runs share what is left
    """
    length = max(SHORTEST, PER_PAIR * problem.tables.n**2) * GROWTH ** min(number, GROWING)
    many = RUNS if moves >= RUNS * SHORTEST else max(1, int(moves // SHORTEST))
    each = math.ceil(min(length, moves / many))
    reheated = REHEATED if number > 0 else int(kept)
    known = best.start if best.run < 0 else "best plan of an earlier run"
    return [
        Run(number * RUNS + i, best.contents, known, True, each)
        if i < reheated
        else Run(number * RUNS + i, origins[(number + i) % len(origins)], "random start", False, each)
        for i in range(many)
    ]


def job(problem: Problem, run: Run, cooling: Cooling, seed: int, stop: Stop) -> Callable[[Report], Found]:
    """The work of a run, for whoever gets to do it."""

    def work(report: Report) -> Found:
        random = stream(seed, run.number)
        if run.gently:
            return anneal(problem, run.origin, random, run.moves, cooling.gentle, stop, report)
        start = scrambled(problem, run.origin, random, stop)
        return anneal(problem, start, random, run.moves, cooling, stop, report)

    return work


def best_of(problem: Problem, best: Best, runs: Iterable[Run], found: Iterable[Found | None]) -> Best:
    """The best plan before the round or in it; of equal ones that of the lowest run."""
    for run, what in zip(runs, found, strict=True):
        if what is None:
            continue
        if best.objective - what.objective > ROUNDING * unit_of(problem, what.objective):
            best = Best(what.contents, what.objective, run.number, run.start)
    return best
