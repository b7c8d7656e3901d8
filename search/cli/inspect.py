"""`evenfield inspect`: what will be planted, what the rules force, and whether they can be met."""

from __future__ import annotations

from collections import Counter
from collections.abc import Iterator
from dataclasses import asdict
from pathlib import Path
from typing import TYPE_CHECKING, Any

import click

from search.cli.clashes import clash_lines
from search.cli.output import emit, indented, page
from search.designs.conditions import Balanced
from search.runs.inspection import Inspection
from search.runs.prospects import Prospects
from search.trial.records import Trial

if TYPE_CHECKING:
    from rich.console import Console

LISTED = 6
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
    from search.field.beside import refuse_clash_in_soil
    from search.runs.inspection import inspect
    from search.trial.reading import read_trial

    record = read_trial(trial)
    refuse_clash_in_soil(record)
    found = inspect(record, seconds=seconds)
    if as_json:
        emit("inspect", found.status, document(record, found), EXIT[found.status])
    else:
        show(record, found)
    return EXIT[found.status]


def sizes_in_words(trial: Trial) -> str:
    """Block sizes, such as "5 blocks of 8, 1 of 7, 1 of at most 9"."""
    sizes = Counter((not block.may_be_emptier, block.plots) for block in trial.blocks)
    first, *rest = (
        f"{many} {'blocks' if many > 1 else 'block'} of {'' if exact else 'at most '}{size}"
        for (exact, size), many in sorted(sizes.items(), reverse=True)
    )
    return ", ".join([first, *(words.replace(" blocks", "").replace(" block", "") for words in rest)])


def document(trial: Trial, found: Inspection) -> dict[str, Any]:
    """The inspection as JSON data."""
    implied = found.implied
    return {
        "trial": trial.name,
        "treatments": trial.t,
        "plots": trial.n,
        "filler": {
            "blocks": [block.name for block in trial.blocks if block.may_be_emptier],
            "planted": None if implied is None else list(implied.planted),
        },
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
        "clashes": [clash.document() for clash in found.clashes],
        "never_meeting": [[trial.treatments[i].name for i in pair] for pair in found.never_meeting],
        "residual_df": found.residual_df,
        "prospects": None if found.prospects is None else asdict(found.prospects),
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
    for sentence in planted(trial):
        indented(console, sentence)
    forced = list(found.implied.told) if found.implied is not None else []
    forced += list(_never_meeting(trial, found))
    if forced:
        console.print("\nWhat the rules force", style="bold")
        for sentence in forced:
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
    _show_verdict(console, found)
    console.print("\nBefore you search", style="bold")
    for sentence in _expected(trial, found):
        indented(console, sentence)
    for warning in found.warnings:
        indented(console, warning, "!", "yellow")


def planted(trial: Trial) -> Iterator[str]:
    """What will be planted, in sentences."""
    most = "at most " if trial.may_be_emptier else ""
    yield f"{trial.t} treatments on {most}{trial.n} plots: {sizes_in_words(trial)}"
    yield _replication(trial)
    if trial.controls:
        yield f"control: {', '.join(trial.treatments[i].name for i in trial.controls)}"
    rules = {
        "never_share_block": len(trial.rules.never_share_block),
        "meet_at_least": len(trial.rules.meet_at_least),
        "meet_at_most": len(trial.rules.meet_at_most),
        "keep_out": len(trial.rules.keep_out),
        "must_hold": len(trial.rules.must_hold),
        "replicates": len(trial.rules.replicates),
        "planted": len(trial.rules.planted),
    }
    told = ", ".join(f"{word} {many}" for word, many in rules.items() if many)
    once = "twice in a block allowed" if trial.rules.twice_in_block else "each once in a block"
    yield f"rules: {told}; {once}" if told else f"rules: none; {once}"
    yield f"aim: {trial.aim.kind.value}"


def _never_meeting(trial: Trial, found: Inspection) -> Iterator[str]:
    pairs = [" and ".join(trial.treatments[i].name for i in pair) for pair in found.never_meeting]
    if pairs:
        more = f" and {len(pairs) - LISTED} more pairs" if len(pairs) > LISTED else ""
        yield f"can never meet, whatever the plan: {'; '.join(pairs[:LISTED])}{more}"


def _show_verdict(console: Console, found: Inspection) -> None:
    if found.status == "possible":
        indented(console, f"Yes: a plan that obeys them all was found ({found.shown_by}).")
        return
    if found.status == "undecided":
        indented(console, f"Not decided: {'; '.join(found.causes)}")
        return
    indented(console, "No plan obeys them.")
    for clash in found.clashes:
        console.print()
        for sentence in clash_lines(clash, len(found.clashes) == 1):
            indented(console, sentence.strip(" -"), "-" if sentence.startswith(" ") else "")


def _expected(trial: Trial, found: Inspection) -> Iterator[str]:
    yield f"{found.residual_df} residual degrees of freedom if the plan is connected"
    hoped = found.prospects
    if hoped is None:
        return
    if hoped.aim.counts_meetings:
        yield _expected_meetings(hoped)
    elif hoped.bound is not None:
        first = f"the first plan found has {hoped.first:.4f}"
        first = first if hoped.first else "the first plan is disconnected"
        yield f"efficiency: at best {hoped.bound:.4f} ({hoped.argument}); {first}, a search will better it"
    if hoped.at_best is None and hoped.with_first is None:
        yield "no difference can be tested: no residual degrees of freedom, or no connected plan"
        return
    asked = trial.precision
    parts = [] if hoped.at_best is None else [f"at best {hoped.at_best:.3g} {hoped.unit}"]
    parts += [] if hoped.with_first is None else [f"{hoped.with_first:.3g} {hoped.unit} with the first plan"]
    yield (
        f"detectable difference ({hoped.compared}; {asked.level_percent:g} % level, "
        f"{asked.power_percent:g} % power): {', '.join(parts)}"
    )
    if asked.cv_percent is None:
        yield "with precision: {cv_percent: …, mean: …} in the file it is told in the unit of the trial"


def _expected_meetings(hoped: Prospects) -> str:
    least = "" if hoped.bound is None else f"{hoped.bound:.0f} at best ({hoped.argument}); "
    return f"sum of squared meetings: {least}the first plan found has {hoped.first:.0f}"


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
