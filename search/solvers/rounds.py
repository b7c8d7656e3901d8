"""The whole search: rounds of runs, each run with a random stream of its own.

Only between rounds is the target asked for, may the search end, and is the best plan so far looked at;
what a run does follows from the problem, its number and that plan. So the same seed leads to the same
plan, whoever works on which run, unless the clock or an interrupt cuts in.
"""

from __future__ import annotations

import math
from collections.abc import Callable, Iterable, Sequence
from dataclasses import dataclass
from enum import StrEnum

from search.efficiency.one_thread import one_thread
from search.foundation.stopping import Ended, Stop
from search.solvers.anneal import Cooling, Found, anneal, calibrated, connected, movable, scrambled
from search.solvers.board import objective, unit_of
from search.solvers.compiled import warm_up
from search.solvers.crew import Crew, Watch
from search.solvers.crossing import crossed, parts_plans, relaxed
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
CROSSING = 2
"""Of these, where rules may part the plans into islands, runs that go through broken rules."""
SHORTEST, PER_PAIR = 20_000, 10
"""Moves of a run in the first round: at least so many, and so many for every ordered pair of plots."""
GROWTH, GROWING = 1.2, 25
"""From round to round runs grow by this factor, for so many rounds."""
SPARE = 0.01
"""A limit in moves is met when this part of it is left."""
MET = 1e-9
"""A plan whose objective is this near to the target has reached it."""
CONNECTING, MOVING, CALIBRATING, CROSSING_OVER = -1, -2, -3, -4
"""Random streams of what comes before the runs."""


@dataclass(frozen=True, slots=True)
class Best:
    """The best plan so far; run -1 is that of a plan which the search was given."""

    contents: Contents
    objective: float
    run: int
    start: str


class Way(StrEnum):
    """What a run does with the plan that it starts from."""

    SCRAMBLING = "random start"
    """forget it, then anneal"""
    REHEATING = "best plan of an earlier run"
    """anneal from half as hot"""
    CROSSING = "through broken rules"
    """anneal at a price for each rule broken"""


@dataclass(frozen=True, slots=True)
class Run:
    """A run to make from a plan; `start` tells where it came from."""

    number: int
    origin: Contents
    start: str
    way: Way
    moves: int


Prover = Callable[[int, Contents], Contents | None]


def none_better(number: int, best: Contents) -> Contents | None:
    """No proof is tried."""


@dataclass(frozen=True, slots=True)
class Prepared:
    """What runs start from, and how hot.

    Parameters
    ----------
    origins : plans within the rules that runs scramble, in turn: connected, and with a legal move
    cooling : temperatures within the rules; None where there is no such plan
    shore : a connected plan from which runs through broken rules start, whether it breaks some or none;
        None where rules part no plans, or there is none
    crossing : temperatures of these
    """

    origins: tuple[Contents, ...]
    cooling: Cooling | None
    shore: Contents | None
    crossing: Cooling | None


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
        ready, best = crew.one(lambda: prepared(problem, start, kept, seed, stop, known, others))
        number = moves = 0
        while True:
            if (proposed := prover(number, best.contents)) is not None:
                best = better_of(problem, best, proposed)
            if (ended := end(problem, best, target(number), moves, stop)) is not None:
                break
            runs = runs_of(number, problem, ready, best, kept is not None, left(moves, stop))
            if not runs:
                break
            found = crew.round([job(problem, run, ready, seed, stop) for run in runs], best.objective)
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
) -> tuple[Prepared, Best]:
    """What comes before the first round: what runs start from, and the best plan that is there already."""
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
    cooling = calibrated(problem, origins[0], stream(seed, CALIBRATING), stop) if origins else None
    shore, crossing = None, None
    if parts_plans(problem.tables):
        free, random = relaxed(problem), stream(seed, CROSSING_OVER)
        shore = best.contents if math.isfinite(best.objective) else connected(free, start, random, stop)
        if shore is not None and movable(free, shore, random, stop):
            crossing = calibrated(free, shore, random, stop)
    return Prepared(origins, cooling, shore, crossing), best


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
    number: int, problem: Problem, ready: Prepared, best: Best, kept: bool, moves: float
) -> list[Run]:
    """The runs of a round; none where nothing can be searched.

    Parameters
    ----------
    number : of the round
    problem : gives the length of runs, by the plots
    ready : what runs start from
    best : the best plan so far, from which some runs start as it is
    kept : whether one does so in the first round already
    moves : moves that may still be scored; the runs share what is left
    """
    length = max(SHORTEST, PER_PAIR * problem.tables.n**2) * GROWTH ** min(number, GROWING)
    many = RUNS if moves >= RUNS * SHORTEST else max(1, int(moves // SHORTEST))
    each = math.ceil(min(length, moves / many))
    runs = []
    for i, way in zip(range(many), ways(number, ready, kept), strict=False):
        origin, start = best.contents, best.start if best.run < 0 else str(Way.REHEATING)
        if way is Way.SCRAMBLING:
            origin, start = ready.origins[(number + i) % len(ready.origins)], str(way)
        elif way is Way.CROSSING and ready.shore is not None:
            # a best plan that is not connected is none to walk from
            begun = number > 0 and math.isfinite(best.objective)
            origin, start = (best.contents if begun else ready.shore), str(way)
        runs.append(Run(number * RUNS + i, origin, start, way, each))
    return runs


def ways(number: int, ready: Prepared, kept: bool) -> list[Way]:
    """What the runs of a round do."""
    reheated = REHEATED if number > 0 else int(kept)
    crossing = CROSSING if ready.crossing is not None else 0
    if ready.cooling is None:
        return [Way.CROSSING] * (RUNS if crossing else 0)
    chosen = [Way.REHEATING] * (reheated - (reheated > 1) * crossing // 2)
    return [Way.CROSSING] * crossing + chosen + [Way.SCRAMBLING] * (RUNS - crossing - len(chosen))


def job(problem: Problem, run: Run, ready: Prepared, seed: int, stop: Stop) -> Callable[[Report], Found]:
    """The work of a run, for whoever gets to do it."""

    def work(report: Report) -> Found:
        random = stream(seed, run.number)
        if run.way is Way.CROSSING:
            assert ready.crossing is not None
            return crossed(problem, run.origin, random, run.moves, ready.crossing, stop, report)
        assert ready.cooling is not None
        if run.way is Way.REHEATING:
            return anneal(problem, run.origin, random, run.moves, ready.cooling.gentle, stop, report)
        start = scrambled(problem, run.origin, random, stop)
        return anneal(problem, start, random, run.moves, ready.cooling, stop, report)

    return work


def best_of(problem: Problem, best: Best, runs: Iterable[Run], found: Iterable[Found | None]) -> Best:
    """The best plan before the round or in it; of equal ones that of the lowest run."""
    for run, what in zip(runs, found, strict=True):
        if what is None:
            continue
        if best.objective - what.objective > ROUNDING * unit_of(problem, what.objective):
            best = Best(what.contents, what.objective, run.number, run.start)
    return best
