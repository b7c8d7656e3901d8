"""Kept results as JSON data and as lines of a table, and JSON data back as records."""

from __future__ import annotations

import csv
import io
from collections.abc import Iterable, Iterator, Mapping
from typing import Any

from search.efficiency.comparing import efficiency_of
from search.foundation.documents import canonical_json
from search.foundation.errors import BadInput
from search.runs import rows
from search.runs.kept import Entry, IssuedPlan, Kept, KeptBound, KeptPlan, Problem, Run, Shown
from search.runs.rows import Damaged, Types
from search.trial.records import Contents, Trial

FORMAT = "evenfield result 1"
COLUMNS = (
    "problem",
    "trial",
    "treatments",
    "blocks",
    "plots",
    "sizes",
    "aim",
    "score",
    "bound",
    "gap_percent",
    "standing",
    "issued",
    "made",
    "runs",
)
BEGINS_A_FORMULA = ("=", "+", "-", "@", "\t", "\r")


def document(shown: Shown) -> dict[str, Any]:
    """Everything that is kept for a problem and aim, as JSON data."""
    problem, plan, bound = shown.problem, shown.kept.plan, shown.kept.bound
    return {
        "format": FORMAT,
        "digest": problem.digest,
        "trial": problem.name,
        "treatments": problem.t,
        "blocks": problem.b,
        "plots": problem.n,
        "sizes": list(problem.sizes),
        "aim": shown.aim,
        "plan": None if plan is None else _plan(plan, shown.aim),
        "bound": None if bound is None else _bound(bound, shown.aim),
        "gap_percent": shown.kept.gap_percent(shown.aim),
        "runs": [_run(run, shown.aim) for run in shown.runs],
        "issued": [_issued(one, shown.aim) for one in shown.issued],
        "text": problem.text,
    }


def _plan(plan: KeptPlan, aim: str) -> dict[str, Any]:
    return {
        "score": plan.score,
        "efficiency": efficiency_of(aim, plan.score),
        "contents": _lists(plan.contents),
        "objective": plan.objective,
        "seed": plan.seed,
        "moves": plan.moves,
        "seconds": plan.seconds,
        "start": plan.start,
        "mark": plan.mark,
        "made": plan.made,
        "balanced": plan.balanced,
        "versions": dict(plan.versions),
    }


def _bound(bound: KeptBound, aim: str) -> dict[str, Any]:
    return {
        "aim": aim,
        "value": float(bound.exact),
        "exact": f"{bound.exact.numerator}/{bound.exact.denominator}",
        "argument": bound.argument,
        "certificate": bound.certificate,
        "made": bound.made,
        "versions": dict(bound.versions),
    }


def _run(run: Run, aim: str) -> dict[str, Any]:
    return {
        "made": run.made,
        "seed": run.seed,
        "workers": run.workers,
        "limit_seconds": run.limit_seconds,
        "limit_moves": run.limit_moves,
        "moves": run.moves,
        "seconds": run.seconds,
        "ended_by": run.ended_by,
        "score": run.score,
        "efficiency": efficiency_of(aim, run.score),
        "start": run.start,
        "versions": dict(run.versions),
        "uid": run.uid,
    }


def _issued(one: IssuedPlan, aim: str) -> dict[str, Any]:
    return {
        "mark": one.mark,
        "score": one.score,
        "efficiency": efficiency_of(aim, one.score),
        "contents": _lists(one.contents),
        "made": one.made,
    }


def _lists(contents: Contents) -> list[list[int]]:
    return [list(block) for block in contents]


def shown_from(content: Mapping[str, Any], trial: Trial) -> Shown:
    """The record of a document whose claims about the trial were proved.

    Parameters
    ----------
    content : the document
    trial : its trial, in canonical numbering

    Raises
    ------
    BadInput : a part of it is missing, or has not its shape
    """
    sizes = tuple(block.plots for block in trial.blocks)
    name = str(content["trial"])
    problem = Problem(content["digest"], content["text"], trial.t, trial.b, trial.land, sizes, name)
    return shown_of(content, problem)


def shown_of(content: Mapping[str, Any], problem: Problem) -> Shown:
    """The record of a document about a problem.

    Raises
    ------
    BadInput : a part of it is missing, or has not its shape
    """
    try:
        plan, bound = content.get("plan"), content.get("bound")
        kept = Kept(
            None if plan is None else rows.plan_from(_row("plan", plan, rows.PLAN), problem, content["aim"]),
            None if bound is None else rows.bound_from(_row("bound", bound, rows.BOUND)),
        )
        runs = tuple(rows.run_from(_row("runs", run, rows.RUN)) for run in content["runs"])
        issued = tuple(
            rows.issued_from(_row("issued", one, rows.ISSUED), problem, content["aim"])
            for one in content["issued"]
        )
    except Damaged as damage:
        raise BadInput(f"{damage} has not the form that it must have") from damage
    return Shown(problem, content["aim"], kept, runs, issued)


def _row(part: str, content: Any, types: Types) -> rows.Row:
    """A part of a document as the row of a table."""
    if not isinstance(content, dict):
        raise Damaged(part)
    values = []
    for key, kinds in types.items():
        value = content.get(key)
        if key in ("contents", "versions", "certificate"):
            value = canonical_json(value)
        elif key == "balanced":
            value = int(value is True)
        elif type(value) is int and kinds in (float, (float, type(None))):
            value = float(value)
        elif isinstance(value, bool):
            raise Damaged(f"{part}.{key}")
        values.append(value)
    try:
        rows.typed(tuple(values), types)
    except Damaged as damage:
        raise Damaged(f"{part}.{damage}") from damage
    return tuple(values)


def table(entries: Iterable[Entry]) -> Iterator[str]:
    """The list as lines of CSV; no cell can be taken for a formula."""
    yield _csv_line(COLUMNS)
    for entry in entries:
        yield _csv_line(
            (
                entry.digest,
                entry.name,
                entry.t,
                entry.b,
                entry.n,
                _sizes(entry.sizes),
                entry.aim,
                entry.score,
                entry.bound,
                entry.gap_percent,
                entry.standing,
                entry.mark,
                entry.made,
                entry.runs,
            )
        )


def _sizes(sizes: tuple[int, ...]) -> str:
    """Plots of the blocks, equal ones counted: `6 × 4, 2 × 3`."""
    counts = {size: sizes.count(size) for size in sorted(set(sizes), reverse=True)}
    return ", ".join(f"{many} × {size}" for size, many in counts.items())


def _csv_line(cells: Iterable[Any]) -> str:
    line = io.StringIO()
    csv.writer(line).writerow([harmless(cell) if isinstance(cell, str) else cell for cell in cells])
    return line.getvalue()


def harmless(text: str) -> str:
    """A text that no spreadsheet runs as a formula: an apostrophe stands before one that could be."""
    return f"'{text}" if text.lstrip(" ").startswith(BEGINS_A_FORMULA) else text
