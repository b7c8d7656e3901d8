"""A finished plan as a planner reads it on the screen."""

from __future__ import annotations

from pathlib import Path
from typing import TYPE_CHECKING, Any

from search.cli.output import indented, shortened
from search.efficiency.comparing import in_figures
from search.field.cautions import office_notes
from search.field.standing import plots_planted, standing_in_words
from search.trial.records import Trial

if TYPE_CHECKING:
    from rich.console import Console

    from search.field.issue import Issued

ENDED = {
    "bound met": "plan and bound met",
    "moves": "the limit in moves was reached",
    "seconds": "the time was up",
    "interrupted": "interrupted, best so far kept",
}


def show_plan(console: Console, issued: Issued) -> None:
    """Standing, figures, warnings, and where the files lie."""
    from rich.table import Table

    trial, document = issued.trial, issued.document
    console.print(f"\nPlan {document['mark']}", style="bold")
    for sentence in standing_in_words(document, plots_planted(document)):
        indented(console, sentence)
    grid = Table.grid(padding=(0, 2, 0, 0))
    grid.add_column(width=2)
    grid.add_column()
    grid.add_column()
    for name, value in _figures(trial, document):
        grid.add_row("", name, value)
    console.print()
    console.print(grid)
    for note in office_notes(trial, document):
        indented(console, note, "!", "yellow")
    console.print()
    for path in issued.files:
        console.print(f"  {_near(path)}", soft_wrap=True)


def _figures(trial: Trial, document: dict[str, Any]) -> list[tuple[str, str]]:
    score, bound, run = document["score"], document["bound"], document["provenance"]
    aim = trial.aim.kind
    rows = [
        ("sum of squared meetings", in_figures(aim, score["aim"]))
        if aim.counts_meetings
        else (f"efficiency, {aim.value}", in_figures(aim, score["aim"]))
    ]
    if bound is not None:
        limit = "at least" if aim.counts_meetings else "at most"
        rows.append((f"best possible, {limit}", f"{in_figures(aim, bound['value'])} ({bound['argument']})"))
    if document["gap_percent"] is not None:
        rows.append(("gap", f"{document['gap_percent']:.4f} %, {document['standing']}"))
    if score["average_pair_variance"] is not None:
        least, most = score["meetings"]["least"], score["meetings"]["most"]
        rows += [
            ("A, D, worst pair", f"{score['A']:.4f}, {score['D']:.4f}, {score['worst_pair_efficiency']:.4f}"),
            (
                "lost to blocks",
                f"{score['loss_to_blocks_percent']:.2f} %, to be won back by a smaller plot variance",
            ),
            ("lost to replication", f"{score['loss_to_replication_percent']:.2f} %"),
            ("each pair shares", _blocks(least, most)),
        ]
    df = str(score["residual_df"])
    if trial.blocks_random is not None:
        rows.append(("blocks", f"random, {float(trial.blocks_random):g} times the plot variance"))
        df += " within blocks; the combined analysis has no single number"
    rows.append(("residual degrees of freedom", df))
    rows += _expected(trial, document)
    far = f"{run['seconds']:.1f} s, {run['moves']:,} moves, seed {run['seed']}"
    rows += [("search", f"{far}: {ENDED[document['ended_by']]}"), ("start", shortened(run["start"]))]
    return rows


def _expected(trial: Trial, document: dict[str, Any]) -> list[tuple[str, str]]:
    """Standard error and detectable difference, where the file says what the field is like."""
    from search.efficiency.precision import expected_for_aim, expected_of

    score = document["score"]
    average, largest = score["average_pair_variance"], score["largest_pair_variance"]
    found = expected_of(trial.precision, average, largest, score["residual_df"])
    if found is None:
        return []
    average_pair, worst_pair, unit = found.average_pair, found.worst_pair, found.unit
    precision = trial.precision
    rows = [
        (
            "standard error, two treatments",
            f"{average_pair.standard_error:.3g} {unit} on average, {worst_pair.standard_error:.3g} at worst",
        ),
        (
            "detectable, two treatments",
            f"{average_pair.detectable:.3g} {unit} on average, {worst_pair.detectable:.3g} at worst "
            f"({precision.level_percent:g} % level, {precision.power_percent:g} % power)",
        ),
    ]
    if average_pair.power_percent is not None and worst_pair.power_percent is not None:
        rows.append(
            (
                f"power for {precision.difference:g} {unit}",
                f"{average_pair.power_percent:.0f} % on average, {worst_pair.power_percent:.0f} % at worst",
            )
        )
    aimed = expected_for_aim(trial, score["aim"], score["residual_df"])
    if aimed is not None:
        told = f"standard error {aimed.standard_error:.3g} {unit}, detectable {aimed.detectable:.3g} {unit}"
        rows.insert(0, (f"{trial.aim.kind.value}, on average", told))
    return rows


def _blocks(least: int, most: int) -> str:
    if least == most:
        return "one block" if least == 1 else f"{least} blocks"
    return f"{least} to {most} blocks"


def _near(path: Path) -> str:
    try:
        return str(path.relative_to(Path.cwd()))
    except ValueError:
        return str(path)
