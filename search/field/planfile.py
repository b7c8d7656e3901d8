"""plan.json: one plan with its layout, its score and what proves it, written once and read as untrusted."""

from __future__ import annotations

import json
from datetime import UTC, datetime
from pathlib import Path
from typing import TYPE_CHECKING

from search.field.planmark import mark_of, seal_of
from search.field.planshape import Document, misfit
from search.field.randomise import Planted, PlotMap
from search.foundation.documents import canonical_json, read_json, write_whole
from search.foundation.errors import BadInput, shown
from search.foundation.versions import versions
from search.trial.reading import trial_from_document
from search.trial.records import Trial
from search.trial.writing import trial_document

if TYPE_CHECKING:
    from search.efficiency.records import Bound, Score
    from search.runs.plan import Plan

FORMAT = "evenfield plan 1"
MOST_BYTES = 32 * 1024 * 1024


def plan_document(plan: Plan, plot_map: PlotMap, issued: datetime) -> Document:
    """The content of plan.json, keys in the order in which a person looks for them.

    Parameters
    ----------
    plan : the plan
    plot_map : its layout
    issued : when the packet was issued; told in UTC
    """
    planted = _planted(plan.trial, plot_map)
    return _sealed(
        {
            "format": FORMAT,
            "mark": mark_of(planted),
            "issued": _moment(issued),
            **planted,
            "score": _score(plan.score),
            "bound": None if plan.bound is None else _bound(plan.bound),
            "gap_percent": plan.gap_percent,
            "standing": str(plan.standing),
            "ended_by": str(plan.ended_by),
            "provenance": {
                "seed": plan.seed,
                "digest": plan.digest,
                "versions": versions(),
                "moves": plan.moves,
                "seconds": plan.seconds,
                "start": plan.start,
            },
        }
    )


def laid_out_anew(document: Document, trial: Trial, plot_map: PlotMap, issued: datetime) -> Document:
    """The document of the same plan with another layout, and so with another mark.

    Parameters
    ----------
    document : the plan as it was issued
    trial : its trial
    plot_map : the new layout
    issued : when it was drawn
    """
    planted = _planted(trial, plot_map)
    return _sealed({**document, **planted, "mark": mark_of(planted), "issued": _moment(issued)})


def _planted(trial: Trial, plot_map: PlotMap) -> Document:
    """The part of a plan that says what is planted where; the mark speaks of it."""
    names = [treatment.name for treatment in trial.treatments]
    blocks = [block.name for block in trial.blocks]
    return {
        "trial": trial_document(trial),
        "blocks": {
            block: [names[i] for i in held] for block, held in zip(blocks, plot_map.contents, strict=True)
        },
        "plots": [
            {
                "plot": planted.place.plot,
                "block": blocks[planted.place.block],
                "line": planted.place.line,
                "place": planted.place.place,
                **_held(planted, names),
            }
            for planted in plot_map.plots
        ],
        "layout": _layout(trial, plot_map),
    }


def _held(planted: Planted, names: list[str]) -> Document:
    """What stands on a plot; filler says so, and so does what was in the soil before."""
    if planted.treatment is None:
        return {"treatment": None, "filler": True}
    held: Document = {"treatment": names[planted.treatment]}
    return held | {"in_soil": True} if planted.in_soil else held


def _layout(trial: Trial, plot_map: PlotMap) -> Document:
    layout: Document = {"seed": plot_map.seed, "scheme": plot_map.scheme}
    restricted = plot_map.restricted
    if restricted is not None:
        layout["restriction"] = {
            "method": restricted.method,
            "uniform": restricted.uniform,
            "told": restricted.told,
            "never": [
                {"plot": plot_map.plots[p].place.plot, "treatment": trial.treatments[i].name}
                for p, i in restricted.never
            ],
            "never_complete": restricted.complete,
        }
    return layout


def _moment(issued: datetime) -> str:
    return issued.astimezone(UTC).strftime("%Y-%m-%dT%H:%M:%SZ")


def _sealed(document: Document) -> Document:
    return {**document, "seal": seal_of(document)}


def write(document: Document, path: Path, *, new: bool = False) -> None:
    """Write a plan, whole or not at all.

    Raises
    ------
    BadInput : the file cannot be written
    FileExistsError : it must be `new`, and a plan is there
    """
    text = json.dumps(document, ensure_ascii=False, indent=1, allow_nan=False) + "\n"
    write_whole(path, text, new=new)


def read_plan(path: Path) -> tuple[Trial, Document]:
    """Read a plan file that anybody may have written.

    Raises
    ------
    BadInput : it cannot be read, is no plan, or its seal or mark does not fit its content
    FaultyTrial : its trial has faults
    """
    document = _parsed(path)
    if document.get("format") != FORMAT:
        raise BadInput(
            f"{path} is no plan that this version reads: its format is "
            f"{shown(str(document.get('format')))}, not {shown(FORMAT)}"
        )
    if wrong := misfit(document):
        raise BadInput(f"{path} is not a whole plan: {wrong}")
    if document["seal"] != seal_of(document):
        raise BadInput(
            f"{path} was changed after it was written: its seal does not fit its content; "
            "take the file that was written with the packet, or plan the trial again"
        )
    if document["mark"] != mark_of(document):
        raise BadInput(
            f"{path} carries the mark {shown(document['mark'])}, its content has "
            f"{mark_of(document)}: paper with the old mark belongs to another layout"
        )
    return trial_from_document(document["trial"]), document


def _parsed(path: Path) -> Document:
    parsed = read_json(path, MOST_BYTES)
    try:
        canonical_json(parsed).encode()  # a lone surrogate or an endless number has no canonical text
    except (ValueError, RecursionError) as error:
        raise BadInput(f"{path} is not a JSON document in UTF-8: {error}") from error
    if not isinstance(parsed, dict):
        raise BadInput(f"{path} is JSON, but not a plan: a plan is an object with keys")
    return parsed


def _score(score: Score) -> Document:
    return {
        "aim": score.aim,
        "A": score.A,
        "D": score.D,
        "worst_pair_efficiency": score.worst_pair_efficiency,
        "average_pair_variance": score.average_pair_variance,
        "largest_pair_variance": score.largest_pair_variance,
        "loss_to_replication_percent": score.loss_to_replication_percent,
        "loss_to_blocks_percent": score.loss_to_blocks_percent,
        "residual_df": score.residual_df,
        "connected": score.connected,
        "meetings": {
            "least": score.least_meetings,
            "most": score.most_meetings,
            "near_balanced": str(score.near_balanced),
        },
    }


def _bound(bound: Bound) -> Document:
    return {
        "aim": str(bound.aim),
        "value": bound.value,
        "argument": bound.argument,
        "exact": f"{bound.exact.numerator}/{bound.exact.denominator}",
        "certificate": bound.certificate,
        **({} if bound.otherwise is None else {"otherwise": _bound(bound.otherwise)}),
    }
