"""What is known of the rows of a sweep, and of the sweep while it goes on."""

from __future__ import annotations

from dataclasses import dataclass
from enum import StrEnum

from search.foundation.errors import Clash
from search.runs.plan import Plan
from search.runs.sweep_file import SweepRow


class RowStatus(StrEnum):
    """How a row ended."""

    PLANNED = "planned"
    FAULTY = "faulty"
    IMPOSSIBLE = "impossible"
    UNDECIDED = "undecided"
    FAILED = "failed"
    OPEN = "not finished"


class WhereFrom(StrEnum):
    """Where the result of a row comes from."""

    SEARCHED = "searched"
    KEPT = "kept"


@dataclass(frozen=True, slots=True)
class RowResult:
    """A row and what came of it.

    Parameters
    ----------
    row : the row
    status : how it ended
    plan : its plan, where there is one
    where_from : searched now, or kept from an earlier search
    reason : why there is no plan, in short
    clashes : lines of its file that cannot all be kept, where it is impossible
    """

    row: SweepRow
    status: RowStatus
    plan: Plan | None = None
    where_from: WhereFrom | None = None
    reason: str = ""
    clashes: tuple[Clash, ...] = ()


@dataclass(frozen=True, slots=True)
class Progress:
    """Where a sweep stands.

    Parameters
    ----------
    rows : in all
    done : ended, in whatever way
    kept : of these, known before this sweep began
    failed : of these, without a plan
    running : being searched
    best_gap_percent : least gap of the plans so far
    seconds_left : estimate, from the first search that ended on
    """

    rows: int
    done: int
    kept: int
    failed: int
    running: int
    best_gap_percent: float | None
    seconds_left: float | None
