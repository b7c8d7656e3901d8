"""The search of one row: a trial in, a plan or the reason for none out, wherever it is done."""

from __future__ import annotations

from dataclasses import dataclass

from search.efficiency.records import Bound
from search.foundation.errors import Clash, Impossible, Undecided
from search.foundation.stopping import Ended, Limits, Stop
from search.runs.conductor import find
from search.runs.explaining import explained
from search.runs.plan import Plan
from search.runs.sweep_records import RowStatus
from search.trial.limits import limits
from search.trial.records import Contents, Trial

EXPLAIN_SECONDS = 3.0
"""Wall time for the clashing lines of one impossible row; a sweep may have thousands."""
MOST_LINES = 3


@dataclass(frozen=True, slots=True)
class Search:
    """What a worker needs to know to search one row.

    Parameters
    ----------
    number : of the row
    trial, digest : what to plan
    limits : how far to search
    kept : the best plan known, which the search starts from
    known : a bound that came with the program
    """

    number: int
    trial: Trial
    digest: str
    limits: Limits
    kept: Contents | None
    known: Bound | None = None


@dataclass(frozen=True, slots=True)
class Found:
    """What the search of a row came to."""

    number: int
    status: RowStatus
    plan: Plan | None = None
    reason: str = ""
    clashes: tuple[Clash, ...] = ()


def search_row(asked: Search, stop: Stop) -> Found:
    """Search one row with one worker; whatever goes wrong is the row's own.

    Parameters
    ----------
    asked : the row
    stop : ends the search from outside
    """
    number = asked.number
    try:
        plan = find(
            asked.trial,
            limits=asked.limits,
            seed=asked.trial.search.seed,
            workers=1,
            digest=asked.digest,
            kept=asked.kept,
            known=asked.known,
            stop=stop,
        )
    except Impossible as error:
        clashes = _clashes(asked.trial, error)
        return Found(number, RowStatus.IMPOSSIBLE, None, in_short(error, clashes), clashes)
    except Undecided as error:
        status = RowStatus.OPEN if stop.interrupted else RowStatus.UNDECIDED
        return Found(number, status, reason=str(error))
    except KeyboardInterrupt:
        return Found(number, RowStatus.OPEN, reason="interrupted")
    except Exception as error:
        return Found(number, RowStatus.FAILED, reason=f"internal error: {type(error).__name__}: {error}")
    interrupted = plan.ended_by is Ended.INTERRUPTED
    return Found(number, RowStatus.OPEN if interrupted else RowStatus.PLANNED, plan)


def impossible_alike(number: int, trial: Trial, other: int) -> Found:
    """Why a row is impossible whose problem another row has under other names.

    Parameters
    ----------
    number, trial : the row
    other : number of the row of which it is known
    """
    error = Impossible((f"it is the problem of row {other}, which has no plan",), f"as row {other}")
    try:
        limits(trial)
    except Impossible as counted:
        error = counted
    clashes = _clashes(trial, error)
    return Found(number, RowStatus.IMPOSSIBLE, None, in_short(error, clashes), clashes)


def _clashes(trial: Trial, error: Impossible) -> tuple[Clash, ...]:
    """The clashing lines; that the trial is impossible stands without them."""
    try:
        return explained(trial, error, seconds=EXPLAIN_SECONDS).clashes
    except Exception:
        return ()


def in_short(error: Impossible, clashes: tuple[Clash, ...]) -> str:
    """Why a row is impossible, in a line: what clashes, and the cause."""
    if not clashes:
        return "; ".join(error.causes)
    lines, cause = clashes[0].lines, clashes[0].cause
    if not lines:
        return cause
    # Defaults belong to the clash too, but what somebody wrote is what can be changed.
    lines = tuple(line for line in lines if line[1]) or lines
    told = "; ".join(text for _, _, text in lines[:MOST_LINES])
    more = f" and {len(lines) - MOST_LINES} more" if len(lines) > MOST_LINES else ""
    together = "cannot be kept" if len(lines) == 1 else "cannot all be kept"
    return f"{told}{more} {together}: {cause}"
