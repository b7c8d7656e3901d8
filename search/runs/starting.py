"""A first trial file, tried before it is written."""

from __future__ import annotations

import re
from dataclasses import replace
from pathlib import Path

from search.foundation.documents import safe_name, write_whole
from search.foundation.errors import BadInput
from search.solvers.start import feasible_start
from search.trial.catalogue import MOST_BLOCKS, MOST_PLOTS
from search.trial.limits import limits
from search.trial.nodes import parse_nodes
from search.trial.reading import trial_from_nodes
from search.trial.starting import first_file
from search.trial.tables import tables

TRY_SECONDS = 5.0


def write_first(file: Path | None, name: str, treatments: str, plots: str, bays: int | None) -> Path:
    """Write a trial file that reads without a fault and for which a plan was found.

    Parameters
    ----------
    file : where to; None for a file named after the trial in the working folder
    name : of the trial
    treatments : their number, or their names with commas between them
    plots : plots of every bay, or of each with commas between them
    bays : how many; None where `plots` tells

    Raises
    ------
    BadInput : answers that make no trial, or a file that is there already
    FaultyTrial : a name that no trial file may have
    Impossible, Undecided : no plan for such numbers, or none found in a few seconds
    """
    sizes = _sizes(plots, bays)
    path = file or Path(f"{safe_name(name)}.yaml")
    text = first_file(name, _treatments(treatments), sizes)
    trial = trial_from_nodes(parse_nodes(text, str(path)), str(path))
    if trial.n < trial.t:
        raise BadInput(f"{trial.t} treatments need {trial.t} plots or more, and there are {trial.n}")
    implied = limits(trial)
    rules = replace(tables(trial), least=implied.least, most=implied.most)
    feasible_start(trial, rules, implied, seed=1, seconds=TRY_SECONDS)
    if path.exists():
        raise BadInput(f"{path} is there already and stays as it is; choose another name")
    write_whole(path, text)
    return path


def _treatments(answer: str) -> int | list[str]:
    if re.fullmatch(r"\s*[0-9]{1,9}\s*", answer):
        return int(answer)
    names = [name.strip() for name in answer.split(",") if name.strip()]
    if len(names) < 2:
        raise BadInput("a trial compares two treatments or more: a number, or names with commas between them")
    return names


def _sizes(plots: str, bays: int | None) -> list[int]:
    parts = [part.strip() for part in plots.split(",")]
    if not all(re.fullmatch(r"[0-9]{1,6}", part) and 0 < int(part) <= MOST_PLOTS for part in parts):
        raise BadInput(f"plots of a bay: whole numbers from 1 to {MOST_PLOTS:,}, such as 8 or 8,8,7")
    if len(parts) > 1 and bays not in (None, len(parts)):
        raise BadInput(
            f"{bays} bays, but {len(parts)} numbers of plots: leave --bays out, or give one number"
        )
    many = len(parts) if len(parts) > 1 else bays or 0
    if not 0 < many <= MOST_BLOCKS:
        raise BadInput(f"bays: from 1 to {MOST_BLOCKS:,}")
    return [int(part) for part in parts] if len(parts) > 1 else [int(parts[0])] * many
