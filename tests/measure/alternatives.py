"""What would a user take instead? The same 12 trials, the same first plan, the same seconds, one worker.

    python -m tests.measure.alternatives results/alternatives.csv [seconds]

* CP-SAT (ortools): all rules as constraints, the least sum of squared meetings as the objective, the first
  plan as a hint; of all its solutions the one with the best A counts. Writing the model down counts too.
* `scipy.optimize.dual_annealing`: a key for each plot, whose order deals out the treatments of the first
  plan; broken rules are a penalty.
* A plain numpy loop: two random plots exchanged, C and its eigenvalues computed anew, kept unless worse.

Seconds are those of the processor for this process, so that other work on the machine disturbs nobody's
share. "none" means that a method came by no plan. Rows that are in the file already are kept.
"""

from __future__ import annotations

import random
import sys
import threading
import time
from collections.abc import Callable, Iterator
from contextlib import contextmanager, suppress

import numpy as np

from search.efficiency.one_thread import one_thread
from search.efficiency.reference import reference_variance
from search.foundation.stopping import Limits, Stop
from search.solvers.board import objective
from search.solvers.compiled import warm_up
from search.solvers.crossing import breaches
from search.solvers.feasibility import _model
from search.solvers.records import Problem
from search.solvers.rounds import search
from search.solvers.start import feasible_start, further_starts
from search.trial.checker import broken_rules
from search.trial.limits import limits
from search.trial.records import Contents, Trial
from search.trial.tables import contents_of, incidence
from tests.efficiency.plans import equal_trial
from tests.measure.constrained_bounds import drawn
from tests.measure.rows import Rows
from tests.ruled import ruled
from tests.solvers.problems import problem_of

SECONDS = 5.0
PLAIN = [(12, 15, 4), (20, 28, 5), (30, 30, 5), (50, 50, 6), (100, 60, 10), (200, 100, 6)]
FIXED, RULED = (0, 5, 29), (1, 13, 27)
COLUMNS = [
    "trial",
    "treatments",
    "blocks",
    "plots",
    "first plan",
    "evenfield",
    "cp-sat",
    "dual annealing",
    "numpy",
]

Solver = Callable[[Trial, Problem, Contents, float], Contents | None]


def trials() -> Iterator[tuple[str, Trial]]:
    """Six trials without rules, from small to 200 treatments, and six with them."""
    for t, b, k in PLAIN:
        yield f"plain {t} {b} {k}", equal_trial(t, b, k)
    for seed in FIXED:
        yield f"drawn {seed}", drawn(seed)
    for seed in RULED:
        yield f"ruled {seed}", ruled(seed)


@contextmanager
def after(seconds: float, act: Callable[[], None]) -> Iterator[None]:
    """Do something, from when this process has worked so many seconds until what is in here ends."""
    end, over = time.process_time() + seconds, threading.Event()

    def watch() -> None:
        while not over.wait(0.02):
            if time.process_time() >= end:
                act()  # and again, in case it was not begun yet

    thread = threading.Thread(target=watch)
    thread.start()
    try:
        yield
    finally:
        over.set()
        thread.join()


def by_evenfield(trial: Trial, problem: Problem, first: Contents, seconds: float) -> Contents:
    """The search of this project, without designs to start from and without bounds."""
    stop = Stop(Limits())
    with after(seconds, stop.interrupt):
        return search(
            problem,
            first,
            kept=None,
            target=lambda _: -np.inf,
            stop=stop,
            seed=1,
            workers=1,
            watch=lambda *_: None,
            others=further_starts(trial, problem.tables, limits(trial), seed=1),
        ).contents


def by_cp_sat(trial: Trial, problem: Problem, first: Contents, seconds: float) -> Contents | None:
    """Near-balance by constraint programming; None where no solution came in time."""
    from ortools.sat.python import cp_model

    began = time.process_time()
    tables, best = problem.tables, _Best(problem)
    model, x = _model(tables, limits(trial))
    squares = []
    for i in range(tables.t):
        for j in range(i):
            if time.process_time() - began > seconds:
                return None  # the model alone takes longer
            both = []
            for a, c in zip(x[i], x[j], strict=True):
                meet = model.new_bool_var("")
                model.add(meet >= a + c - 1)
                both.append(meet)
            met, square = (model.new_int_var(0, top, "") for top in (tables.b, tables.b**2))
            model.add(met == sum(both))
            model.add_multiplication_equality(square, [met, met])
            squares.append(square)
    model.minimize(sum(squares))
    for line, counts in zip(x, incidence(first, tables.t).tolist(), strict=True):
        for variable, count in zip(line, counts, strict=True):
            model.add_hint(variable, count)

    class Look(cp_model.CpSolverSolutionCallback):
        def on_solution_callback(self) -> None:
            best.offer(contents_of(np.array([[self.value(v) for v in line] for line in x])))

    solver = cp_model.CpSolver()
    solver.parameters.num_workers = 1
    with after(seconds - (time.process_time() - began), solver.stop_search):
        solver.solve(model, Look())
    return best.contents


class TimeUp(Exception):
    """The seconds are over."""


class _Best:
    """The best plan within the rules that a method came by, and when its time is over."""

    def __init__(self, problem: Problem, seconds: float = np.inf) -> None:
        self.problem, self.contents, self.value = problem, None, np.inf
        self.end = time.process_time() + seconds

    contents: Contents | None

    def offer(self, contents: Contents) -> float:
        """The objective of a plan, with a penalty for broken rules."""
        if time.process_time() >= self.end:
            raise TimeUp
        broken = breaches(self.problem.tables, contents) + self._out_of_replicates(contents)
        value = objective(self.problem, contents)
        value = value if np.isfinite(value) else 100.0
        if not broken and value < self.value:
            self.contents, self.value = contents, value
        return value + broken

    def _out_of_replicates(self, contents: Contents) -> int:
        tables = self.problem.tables
        counts = incidence(contents, tables.t)
        return sum(
            int(np.abs(counts[:, tables.group == g].sum(axis=1) - share).sum())
            for g, share in enumerate(tables.share.T)
        )


def _dealt(planted: np.ndarray, sizes: np.ndarray) -> Contents:
    ends = np.cumsum(sizes)
    return tuple(tuple(sorted(planted[end - k : end].tolist())) for end, k in zip(ends, sizes, strict=True))


def by_dual_annealing(trial: Trial, problem: Problem, first: Contents, seconds: float) -> Contents | None:
    """Random keys and a general annealer."""
    from scipy.optimize import dual_annealing

    planted, best = np.concatenate(first), _Best(problem, seconds)
    keys = (np.arange(len(planted)) + 0.5) / len(planted)
    with suppress(TimeUp):
        dual_annealing(
            lambda x: best.offer(_dealt(planted[np.argsort(x, kind="stable")], problem.tables.sizes)),
            [(0.0, 1.0)] * len(planted),
            maxiter=10**9,
            maxfun=10**12,
            no_local_search=True,
            x0=keys,
            rng=1,
        )
    return best.contents


def by_numpy(trial: Trial, problem: Problem, first: Contents, seconds: float) -> Contents | None:
    """Exchanges that do not make the plan worse."""
    draw, best = random.Random(1), _Best(problem, seconds)
    planted = np.concatenate(first)
    home = np.repeat(np.arange(len(first)), problem.tables.sizes)
    try:
        now = best.offer(first)
        while True:
            p, q = draw.sample(range(len(planted)), 2)
            if home[p] == home[q] or planted[p] == planted[q]:
                continue
            planted[[p, q]] = planted[[q, p]]
            value = best.offer(_dealt(planted, problem.tables.sizes))
            if value <= now:
                now = value
            else:
                planted[[p, q]] = planted[[q, p]]
    except TimeUp:
        return best.contents


METHODS: tuple[Solver, ...] = (by_evenfield, by_cp_sat, by_dual_annealing, by_numpy)


def main(out: str, seconds: str = str(SECONDS)) -> None:
    """Write one row for each trial; then say how far the others are behind."""
    rows = Rows(out, COLUMNS, 1)
    warm_up()
    with one_thread():
        for name, trial in trials():
            if (name,) in rows:
                continue
            problem, implied = problem_of(trial), limits(trial)
            first, _ = feasible_start(trial, problem.tables, implied, seed=1, seconds=60)
            plans = [first, *(method(trial, problem, first, float(seconds)) for method in METHODS)]
            reference = float(reference_variance(trial))
            told = ["none" if p is None else f"{reference / objective(problem, p):.6f}" for p in plans]
            rules = [broken_rules(trial, plan) for plan in plans if plan is not None]
            assert not any(rules), rules
            rows.add([name, trial.t, trial.b, trial.n, *told])
    for method in COLUMNS[6:]:
        behind = [
            100 * (1 - float(row[method]) / float(row["evenfield"]))
            for row in rows.all()
            if row[method] != "none"
        ]
        span = f"{min(behind):.3f}% to {max(behind):.3f}%"
        print(f"{method}: a plan on {len(behind)} of 12 trials, behind by {span}")


if __name__ == "__main__":
    main(*sys.argv[1:])
