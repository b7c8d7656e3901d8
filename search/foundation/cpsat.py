"""The one guarded call to CP-SAT.

One worker and default presolve, because wrong "infeasible" answers were reported against the solver
for many workers without presolve. "Infeasible" is believed only when a second seed agrees; a solution
is never believed here at all: whoever asks checks it against the rules.
"""

from __future__ import annotations

import threading
from collections.abc import Sequence
from dataclasses import dataclass
from enum import Enum
from typing import TYPE_CHECKING

from search.foundation.stopping import Stop

if TYPE_CHECKING:
    from ortools.sat.python.cp_model import CpModel, CpSolver, CpSolverStatus, IntVar


class Answer(Enum):
    """What the solver says about a model."""

    SOLUTION = "solution"
    INFEASIBLE = "infeasible"
    UNKNOWN = "unknown"


@dataclass(frozen=True, slots=True)
class Solved:
    """An answer, and for a solution the value of each variable asked for."""

    answer: Answer
    values: tuple[int, ...] = ()


def solve(
    model: CpModel,
    wanted: Sequence[IntVar],
    *,
    seconds: float,
    effort: float | None = None,
    seed: int = 0,
    stop: Stop | None = None,
) -> Solved:
    """Ask CP-SAT for a solution.

    Parameters
    ----------
    model : the whole model, hard constraints only
    wanted : variables whose values are handed back
    seconds : wall time for each of the two calls
    effort : deterministic work limit of the solver, so that an answer does not depend on the clock
    seed : seed of the first call; "infeasible" is confirmed with another
    stop : ends the solver from outside

    Returns
    -------
    Solved : SOLUTION with values, INFEASIBLE if two seeds agree, else UNKNOWN

    Raises
    ------
    KeyboardInterrupt : somebody asked for an end
    """
    from ortools.sat.python import cp_model

    def ask(with_seed: int) -> tuple[CpSolverStatus, CpSolver]:
        solver = cp_model.CpSolver()
        solver.parameters.num_workers = 1
        # Its own handler would leave SIGINT at "die" when it is done: an interrupt is ours to hear.
        solver.parameters.catch_sigint_signal = False
        solver.parameters.max_time_in_seconds = max(0.01, seconds)
        if effort is not None:
            solver.parameters.max_deterministic_time = effort
        solver.parameters.random_seed = with_seed % 2**31
        return _interruptible(solver, model, stop), solver

    status, solver = ask(seed)
    if status in (cp_model.OPTIMAL, cp_model.FEASIBLE):
        return Solved(Answer.SOLUTION, tuple(int(solver.value(v)) for v in wanted))
    if status == cp_model.INFEASIBLE and ask(seed + 1)[0] == cp_model.INFEASIBLE:
        return Solved(Answer.INFEASIBLE)
    return Solved(Answer.UNKNOWN)


def _interruptible(solver: CpSolver, model: CpModel, stop: Stop | None) -> CpSolverStatus:
    """Solve in a thread of its own: the main thread must stay in Python to hear an interrupt."""
    statuses: list[CpSolverStatus] = []
    failures: list[BaseException] = []
    done = threading.Event()

    def work() -> None:
        try:
            statuses.append(solver.solve(model))
        except BaseException as failure:
            failures.append(failure)
        finally:
            done.set()

    threading.Thread(target=work, daemon=True).start()
    try:
        while not done.wait(0.05):
            if stop is not None and stop.interrupted:
                raise KeyboardInterrupt
    except KeyboardInterrupt:
        solver.stop_search()
        done.wait(5.0)
        raise
    if failures:
        raise failures[0]
    return statuses[0]
