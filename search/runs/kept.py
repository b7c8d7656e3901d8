"""What the store keeps: problems, the best plan and bound of each, and every run; all by canonical places."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass, field
from datetime import UTC, datetime
from fractions import Fraction
from typing import Any
from uuid import uuid4

from search.efficiency.comparing import Merit, beats, gap_percent, is_tighter, merit
from search.foundation.versions import versions
from search.trial.canonical import Canonical
from search.trial.records import Contents, Trial


def now() -> str:
    """The time as it is kept."""
    return moment(datetime.now(UTC))


def moment(time: datetime) -> str:
    """A time as it is kept: UTC, to the second."""
    return time.astimezone(UTC).strftime("%Y-%m-%dT%H:%M:%SZ")


@dataclass(frozen=True, slots=True)
class Problem:
    """A problem: its digest, the canonical text under it, and a short description."""

    digest: str
    text: str
    t: int
    b: int
    n: int
    sizes: tuple[int, ...]
    """Plots of the blocks, in canonical order, with those that may stay filler; n is their sum."""
    name: str
    """Name of the trial that was last seen with this problem."""


def problem_of(trial: Trial, numbering: Canonical) -> Problem:
    """The problem of a trial."""
    sizes = tuple(trial.blocks[j].plots for j in numbering.blocks)
    return Problem(numbering.digest, numbering.text, trial.t, trial.b, trial.land, sizes, trial.name)


@dataclass(frozen=True, slots=True)
class KeptPlan:
    """A plan: contents in canonical numbering and how they were found.

    Parameters
    ----------
    contents : block contents
    score : efficiency for the aim; for even meetings the sum of squared meetings
    objective : the aim's mean variance, None where the aim has none or the plan is disconnected
    seed, moves, seconds : of the run that found it
    start : what that run started from
    mark : mark of the packet in which it was issued, or empty
    versions : of program and libraries
    made : when, in UTC
    balanced : whether all pairs of treatments are compared alike, and no information is lost
    """

    contents: Contents
    score: float
    objective: float | None
    seed: int
    moves: int
    seconds: float
    start: str
    mark: str = ""
    versions: Mapping[str, str] = field(default_factory=versions)
    made: str = field(default_factory=now)
    balanced: bool = False

    def beats(self, other: KeptPlan | None, aim: str) -> bool:
        """Whether it is better for an aim by more than rounding."""
        return other is None or beats(self.merit(aim), other.merit(aim))

    def merit(self, aim: str) -> Merit:
        """What it is judged by for an aim."""
        return merit(aim, self.score, self.objective)


@dataclass(frozen=True, slots=True)
class KeptBound:
    """A bound with its certificate in canonical numbering."""

    exact: Fraction
    argument: str
    certificate: dict[str, Any]
    versions: Mapping[str, str] = field(default_factory=versions)
    made: str = field(default_factory=now)

    def beats(self, other: KeptBound | None, aim: str) -> bool:
        """Whether it is tighter for an aim."""
        return other is None or is_tighter(aim, self.exact, other.exact)


@dataclass(frozen=True, slots=True)
class IssuedPlan:
    """A plan that was handed to a crew under a mark; it stays, whatever better plan is found later."""

    mark: str
    contents: Contents
    score: float
    made: str = field(default_factory=now)


@dataclass(frozen=True, slots=True)
class Run:
    """One run of the search, as it was asked for and as it ended.

    Parameters
    ----------
    seed, workers : as asked for
    limit_seconds, limit_moves : the limits it was given
    moves, seconds : what it took
    ended_by : what brought it to its end
    score : of its plan
    start : what its plan started from
    uid : tells the run from every other one, also when stores are merged
    """

    seed: int
    workers: int
    limit_seconds: float | None
    limit_moves: int | None
    moves: int
    seconds: float
    ended_by: str
    score: float
    start: str
    versions: Mapping[str, str] = field(default_factory=versions)
    made: str = field(default_factory=now)
    uid: str = field(default_factory=lambda: uuid4().hex)


@dataclass(frozen=True, slots=True)
class Kept:
    """The best plan and the best bound of one problem for one aim."""

    plan: KeptPlan | None
    bound: KeptBound | None

    def gap_percent(self, aim: str) -> float | None:
        """How far the plan is from the bound, where both are known."""
        if self.plan is None or self.bound is None or self.plan.score <= 0:
            return None
        return max(0.0, gap_percent(aim, self.plan.score, float(self.bound.exact)))


@dataclass(frozen=True, slots=True)
class Entry:
    """A line of the store's list."""

    digest: str
    name: str
    t: int
    b: int
    n: int
    sizes: tuple[int, ...]
    aim: str
    score: float
    bound: float | None
    gap_percent: float | None
    """How much better the best possible plan could be at most, where a bound is kept."""
    standing: str
    made: str
    mark: str
    runs: int


@dataclass(frozen=True, slots=True)
class Shown:
    """Everything that is kept for one problem and aim."""

    problem: Problem
    aim: str
    kept: Kept
    runs: tuple[Run, ...]
    issued: tuple[IssuedPlan, ...] = ()


@dataclass(frozen=True, slots=True)
class Taken:
    """What came of records that a store was given: how many, and how many new or better parts."""

    results: int = 0
    plans: int = 0
    bounds: int = 0
    runs: int = 0

    def __add__(self, other: Taken) -> Taken:
        return Taken(
            self.results + other.results,
            self.plans + other.plans,
            self.bounds + other.bounds,
            self.runs + other.runs,
        )
