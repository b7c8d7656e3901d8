"""`evenfield exists`: is there a balanced design for given numbers, and which?"""

from __future__ import annotations

from collections import Counter
from pathlib import Path
from typing import TYPE_CHECKING, Any

import click

from search.cli.output import aside, emit, indented, page
from search.foundation.errors import BadInput

if TYPE_CHECKING:
    from search.designs.conditions import Balanced
    from search.designs.records import Design, Verdict
    from search.designs.survey import Entry

MOST = 10**6
WIDEST = 1000
"""Numbers in a range."""


class Span(click.ParamType[range]):
    """A whole number, or two with dots between them: 3..30."""

    name = "number or range"

    def convert(self, value: Any, param: click.Parameter | None, ctx: click.Context | None) -> range:
        if isinstance(value, range):
            return value
        first, dots, last = str(value).partition("..")
        try:
            low, high = int(first), int(last if dots else first)
        except ValueError:
            self.fail(f'"{value}" is not a whole number, nor a range such as 3..30', param, ctx)
        if not 0 < low <= high <= MOST:
            self.fail(f'"{value}": give whole numbers from 1 to {MOST}, the smaller one first', param, ctx)
        return range(low, high + 1)


@click.command("exists")
@click.option("--treatments", type=Span(), required=True, help="Treatments, or a range: 3..30.")
@click.option("--block-size", type=Span(), help="Plots of a block, fewer than the treatments.")
@click.option("--blocks", type=click.IntRange(1, MOST), help="Number of blocks.  [default: the fewest]")
@click.option("--meet", type=click.IntRange(1, MOST), help="Blocks that every pair shares.")
@click.option("--replication", type=Span(), help="Plots of each treatment: a table of all sets in range.")
@click.option("--resolvable", is_flag=True, help="The blocks must fall into complete replicates.")
@click.option("--out", type=click.Path(path_type=Path), help="Folder for plan.json, or for the table.")
@click.option("--json", "as_json", is_flag=True, help="One JSON document on standard output.")
def command(
    treatments: range,
    block_size: range | None,
    blocks: int | None,
    meet: int | None,
    replication: range | None,
    resolvable: bool,
    out: Path | None,
    as_json: bool,
) -> int:
    """Tell whether a balanced incomplete block design exists: built, impossible with its reason, or unknown.

    With --replication, or a range of treatments, tell it for every set of numbers that the counts allow.
    """
    if replication is not None or len(treatments) > 1:
        if blocks is not None or meet is not None:
            raise BadInput("--blocks and --meet are for one design; a table takes --replication instead")
        return _table(treatments, block_size, replication, resolvable, out, as_json)
    if block_size is None or len(block_size) > 1:
        raise BadInput("give one --block-size for one design, or --replication for a table")
    return _one(treatments[0], block_size[0], blocks, meet, resolvable, out, as_json)


def _one(
    t: int, k: int, blocks: int | None, meet: int | None, resolvable: bool, out: Path | None, as_json: bool
) -> int:
    from search.designs.existence import exists

    verdict = exists(t, k, blocks=blocks, meetings=meet, resolvable=resolvable)
    files = _issue(verdict.design, out) if out is not None and verdict.design is not None else ()
    if as_json:
        emit("exists", str(verdict.existence), {**verdict_document(verdict), "files": list(map(str, files))})
        return 0
    console = page()
    console.print(_heading(t, k, verdict), style="bold")
    if verdict.sizes is not None:
        indented(console, _in_words(verdict.sizes))
    indented(console, f"{verdict.existence}: {verdict.reason}")
    for path in files:
        indented(console, f"written: {path}")
    return 0


def _heading(t: int, k: int, verdict: Verdict) -> str:
    kind = "Resolvable balanced design" if verdict.resolvable else "Balanced design"
    return f"{kind} for {t} treatments in blocks of {k}"


def _in_words(sizes: Balanced) -> str:
    return (
        f"{_counted(sizes.b, 'block')}, each treatment on {_counted(sizes.r, 'plot')}, every pair in "
        f"{_counted(sizes.meetings, 'block')}, efficiency {float(sizes.efficiency):.4f}"
    )


def _counted(many: int, word: str) -> str:
    return f"{many} {word}" if many == 1 else f"{many} {word}s"


def verdict_document(verdict: Verdict) -> dict[str, Any]:
    """A verdict as JSON data."""
    sizes, design = verdict.sizes, verdict.design
    return {
        "resolvable": verdict.resolvable,
        "reason": verdict.reason,
        "sizes": None if sizes is None else _sizes(sizes),
        "blocks": None if design is None else [[x + 1 for x in block] for block in design.blocks],
        "replicates": None
        if design is None or not design.replicates
        else [[j + 1 for j in replicate] for replicate in design.replicates],
    }


def _sizes(sizes: Balanced) -> dict[str, Any]:
    return {
        "treatments": sizes.t,
        "block_size": sizes.k,
        "blocks": sizes.b,
        "replication": sizes.r,
        "meetings": sizes.meetings,
        "efficiency": float(sizes.efficiency),
    }


def _issue(design: Design, folder: Path) -> tuple[Path, ...]:
    """Write the design as a plan with its packet, treatments and blocks named by number."""
    from search.efficiency.bounds import best_bound
    from search.efficiency.evaluator import score
    from search.field.issue import issue, issued_in
    from search.foundation.stopping import Ended
    from search.runs.conductor import checked
    from search.runs.plan import Plan
    from search.trial.canonical import canonical
    from search.trial.limits import limits
    from search.trial.reading import trial_from_document

    if (found := issued_in(folder)) is not None:
        raise BadInput(f"{folder} holds plan {found.document['mark']}; choose another folder with --out")
    trial = trial_from_document(_trial(design))
    plan = Plan(
        trial=trial,
        contents=design.blocks,
        score=score(trial, design.blocks),
        bound=best_bound(trial, limits(trial)),
        ended_by=Ended.BOUND_MET,
        seed=0,
        moves=0,
        seconds=0.0,
        start=design.construction,
        digest=canonical(trial).digest,
    )
    return issue(checked(plan), folder).files


def _trial(design: Design) -> dict[str, Any]:
    sizes = design.sizes
    document: dict[str, Any] = {
        "trial": f"Balanced design, {sizes.t} treatments in {sizes.b} blocks of {sizes.k}",
        "treatments": sizes.t,
        "blocks": {"count": sizes.b, "plots": sizes.k},
        "plots_each": sizes.r,
    }
    if design.replicates:
        replicates = {
            f"replicate {g}": [f"block {j + 1}" for j in replicate]
            for g, replicate in enumerate(design.replicates, start=1)
        }
        document["rules"] = {"replicates": replicates}
    return document


def _table(
    treatments: range,
    block_sizes: range | None,
    replication: range | None,
    resolvable: bool,
    out: Path | None,
    as_json: bool,
) -> int:
    from search.designs.survey import admissible, as_csv, survey
    from search.foundation.documents import write_whole

    if replication is None:
        raise BadInput("a table needs --replication, such as --replication 2..10")
    for name, span in (("--treatments", treatments), ("--replication", replication)):
        if len(span) > WIDEST or span[-1] > WIDEST:
            raise BadInput(f"{name} {span[0]}..{span[-1]}: a table goes up to {WIDEST}")
    entries: list[Entry] = []
    progress = aside()
    sets = list(admissible(treatments, replication, block_sizes))
    with progress.status("", spinner="line") as status:
        for entry in survey(sets, resolvable=resolvable):
            entries.append(entry)
            status.update(f"{len(entries)} of {len(sets)} sets")
    path = None
    if out is not None:
        path = out / "balanced_designs.csv"
        write_whole(path, as_csv(entries))
    if as_json:
        rows = [
            {"verdict": str(x.verdict.existence), **verdict_document(x.verdict), "seconds": x.seconds}
            for x in entries
        ]
        emit("exists", "table", {"sets": rows, "files": [] if path is None else [str(path)]})
    else:
        _show(entries, path)
    return 0


def _show(entries: list[Entry], path: Path | None) -> None:
    from rich.table import Table

    table = Table(box=None, pad_edge=False)
    for heading in ("t", "k", "r", "b", "meet", "E"):
        table.add_column(heading, justify="right")
    table.add_column("verdict")
    table.add_column("how or why", overflow="fold")
    for entry in entries:
        t, k, r, b, meet, efficiency, verdict, _, reason, _ = entry.row()
        table.add_row(t, k, r, b, meet, f"{float(efficiency):.4f}", verdict, reason)
    console = page()
    console.print(table)
    counts = Counter(str(entry.verdict.existence) for entry in entries)
    told = ", ".join(f"{many} {word}" for word, many in sorted(counts.items()))
    console.print(f"{len(entries)} sets of numbers that the counts allow: {told or 'none'}")
    if path is not None:
        console.print(f"written: {path}")
