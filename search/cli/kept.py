"""`evenfield kept`: what the store holds."""

from __future__ import annotations

from pathlib import Path
from typing import TYPE_CHECKING, Any

import click

from search.cli.output import emit, page
from search.cli.selecting import JSON, STORE, selecting
from search.cli.sharing import export, import_, merge
from search.efficiency.comparing import efficiency_of, in_figures

if TYPE_CHECKING:
    from rich.table import Table

    from search.runs.kept import Entry, Shown
    from search.runs.selection import Selection


@click.group("kept")
def command() -> None:
    """Show what the store of kept results holds, share it, and clear it."""


for _shared in (export, import_, merge):
    command.add_command(_shared)


@command.command("list")
@STORE
@click.option(
    "--most", type=click.IntRange(1, 1_000_000), default=100, show_default=True, help="So many lines."
)
@selecting
@JSON
def list_(store: Path | None, most: int, where: Selection, as_json: bool) -> int:
    """List kept plans, the latest first."""
    from search.runs.store import DEFAULT_PATH, Store

    with Store(store or DEFAULT_PATH, only_reading=True) as kept:
        entries, count = kept.list(most, where), kept.count(where)
    if as_json:
        emit("kept", "listed", {"count": count, "plans": [_entry(entry) for entry in entries]})
        return 0
    console = page()
    console.print(_table(entries))
    console.print(f"{len(entries)} of {count} kept plans" if count != 1 else "1 kept plan")
    return 0


def _table(entries: tuple[Entry, ...]) -> Table:
    from rich.table import Table
    from rich.text import Text

    table = Table(box=None, padding=(0, 2, 0, 0))
    table.add_column("problem", no_wrap=True, min_width=8)
    table.add_column("trial", no_wrap=True, overflow="ellipsis", max_width=40)
    table.add_column("t", justify="right", no_wrap=True)
    table.add_column("plots", justify="right", no_wrap=True)
    table.add_column("aim", no_wrap=True, overflow="ellipsis")
    table.add_column("best", justify="right", no_wrap=True, min_width=10)
    table.add_column("gap %", justify="right", no_wrap=True, min_width=5)
    table.add_column("issued", no_wrap=True, min_width=5)
    table.add_column("runs", justify="right", no_wrap=True)
    for entry in entries:
        gap = entry.gap_percent
        cells = [
            entry.digest[:8],
            entry.name,
            str(entry.t),
            str(entry.n),
            entry.aim,
            in_figures(entry.aim, entry.score),
        ]
        cells += ["" if gap is None else f"{gap:.3f}", entry.mark, str(entry.runs)]
        table.add_row(*map(Text, cells))
    return table


@command.command("show")
@click.argument("problem")
@STORE
@JSON
def show(problem: str, store: Path | None, as_json: bool) -> int:
    """Show all that is kept of PROBLEM (the first letters of its digest, or the mark of a plan)."""
    from search.runs.exchange import document
    from search.runs.store import DEFAULT_PATH, Store

    with Store(store or DEFAULT_PATH, only_reading=True) as kept:
        found = kept.show(problem)
    if as_json:
        emit("kept", "shown", {"problems": [document(one) for one in found]})
        return 0
    console = page()
    for one in found:
        _print(console, one)
    return 0


def _print(console: Any, one: Shown) -> None:
    problem, plan, bound = one.problem, one.kept.plan, one.kept.bound
    console.print(f"{problem.name}, {one.aim}", style="bold")
    console.print(f"  problem {problem.digest}")
    console.print(f"  {problem.t} treatments on {problem.n} plots in {problem.b} blocks")
    if plan is not None:
        issued = f", issued as {plan.mark}" if plan.mark else ""
        reached = in_figures(one.aim, plan.score)
        console.print(f"  best plan  {reached}  seed {plan.seed}, {plan.moves:,} moves, {plan.start}{issued}")
    if bound is not None:
        console.print(f"  bound      {in_figures(one.aim, float(bound.exact))}  {bound.argument}")
    if (gap := one.kept.gap_percent(one.aim)) is not None:
        console.print(f"  gap        {gap:.4f} %")
    for plan_ in one.issued:
        console.print(f"  issued     {in_figures(one.aim, plan_.score)}  {plan_.mark}, {plan_.made}")
    for run in one.runs:
        console.print(
            f"  {run.made}  seed {run.seed}, {run.moves:,} moves in {run.seconds:.1f} s: "
            f"{in_figures(one.aim, run.score)}, ended by {run.ended_by}"
        )


@command.command("prune")
@STORE
@selecting
@click.option("--issued-too", is_flag=True, help="Also results with a plan that was handed to a crew.")
@click.option("--yes", is_flag=True, help="Do it; without this it is only told what would go.")
@JSON
def prune(store: Path | None, where: Selection, issued_too: bool, yes: bool, as_json: bool) -> int:
    """Drop the selected results, with their runs, and give their room back.

    Without --yes nothing is changed. Results with an issued plan stay, unless --issued-too is given.
    """
    from dataclasses import replace

    from search.foundation.errors import BadInput
    from search.runs.store import DEFAULT_PATH, Store

    if where.is_everything:
        raise BadInput(
            "say which results: --older 365, --gap-least 5, …; for all of them --treatments 0-2000"
        )
    if not issued_too:
        if where.issued:
            raise BadInput("results with an issued plan stay, unless --issued-too is given")
        where = replace(where, issued=False)
    path = store or DEFAULT_PATH
    if not yes:
        with Store(path, only_reading=True) as kept:
            count, room = kept.count(where, with_plan=False), False
    else:
        with Store(path, create=False) as kept:
            count = kept.prune(where)
            room = kept.give_room_back()
    if as_json:
        status = "pruned" if yes else "nothing changed"
        emit("kept", status, {"results": count, "pruned": yes, "room_given_back": room})
        return 0
    console, what = page(), "1 result" if count == 1 else f"{count} results"
    if not yes:
        console.print(f"{what} would be dropped from {path}; with --yes they are")
    else:
        console.print(f"{what} dropped from {path}")
        if not room:
            console.print("the file keeps its size, because another program has it open")
    return 0


def _entry(entry: Entry) -> dict[str, Any]:
    return {
        "digest": entry.digest,
        "trial": entry.name,
        "treatments": entry.t,
        "blocks": entry.b,
        "plots": entry.n,
        "aim": entry.aim,
        "score": entry.score,
        "efficiency": efficiency_of(entry.aim, entry.score),
        "bound": entry.bound,
        "gap_percent": entry.gap_percent,
        "standing": entry.standing,
        "mark": entry.mark,
        "made": entry.made,
        "runs": entry.runs,
    }
