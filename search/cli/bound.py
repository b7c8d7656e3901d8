"""`evenfield bound`: how good any plan for a trial could be, by every argument there is."""

from __future__ import annotations

from pathlib import Path
from typing import TYPE_CHECKING, Any

import click

from search.cli.output import emit, indented, page
from search.efficiency.comparing import in_figures, measure
from search.trial.records import Trial

if TYPE_CHECKING:
    from search.efficiency.bounds.registry import Tried


PASSED = "efficiencies that no plan can pass"


@click.command("bound")
@click.argument("trial", type=click.Path(path_type=Path))
@click.option("--json", "as_json", is_flag=True, help="One JSON document on standard output.")
def command(trial: Path, as_json: bool) -> int:
    """Tell how good any plan for a trial could be, with every argument, its value and its time."""
    from search.efficiency.bounds.registry import tried
    from search.trial.limits import limits
    from search.trial.reading import read_trial

    record = read_trial(trial)
    found = list(tried(record, limits(record)))
    if as_json:
        emit("bound", "bounded" if _best(found) else "no bound", document(record, found))
    else:
        show(record, found)
    return 0


def _best(found: list[Tried]) -> Tried | None:
    best: Tried | None = None
    for one in found:
        if one.bound is not None and one.bound.beats(None if best is None else best.bound):
            best = one
    return best


def document(trial: Trial, found: list[Tried]) -> dict[str, Any]:
    """The bounds as JSON data."""
    best = _best(found)
    return {
        "trial": trial.name,
        "aim": trial.aim.kind.value,
        "best": None if best is None else _row(best),
        "bounds": [_row(one) for one in found],
    }


def _row(one: Tried) -> dict[str, Any]:
    bound = one.bound
    return {
        "argument": one.argument.name,
        "sentence": one.argument.sentence,
        "value": None if bound is None else bound.value,
        "exact": None if bound is None else f"{bound.exact.numerator}/{bound.exact.denominator}",
        "statement": None if bound is None else bound.certificate["statement"],
        "seconds": round(one.seconds, 3),
    }


def show(trial: Trial, found: list[Tried]) -> None:
    """The bounds as a page that a planner reads."""
    console = page()
    console.print(trial.name, style="bold")
    aim = trial.aim.kind
    what = "sums of squared meetings that no plan is below" if aim.counts_meetings else PASSED
    indented(console, f"aim: {aim.value}; {what}, each with its reason")
    best = _best(found)
    for one in found:
        if one.bound is None:
            continue
        value = in_figures(aim, one.bound.value)
        mark = "*" if one is best else ""
        console.print(
            f"\n{mark:1} {value}  {one.argument.name}  ({one.seconds:.2f} s)", style="bold" if mark else ""
        )
        indented(console, one.argument.sentence)
    console.print()
    if best is None or best.bound is None:
        indented(console, f"Nothing bounds the {measure(aim)} of this trial.")
    else:
        statement = best.bound.certificate["statement"]
        which = "highest" if aim.counts_meetings else "lowest"
        indented(console, f"The {which} of them (*) counts: {statement}.")
