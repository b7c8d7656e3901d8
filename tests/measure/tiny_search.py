"""Is the best of all plans found where all can be looked at? Tiny trials with rules, drawn from seeds.

    nice python -m tests.measure.tiny_search [trials] [moves] [first]

Rules can part the plans into islands that no single legal exchange joins: then a search that only makes legal
moves finds the best plan of the island where it began.
"""

from __future__ import annotations

import sys
from collections.abc import Iterator
from dataclasses import replace

import numpy as np

from search.foundation.stopping import Limits, Stop
from search.solvers.board import objective
from search.solvers.records import Outcome, Problem
from search.solvers.rounds import search
from search.solvers.start import feasible_start, further_starts
from search.trial.limits import limits
from search.trial.records import Contents, Trial
from search.trial.tables import incidence
from tests.drawn import plans_within
from tests.ruled import ruled
from tests.solvers.problems import problem_of

MOST_PLANS = 3_000
NEAR = 1e-9


def solved(trial: Trial, moves: int, seed: int = 1, workers: int = 1) -> tuple[Problem, Outcome]:
    """The problem of a trial and the outcome of its search, begun as the conductor does, without designs."""
    implied = limits(trial)
    problem = problem_of(trial)
    start, _ = feasible_start(trial, problem.tables, implied, seed=seed, seconds=60)
    outcome = search(
        problem,
        start,
        kept=None,
        target=lambda _: -np.inf,
        stop=Stop(Limits(None, moves)),
        seed=seed,
        workers=workers,
        watch=lambda *_: None,
        others=further_starts(trial, problem.tables, implied, seed=seed),
    )
    return problem, outcome


def missed(trial: Trial, plans: list[Contents], moves: int) -> float:
    """By what part the search's plan is worse than the best of all; 0 for one as good."""
    problem, outcome = solved(trial, moves)
    best = best_objective(problem, plans)
    if outcome.objective == best:  # both infinite, where no plan is connected
        return 0.0
    behind = outcome.objective / best - 1
    return behind if behind > NEAR else 0.0


def best_objective(problem: Problem, plans: list[Contents]) -> float:
    """The best objective of all plans, for all pairs: the eigenvalues of all of them at once tell which."""
    t = problem.tables.t
    counts = np.array([incidence(plan, t) for plan in plans], dtype=float)
    scaled = counts / np.sqrt(problem.tables.sizes)
    information = counts.sum(axis=2)[:, :, None] * np.eye(t) - scaled @ scaled.transpose(0, 2, 1)
    values = np.linalg.eigvalsh(information)[:, 1:]
    connected = values[:, 0] > NEAR
    if not connected.any():
        return np.inf
    sums = np.where(connected, (1 / np.where(values > NEAR, values, 1.0)).sum(axis=1), np.inf)
    return objective(problem, plans[int(sums.argmin())])


def small_trials(first: int = 0) -> Iterator[tuple[int, Trial, list[Contents]]]:
    """Tiny trials from a seed on, with all their plans: two at least, and not too many to look at."""
    seed = first
    while True:
        trial = ruled(seed, small=True)
        plans = plans_within(trial, MOST_PLANS)
        if plans is not None and len(plans) > 1:
            yield seed, replace(trial, name=f"small {seed}"), plans
        seed += 1


def main(trials: str = "400", moves: str = "200000", first: str = "0") -> None:
    """Tell every trial whose best plan was missed, and how many there were."""
    failures, looked, seen = 0, 0, 0
    for seed, trial, plans in small_trials(int(first)):
        if looked == int(trials):
            break
        looked += 1
        seen += len(plans)
        behind = missed(trial, plans, int(moves))
        if behind:
            failures += 1
            print(f"seed {seed}: {behind:.2%} behind the best of {len(plans):,} plans", flush=True)
    print(f"{looked} trials, {seen:,} plans: the best one missed in {failures}")


if __name__ == "__main__":
    main(*sys.argv[1:])
