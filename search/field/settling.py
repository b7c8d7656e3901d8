"""Layouts without clashes by the rule solver: one where a walk finds none, or that there is none."""

from __future__ import annotations

from collections import Counter
from dataclasses import dataclass
from typing import TYPE_CHECKING

from search.field.beside import Restriction
from search.field.urn import Standing, Urn
from search.foundation.cpsat import Answer, solve

if TYPE_CHECKING:
    from ortools.sat.python.cp_model import CpModel, IntVar

EFFORT = 20.0
"""Deterministic work of the solver: the same seed gives the same layout on a slow machine too."""
SECONDS = 300.0
"""Wall time after which the solver is given up all the same."""


@dataclass(frozen=True, slots=True, eq=False)
class Model:
    """Plots of some blocks, the treatments of each block placed on them."""

    model: CpModel
    stands: dict[tuple[int, int], IntVar]

    def settle(self, seed: int, effort: float) -> tuple[Answer, dict[int, int]]:
        """A layout without clashes: the treatment of each plot."""
        keys = list(self.stands)
        wanted = [self.stands[key] for key in keys]
        solved = solve(self.model, wanted, seconds=SECONDS, effort=effort, seed=seed)
        return solved.answer, {p: i for (p, i), on in zip(keys, solved.values, strict=False) if on}


def model_of(urn: Urn, limit: Restriction, standing: Standing, blocks: range | tuple[int, ...]) -> Model:
    """The model of some blocks whose contents are those of a layout; others are left out of account."""
    from ortools.sat.python import cp_model

    model = cp_model.CpModel()
    stands: dict[tuple[int, int], IntVar] = {}
    for j in blocks:
        held = Counter(standing[list(urn.plots[j])].tolist())
        for p in urn.plots[j]:
            for i in held:
                stands[p, i] = model.new_bool_var("")
            model.add_exactly_one(stands[p, i] for i in held)
            if p in urn.fixed:
                model.add(stands[p, urn.fixed[p]] == 1)
        for i, times in held.items():
            model.add(sum(stands[p, i] for p in urn.plots[j]) == times)
    on: dict[int, list[int]] = {}
    for p, i in stands:
        on.setdefault(p, []).append(i)
    for p, q in zip(limit.first.tolist(), limit.second.tolist(), strict=True):
        for i in on.get(p, ()):
            for k in on.get(q, ()):
                if limit.clashing[i, k]:
                    model.add_bool_or(~stands[p, i], ~stands[q, k])
    return Model(model, stands)


def settled(urn: Urn, limit: Restriction, standing: Standing, seed: int) -> tuple[Answer, Standing]:
    """A layout of the same blocks without clashes."""
    model = model_of(urn, limit, standing, range(len(urn.plots)))
    answer, found = model.settle(seed, EFFORT)
    layout = standing.copy()
    for p, i in found.items():
        layout[p] = i
    return answer, layout


def unsettled_block(urn: Urn, limit: Restriction, standing: Standing) -> int | None:
    """A block whose own plots cannot keep its treatments apart, if there is one."""
    for j in range(len(urn.plots)):
        if model_of(urn, limit, standing, (j,)).settle(0, EFFORT)[0] is Answer.INFEASIBLE:
            return j
    return None
