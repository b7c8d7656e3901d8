"""Proof by exhaustion that no plan is better than a given one, or a better plan.

Statement. Let all blocks have k plots and all treatments r, nothing twice in a block. Either the meetings of
treatments or the overlaps of blocks are as even as the numbers allow (the first level), so that they show a
regular graph; or the plan belongs to a further level, which is bounded as in `local spectral`.
Every regular graph of the degree in question is listed up to isomorphism. Those that would be better than the
plan, and better than what bounds the further levels, are refuted one by one: no plan has these meetings.

What rests on the solver and on the listing is said in the certificate by numbers; `search.proof` repeats both
on demand, with its own listing.
"""

from __future__ import annotations

from collections import Counter
from collections.abc import Callable
from dataclasses import dataclass, field, replace
from fractions import Fraction
from typing import Any

import numpy as np

from search.designs.conditions import conditions
from search.designs.theorems import obstruction
from search.efficiency.bounds.problem import Problem, bound_on_determinant, bound_on_variance, text
from search.efficiency.bounds.spectral.below import Cost
from search.efficiency.bounds.spectral.local import Search, beyond_first
from search.efficiency.bounds.spectral.side import Half, Shape, halves, shape_of, steps_of
from search.efficiency.exhaustion.graphs import MOST_GRAPHS, Graphs, TooMany, about, regular_graphs
from search.efficiency.exhaustion.realising import By, Effort, Lines, realised
from search.efficiency.exhaustion.worth import MARGIN, Meetings, estimates, worth
from search.efficiency.records import Bound
from search.foundation.exact import exponential_above, rounded_up
from search.foundation.stopping import Stop
from search.trial.checker import broken_rules
from search.trial.records import AimKind, Contents
from search.trial.tables import incidence

NAME = "exhaustion"
MOST_CALLS = 150
"""So often the solver is asked."""
MOST_OPEN = 3
"""After so many questions that it leaves open nothing more is asked."""
WORK = 8.0
"""Its own count of work for each question, about that many seconds."""
LONG = 600.0


@dataclass(frozen=True, slots=True)
class Exhausted:
    """What came of it.

    Parameters
    ----------
    contents : a plan that is better than the one given, None where none was found
    bound : None where something was left open
    """

    contents: Contents | None
    bound: Bound | None


@dataclass(frozen=True, slots=True)
class Case:
    """What is listed for a trial: graphs of one side."""

    shape: Shape
    half: Half
    other: Half
    both_even: bool
    cost: Cost

    @property
    def graphs(self) -> float:
        """How many there are, about."""
        return about(self.half.size, self.half.degree)

    @property
    def seconds(self) -> float:
        """What listing and refuting them takes, about."""
        return 2.0 + self.graphs / 1000

    @property
    def rk(self) -> int:
        """Row sums of NN' and of N'N."""
        return self.shape.r * self.shape.k

    @property
    def more(self) -> int:
        """Eigenvalues x = 0 of C that this side does not show."""
        return self.shape.t - self.half.size

    def meetings(self, graphs: Graphs) -> Meetings:
        """NN' or N'N of each graph."""
        unit = np.eye(self.half.size, dtype=np.int64)
        return graphs + self.half.base * (1 - unit) + self.half.own * unit


def case_of(given: Problem, most: int = MOST_GRAPHS) -> Case | None:
    """What there is to list for a trial; None where that is too much or the argument does not apply."""
    trial = given.trial
    speaks = (
        trial.blocks_random is None and not trial.may_be_emptier and trial.aim.kind.depends_on_eigenvalues
    )
    shape = shape_of(given) if speaks else None
    # with r = k = 2 the only connected plan is a cycle
    if shape is None or shape.r == shape.k == 2:
        return None
    steps = steps_of(shape, 0)
    if steps is None:
        return None
    cost = Cost.LOGARITHM if given.trial.aim.kind is AimKind.OVERALL else Cost.INVERSE
    one, other = halves(shape)
    cases = [
        Case(shape, half, beside, steps == (0, 0) and shape.sets == 1, cost)
        for half, beside, level in ((one, other, steps[0]), (other, one, steps[1]))
        if level == 0 and half.sets == 1
    ]
    case = min(cases, key=lambda case: (case.graphs, case.half.size), default=None)
    return case if case is not None and case.graphs <= 3 * most else None


def worth_of(case: Case, contents: Contents) -> Fraction:
    """The worth of a plan, exactly."""
    counts = incidence(contents, case.shape.t).astype(np.int64)
    return worth(counts @ counts.T, case.rk, 0, case.cost)


def exhausted(
    given: Problem,
    case: Case,
    reached: Fraction,
    *,
    otherwise: Bound | None = None,
    seconds: float = LONG,
    work: float = WORK,
    most: int = MOST_GRAPHS,
    stop: Stop | None = None,
    note: Callable[[str], None] = lambda text: None,
) -> Exhausted | None:
    """Look at every graph that a better plan could have.

    Parameters
    ----------
    given : the trial
    case : what there is to list for it, from `case_of`
    reached : the worth of a plan
    otherwise : the best bound that needs no exhaustion, kept beside
    seconds : wall time of a question to the solver
    work : its own count of work; where `seconds` is ample the answer does not depend on the clock
    most : graphs that are listed
    stop : ends it from outside
    note : told what begins

    Returns
    -------
    None where it comes to nothing

    Raises
    ------
    KeyboardInterrupt : somebody asked for an end
    """
    beyond = beyond_first(case.shape, case.cost, _as_cost(reached, case.cost))
    if beyond is None:
        return None
    note(f"listing all graphs of degree {case.half.degree} on {case.half.size} members")
    try:
        graphs = regular_graphs(case.half.size, case.half.degree, stop, most)
    except TooMany:
        return None
    look = _Look(given, case, case.meetings(graphs), reached, Effort(seconds, work), stop)
    floor = _as_worth(beyond.value, case.cost)
    look.at_all(floor, note)
    return Exhausted(look.found, look.bound(beyond, floor, otherwise))


def _as_cost(worth: Fraction, cost: Cost) -> Fraction:
    """The worth of a plan as the sum of costs that the levels are compared with, rounded up."""
    if cost is Cost.INVERSE:
        return -worth
    return Fraction(-float(np.log(float(worth)))) + Fraction(1, 10**9)


def _as_worth(value: Fraction, cost: Cost) -> Fraction:
    """What no plan passes whose costs come to at least so much."""
    return -value if cost is Cost.INVERSE else exponential_above(-value)


@dataclass(slots=True)
class _Look:
    """Graphs that would be better, looked at one by one from the best on."""

    given: Problem
    case: Case
    meetings: Meetings
    worth: Fraction
    effort: Effort
    stop: Stop | None
    found: Contents | None = None
    fates: dict[int, By] = field(default_factory=dict)
    better: list[int] = field(default_factory=list)
    why: str = ""

    def at_all(self, floor: Fraction, note: Callable[[str], None]) -> None:
        """Look until a plan is found, or nothing better than the plan is left."""
        case = self.case
        values = estimates(self.meetings, case.rk, case.more, case.cost)
        order = np.argsort(-values, kind="stable")
        calls = 0
        better = int((values > float(self.worth) * (1 + MARGIN * (-1) ** (self.worth < 0))).sum())
        note(f"{len(values):,} graphs are listed, {better:,} of them would be better than the plan")
        for at in order.tolist():
            if not self._beats(at, float(values[at]), self.worth):
                break
            fate = self._fate(at)
            if fate is By.REALISED:
                self.worth = worth(self.meetings[at], case.rk, case.more, case.cost)
                break
            self.fates[at] = fate
            calls += fate in (By.SOLVER, By.OPEN)
            if calls == MOST_CALLS or sum(one is By.OPEN for one in self.fates.values()) == MOST_OPEN:
                break
        threshold = max(self.worth, floor)
        self.better = [at for at in order.tolist() if self._beats(at, float(values[at]), threshold)]

    def _beats(self, at: int, value: float, than: Fraction) -> bool:
        """Whether a graph is better than a worth: in floats where that is clear, else exactly."""
        near = MARGIN * abs(float(than))
        if abs(value - float(than)) > near:
            return value > float(than)
        return worth(self.meetings[at], self.case.rk, self.case.more, self.case.cost) > than

    def _fate(self, at: int) -> By:
        case = self.case
        if case.half.degree == 0 and (why := _obstruction(case)):
            self.why = why
            return By.LITERATURE
        answer = realised(self.meetings[at], case.half, case.other, case.both_even, self.effort, self.stop)
        if answer.by is not By.REALISED:
            return answer.by
        contents = _contents(case, answer.lines)
        if broken_rules(self.given.trial, contents) or worth_of(case, contents) <= self.worth:
            return By.OPEN
        self.found = contents
        return By.REALISED

    def bound(self, beyond: Search, floor: Fraction, otherwise: Bound | None) -> Bound | None:
        """What is proved; None where a graph that would be better was not refuted."""
        better = self.better
        counts = Counter(self.fates.get(at, By.OPEN) for at in better)
        if counts[By.OPEN]:
            return None
        case, threshold = self.case, max(self.worth, floor)
        shown = threshold if threshold == self.worth else rounded_up(threshold)
        refuted = {by.value: counts[by] for by in (By.COUNTING, By.SOLVER, By.LITERATURE)}
        multipliers: dict[str, Any] = {
            "side": case.half.name,
            "graphs": len(self.meetings),
            "better": len(better),
            "refuted": refuted,
            "worth": text(shown),
            "levels": [level.multipliers() for level in beyond.levels],
        }
        if counts[By.LITERATURE]:
            multipliers["because"] = self.why
        if case.cost is Cost.LOGARITHM:
            bound = bound_on_determinant(self.given, NAME, shown * case.shape.r**case.shape.rank, multipliers)
        else:
            variance = -2 * shown / case.shape.r / case.shape.rank
            bound = bound_on_variance(self.given, NAME, variance, multipliers)
        told = _told(case, len(self.meetings), len(better), refuted)
        certificate = {**bound.certificate, "statement": f"{bound.certificate['statement']}; {told}"}
        return replace(bound, certificate=certificate, otherwise=otherwise)


def _told(case: Case, graphs: int, better: int, refuted: dict[str, int]) -> str:
    who = "treatments meet" if case.half.name == "primal" else "blocks overlap"
    fates = ", ".join(f"{count:,} by {by}" for by, count in refuted.items() if count)
    would = f"{better:,} would be better, and no plan has them ({fates})" if better else "none is better"
    return f"shown by exhaustion: of all ways in which {who} as evenly as can be ({graphs:,} graphs), {would}"


def _obstruction(case: Case) -> str:
    """Why no balanced design (or the dual of one) has these numbers."""
    sizes = conditions(case.half.size, case.other.size, case.half.line).allowed
    if sizes is None:
        return ""
    return obstruction(sizes)


def _contents(case: Case, lines: Lines) -> Contents:
    """Lines as blocks, or as the treatments that stand in them."""
    if case.half.name == "primal":
        return tuple(tuple(sorted(line)) for line in lines)
    return tuple(tuple(i for i, line in enumerate(lines) if block in line) for block in range(case.half.size))
