"""Results from elsewhere, each judged before it is taken: a file of lines, or another store.

This floor cannot prove: it is handed a judge, which takes the JSON data of a result, proves every claim of
it and hands back the trial, or says in words what does not hold. Results are taken a hundred at a time, each
hundred whole, so an interrupted import or merge has done a part of its work and can simply be repeated.
"""

from __future__ import annotations

from collections.abc import Callable, Iterable, Iterator
from dataclasses import dataclass, replace
from typing import Any

from search.efficiency.comparing import SAME, gap_percent
from search.efficiency.evaluator import score
from search.foundation.documents import parsed_json
from search.foundation.errors import BadInput
from search.runs.exchange import document, shown_from
from search.runs.kept import Kept, Shown, Taken
from search.runs.plan import WRONG
from search.runs.store import Store
from search.trial.records import Trial

Judge = Callable[[Any], Trial]
AT_ONCE = 100


@dataclass(frozen=True, slots=True)
class Refusal:
    """A result that was not taken: where it stands, and why not."""

    where: str
    reason: str


@dataclass(frozen=True, slots=True)
class Gathered:
    """What was taken, and what was refused."""

    taken: Taken
    refused: tuple[Refusal, ...]


def import_lines(store: Store, lines: Iterable[bytes], judge: Judge) -> Gathered:
    """Take the results of an exported file, one a line.

    Parameters
    ----------
    store : where to
    lines : the file; empty lines say nothing
    judge : proves a result, see above

    Raises
    ------
    BadInput : the store cannot be written to
    """

    def read() -> Iterator[tuple[str, Any]]:
        for number, line in enumerate(lines, start=1):
            if line.strip():
                yield f"line {number}", line

    return _gathered(store, read(), lambda line: _judged(parsed_json(line), judge))


def merge(store: Store, other: Store, judge: Judge) -> Gathered:
    """Take from another store what is better there, its runs and its issued plans.

    Only what could displace something is judged: the rest of the other store is never believed.

    Parameters
    ----------
    store, other : where to, and where from
    judge : proves a result, see above

    Raises
    ------
    BadInput : one cannot be read, or the other not written to
    """

    def read() -> Iterator[tuple[str, Any]]:
        for shown in other.all_shown():
            yield f"{shown.problem.digest[:12]}, {shown.aim}", shown

    def take(shown: Shown) -> Shown:
        news = _news(store, shown)
        return news if news is not None else _judged(document(shown), judge)

    return _gathered(store, read(), take)


def _news(store: Store, shown: Shown) -> Shown | None:
    """The runs of a result, where it has nothing else that is new or better; else None."""
    here = store.all_of(shown.problem.digest, shown.aim)
    plan, bound = shown.kept.plan, shown.kept.bound
    if here is None or here.problem.text != shown.problem.text:
        return None
    if (plan is not None and plan.beats(here.kept.plan, shown.aim)) or (
        bound is not None and bound.beats(here.kept.bound, shown.aim)
    ):
        return None
    known = {(one.mark, one.contents) for one in here.issued}
    if any((one.mark, one.contents) not in known for one in shown.issued):
        return None
    best = here.kept.bound
    runs = tuple(
        run
        for run in shown.runs
        if best is None or gap_percent(shown.aim, run.score, float(best.exact)) >= -100 * WRONG
    )
    return Shown(here.problem, shown.aim, Kept(None, None), runs)


def _judged(content: Any, judge: Judge) -> Shown:
    trial = judge(content)
    shown = shown_from(content, trial)
    plan = shown.kept.plan
    if plan is None:
        return shown
    # Plans are compared by these digits; what was proved only up to rounding is taken from our own hand.
    real = score(trial, plan.contents)
    own = replace(
        plan,
        score=_same(plan.score, real.aim),
        objective=None if real.aim_variance is None else _same(plan.objective, real.aim_variance),
        balanced=real.balanced,
    )
    return replace(shown, kept=Kept(own, shown.kept.bound))


def _same(told: float | None, real: float) -> float:
    """The number as it was told where that differs from the real one by rounding alone, else the real one."""
    return told if told is not None and abs(told - real) <= SAME * abs(real) else float(real)


def _gathered(store: Store, found: Iterable[tuple[str, Any]], judged: Callable[[Any], Shown]) -> Gathered:
    taken, refused, waiting = Taken(), [], []
    for where, one in found:
        try:
            waiting.append(judged(one))
        except BadInput as error:
            refused.append(Refusal(where, str(error)))
        if len(waiting) == AT_ONCE:
            taken += store.take(waiting)
            waiting = []
    if waiting:
        taken += store.take(waiting)
    return Gathered(taken, tuple(refused))
