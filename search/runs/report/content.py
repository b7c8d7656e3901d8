"""What the page of a sweep tells, as plain data: the rows with their figures, and their plans."""

from __future__ import annotations

from collections import Counter
from collections.abc import Sequence
from statistics import median_high
from typing import Any

from search.runs.plan import Plan, Standing
from search.runs.row_figures import flags, shows
from search.runs.sweep_records import RowResult, RowStatus
from search.trial.records import Trial

MOST_PLOTS = 2_000_000
"""Plots of all plans together that the page carries; beyond it would open too slowly."""
DIGITS = 8
STANDING = {
    Standing.BALANCED: "Balanced: every two treatments are compared equally well, and no plan under these "
    "rules is better.",
    Standing.PROVEN_OPTIMAL: "No plan under these rules is better by even one part in a million; that is "
    "proved.",
    Standing.FEASIBLE: "The plan obeys every rule. How much better another one could be is not known.",
}
APART = "The plan falls into parts that share no block: treatments of different parts cannot be compared."
BOUNDED = "No plan under these rules has an efficiency above the bound; that is proved."


def content(name: str, columns: Sequence[str], rows: Sequence[RowResult]) -> dict[str, Any]:
    """The page's data.

    Keys: name; columns : what varies; names : lists of names that rows refer to by place;
    left_out : plans that the page does not carry; rows, each with what is known of it:
    row, values (one for each column, empty where the row has none), status, reason, clashes;
    t, b, n, least, most (plots of a block), aim; best, bound, gap, standing, told, argument;
    replication, blocks (losses in percent); error, detectable and the same of the worst pair, unit, compared;
    df, df_without (blocks); meetings; flags; start, seed, moves, seconds, kept;
    treatments, block_names (places in names), plan (for each block its treatments, by number).

    Parameters
    ----------
    name : of the sweep
    columns : what varies
    rows : the rows
    """
    names, room = _Names(), _Room(MOST_PLOTS)
    return {
        "name": name,
        "columns": list(columns),
        "rows": [_row(columns, row, names, room) for row in rows],
        "names": names.lists,
        "left_out": room.left_out,
    }


def summary(rows: Sequence[RowResult]) -> str:
    """The sweep in a sentence or two: how rows ended, how much is proved."""
    statuses = Counter(row.status for row in rows)
    told = ", ".join(f"{statuses[status]} {status}" for status in RowStatus if statuses[status])
    plans = [row.plan for row in rows if row.plan is not None]
    sentence = f"{_counted(len(rows), 'row')}: {told}."
    if not plans:
        return sentence
    best = sum(plan.standing in (Standing.BALANCED, Standing.PROVEN_OPTIMAL) for plan in plans)
    gaps = [plan.gap_percent for plan in plans if plan.gap_percent is not None and plan.score.connected]
    sentence += (
        f" {best} of {_counted(len(plans), 'plan')} {'is' if best == 1 else 'are'} the best there can be"
    )
    if not gaps or max(gaps) == 0:
        return f"{sentence}."
    half = f"half of all gaps are at most {median_high(gaps):.2g} %, " if len(gaps) > 2 else ""
    return f"{sentence}; {half}the largest gap is {max(gaps):.2g} %."


def _counted(number: int, word: str) -> str:
    return f"{number:,} {word}{'' if number == 1 else 's'}"


class _Names:
    """Lists of names, each kept once: rows of a sweep share most of theirs."""

    def __init__(self) -> None:
        self.lists: list[list[str]] = []
        self.places: dict[tuple[str, ...], int] = {}

    def place(self, names: tuple[str, ...]) -> int:
        if names not in self.places:
            self.places[names] = len(self.lists)
            self.lists.append(list(names))
        return self.places[names]


class _Room:
    """Counts the plots that the page carries."""

    def __init__(self, plots: int) -> None:
        self.plots = plots
        self.left_out = 0

    def has(self, plots: int) -> bool:
        fits = plots <= self.plots
        self.plots -= plots if fits else 0
        self.left_out += not fits
        return fits


def _row(columns: Sequence[str], result: RowResult, names: _Names, room: _Room) -> dict[str, Any]:
    trial, plan = result.row.trial, result.plan
    row: dict[str, Any] = {
        "row": result.row.number,
        "values": [result.row.values.get(column, "") for column in columns],
        "status": str(result.status),
    }
    if result.reason:
        row["reason"] = result.reason
    if result.clashes:
        row["clashes"] = [clash.document() for clash in result.clashes]
    if trial is not None and trial.blocks:
        row |= _sizes(trial)
    if plan is not None:
        row |= _figures(plan) | {"kept": result.where_from is not None and result.where_from.value == "kept"}
        if room.has(plan.trial.n):
            row |= _plan(plan, names)
    return row


def _sizes(trial: Trial) -> dict[str, Any]:
    sizes = [block.plots for block in trial.blocks]
    return {
        "t": trial.t,
        "b": trial.b,
        "n": trial.n,
        "least": min(sizes),
        "most": max(sizes),
        "aim": str(trial.aim.kind),
    }


def _figures(plan: Plan) -> dict[str, Any]:
    found, bound, expected = plan.score, plan.bound, shows(plan)
    figures: dict[str, Any] = {
        "best": _short(found.aim),
        "bound": None if bound is None else _short(bound.value),
        "gap": None if plan.gap_percent is None else _short(plan.gap_percent),
        "standing": str(plan.standing),
        "told": _told(plan),
        "argument": "" if bound is None else bound.argument,
        "df": found.residual_df,
        "df_without": plan.trial.n - plan.trial.t,
        "meetings": [found.least_meetings, found.most_meetings],
        "flags": [[flag.short, flag.told] for flag in flags(plan)],
        "start": plan.start,
        "seed": plan.seed,
        "moves": plan.moves,
        "seconds": round(plan.seconds, 2),
    }
    if found.connected:
        figures |= {
            "replication": _short(found.loss_to_replication_percent),
            "blocks": _short(found.loss_to_blocks_percent),
        }
    if expected is not None:
        figures |= {
            "compared": expected.compared,
            "unit": expected.unit,
            "error": _short(expected.standard_error),
            "detectable": None if expected.detectable is None else _short(expected.detectable),
            "error_worst": _short(expected.standard_error_worst_pair),
            "detectable_worst": None
            if expected.detectable_worst_pair is None
            else _short(expected.detectable_worst_pair),
        }
    return figures


def _told(plan: Plan) -> str:
    if not plan.score.connected:
        return APART
    return STANDING.get(plan.standing, BOUNDED)


def _plan(plan: Plan, names: _Names) -> dict[str, Any]:
    trial = plan.trial
    return {
        "treatments": names.place(tuple(treatment.name for treatment in trial.treatments)),
        "block_names": names.place(tuple(block.name for block in trial.blocks)),
        "plan": "|".join(" ".join(map(str, block)) for block in plan.contents),
    }


def _short(value: float) -> float:
    return float(f"{value:.{DIGITS}g}")
