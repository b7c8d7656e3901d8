"""`evenfield inspect`: what the file says, what its rules imply, and whether they can be met."""

from __future__ import annotations

from collections import Counter
from pathlib import Path
from typing import Any

import click

from search.cli.output import emit, indented, page
from search.designs.conditions import Balanced
from search.runs.inspection import Inspection
from search.trial.records import Trial

EXIT = {"possible": 0, "impossible": 3, "undecided": 4}


@click.command("inspect")
@click.argument("trial", type=click.Path(path_type=Path))
@click.option(
    "--seconds",
    type=click.FloatRange(0.01, 1e6),
    default=20.0,
    show_default=True,
    help="Time to decide whether the rules can be met.",
)
@click.option("--json", "as_json", is_flag=True, help="One JSON document on standard output.")
def command(trial: Path, seconds: float, as_json: bool) -> int:
    """Check a trial file, and tell what its rules imply and whether they can be met."""
    from search.runs.inspection import inspect
    from search.trial.reading import read_trial

    record = read_trial(trial)
    found = inspect(record, seconds=seconds)
    if as_json:
        emit("inspect", found.status, document(record, found))
    else:
        show(record, found)
    return EXIT[found.status]


def sizes_in_words(trial: Trial) -> str:
    """Block sizes, such as "5 blocks of 8, 1 of 7"."""
    counts = sorted(Counter(block.plots for block in trial.blocks).items(), reverse=True)
    first, *rest = (f"{many} {'blocks' if many > 1 else 'block'} of {size}" for size, many in counts)
    return ", ".join([first, *(words.replace(" blocks", "").replace(" block", "") for words in rest)])


def document(trial: Trial, found: Inspection) -> dict[str, Any]:
    """The inspection as JSON data."""
    implied = found.implied
    return {
        "trial": trial.name,
        "treatments": trial.t,
        "plots": trial.n,
        "blocks": {block.name: block.plots for block in trial.blocks},
        "aim": trial.aim.kind.value,
        "plots_each": {
            treatment.name: {
                "stated": [treatment.least, treatment.most],
                "implied": None if implied is None else [int(implied.least[i]), int(implied.most[i])],
            }
            for i, treatment in enumerate(trial.treatments)
        },
        "implied": [] if implied is None else list(implied.told),
        "balanced": {
            "sentence": found.balanced,
            "design": None if found.design is None else _design(found.design),
            "fewest": None if found.fewest is None else _design(found.fewest),
            "near": [_design(design) for design in found.near],
        },
        "causes": list(found.causes),
        "shown_by": found.shown_by,
        "residual_df": found.residual_df,
        "warnings": list(found.warnings),
    }


def _design(design: Balanced) -> dict[str, Any]:
    return {
        "treatments": design.t,
        "blocks": design.b,
        "block_size": design.k,
        "replication": design.r,
        "meetings": design.meetings,
        "efficiency": float(design.efficiency),
    }


def show(trial: Trial, found: Inspection) -> None:
    """The inspection as a page that a planner reads."""
    console = page()
    console.print(trial.name, style="bold")
    indented(console, f"{trial.t} treatments on {trial.n} plots: {sizes_in_words(trial)}")
    indented(console, _replication(trial))
    indented(console, f"aim: {trial.aim.kind.value}")
    if found.implied is not None and found.implied.told:
        console.print("\nWhat the rules imply", style="bold")
        for sentence in found.implied.told:
            indented(console, sentence, "-")
    console.print("\nBalance", style="bold")
    indented(console, found.balanced)
    if found.fewest is not None and found.fewest != found.design:
        indented(console, f"The smallest that the counts allow for these numbers: {_in_words(found.fewest)}.")
    if found.near:
        indented(console, "Near sizes that the counts allow:")
        for design in found.near:
            indented(console, _in_words(design), "-")
    console.print("\nCan the rules be met?", style="bold")
    if found.status == "possible":
        indented(console, f"Yes: a plan that obeys them all was found ({found.shown_by}).")
    else:
        words = "No" if found.status == "impossible" else "Not decided"
        indented(console, f"{words}{f' (shown by: {found.shown_by})' if found.shown_by else ''}:")
        for cause in found.causes:
            indented(console, cause, "-")
    console.print("\nBefore you search", style="bold")
    indented(console, f"{found.residual_df} residual degrees of freedom if the plan is connected")
    for warning in found.warnings:
        indented(console, warning, "!", "yellow")


def _in_words(design: Balanced) -> str:
    meets = "one block" if design.meetings == 1 else f"{design.meetings} blocks"
    return (
        f"{design.t} treatments in {design.b} blocks of {design.k}, {design.r} plots each, "
        f"every pair together in {meets}, efficiency {float(design.efficiency):.4f}"
    )


def _replication(trial: Trial) -> str:
    groups: dict[tuple[int, int], list[str]] = {}
    for treatment in trial.treatments:
        groups.setdefault((treatment.least, treatment.most), []).append(treatment.name)
    parts = []
    for (least, most), names in sorted(groups.items(), key=lambda item: -len(item[1])):
        plots = str(least) if least == most else f"{least} to {most}"
        who = ", ".join(names) if len(names) <= 3 else f"{len(names)} treatments"
        parts.append(f"{plots} plots for {who}")
    how = " (as even as the plots allow)" if trial.even else ""
    return "; ".join(parts) + how
