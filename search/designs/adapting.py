"""A plan for a trial that keeps as much of a design as its sizes and rules allow."""

from __future__ import annotations

import numpy as np

from search.designs.records import Blocks
from search.foundation.cpsat import Answer, solve
from search.foundation.stopping import Stop
from search.trial.records import Contents
from search.trial.tables import Ints, Tables, contents_of


def adapted(blocks: Blocks, rules: Tables, *, effort: float, stop: Stop | None = None) -> Contents | None:
    """The plan that obeys the rules and moves the fewest plots of a design, as far as the effort goes.

    Points beyond the trial's treatments, and blocks beyond its own, are left out; what the design lacks is
    filled freely. Limits on meetings are not looked at.

    Parameters
    ----------
    blocks : of the design
    rules : tables of the trial
    stop : ends the solver from outside
    effort : deterministic work of CP-SAT
    """
    from ortools.sat.python import cp_model

    wanted = _laid_over(blocks, rules)
    model = cp_model.CpModel()
    high = np.minimum(rules.high, rules.low + 1)  # no bunching where a treatment may stand twice
    plots = [
        [model.new_int_var(least, most, "") for least, most in zip(lows, highs, strict=True)]
        for lows, highs in zip(rules.low.tolist(), high.tolist(), strict=True)
    ]
    for j, size in enumerate(rules.sizes.tolist()):
        model.add(sum(line[j] for line in plots) == size)
    for i, line in enumerate(plots):
        model.add_linear_constraint(sum(line), int(rules.least[i]), int(rules.most[i]))
        for g, share in enumerate(rules.share[i].tolist()):
            model.add(sum(line[j] for j in np.flatnonzero(rules.group == g)) == share)
    for one, other in zip(*np.nonzero(np.triu(rules.apart)), strict=True):
        for j in range(rules.b):
            model.add(plots[one][j] + plots[other][j] <= 1)
    model.maximize(sum(plots[i][j] for i, j in zip(*np.nonzero(wanted), strict=True)))
    cells = [plot for line in plots for plot in line]
    solved = solve(model, cells, seconds=300 * effort, effort=effort, stop=stop)
    if solved.answer is not Answer.SOLUTION:
        return None
    return contents_of(np.array(solved.values, dtype=np.int64).reshape(rules.t, rules.b))


def _laid_over(blocks: Blocks, rules: Tables) -> Ints:
    """The design on the trial's treatments and blocks, the fullest blocks on the largest; shape (t, b)."""
    left = [[x for x in block if x < rules.t] for block in blocks]
    fullest = sorted(range(len(left)), key=lambda q: -len(left[q]))
    largest = np.argsort(-rules.sizes, kind="stable")
    wanted = np.zeros((rules.t, rules.b), dtype=np.int64)
    for j, q in zip(largest, fullest, strict=False):
        wanted[left[q], j] = 1
    return wanted
