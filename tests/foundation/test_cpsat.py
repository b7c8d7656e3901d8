"""The guarded solver call."""

from __future__ import annotations

import signal
import threading
import time

import pytest
from ortools.sat.python import cp_model

from search.foundation.cpsat import Answer, solve
from search.foundation.stopping import Limits, Stop


def pigeons(holes: int) -> cp_model.CpModel:
    """One pigeon more than holes, told in the way that is hard to refute."""
    model = cp_model.CpModel()
    sits = [[model.new_bool_var("") for _ in range(holes)] for _ in range(holes + 1)]
    for row in sits:
        model.add_bool_or(row)
    for hole in range(holes):
        for one in range(holes + 1):
            for other in range(one):
                model.add_bool_or(sits[one][hole].negated(), sits[other][hole].negated())
    return model


def test_a_solution_comes_with_its_values() -> None:
    """x + y = 7 with x > y has a solution, and it is one."""
    model = cp_model.CpModel()
    x, y = model.new_int_var(0, 9, "x"), model.new_int_var(0, 9, "y")
    model.add(x + y == 7)
    model.add(x > y)
    solved = solve(model, [x, y], seconds=10)
    assert solved.answer is Answer.SOLUTION
    assert sum(solved.values) == 7
    assert solved.values[0] > solved.values[1]


def test_infeasible_is_said_of_what_is() -> None:
    """Four pigeons do not fit into three holes."""
    assert solve(pigeons(3), [], seconds=10).answer is Answer.INFEASIBLE


def squares_apart(many: int) -> cp_model.CpModel:
    """Latin squares of an order at which two that are orthogonal do not exist (Tarry 1900, order 6)."""
    model = cp_model.CpModel()
    one, other = (
        [[model.new_int_var(0, many - 1, "") for _ in range(many)] for _ in range(many)] for _ in range(2)
    )
    for square in (one, other):
        for line in (*square, *zip(*square, strict=True)):
            model.add_all_different(line)
    both = [
        a * many + b for row, row2 in zip(one, other, strict=True) for a, b in zip(row, row2, strict=True)
    ]
    model.add_all_different(both)
    return model


def test_too_little_effort_is_unknown_not_infeasible() -> None:
    """A search cut short knows nothing."""
    assert solve(squares_apart(6), [], seconds=10, effort=1e-4).answer is Answer.UNKNOWN


def test_the_solver_leaves_the_interrupt_to_us() -> None:
    """After a call, an interrupt still reaches Python and does not kill the process."""
    solve(pigeons(3), [], seconds=10)
    with pytest.raises(KeyboardInterrupt):  # noqa: PT012
        signal.raise_signal(signal.SIGINT)
        time.sleep(1)


def test_an_interrupt_ends_the_solver() -> None:
    """Somebody who asks for an end does not wait for the time limit."""
    stop = Stop(Limits())
    threading.Timer(0.2, stop.interrupt).start()
    started = time.monotonic()
    with pytest.raises(KeyboardInterrupt):
        solve(squares_apart(6), [], seconds=60, stop=stop)
    assert time.monotonic() - started < 20
