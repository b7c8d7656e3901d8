"""`evenfield kept`: what the store holds."""

from __future__ import annotations

from pathlib import Path
from typing import TYPE_CHECKING, Any

import click

from search.cli.output import emit, page
from search.efficiency.comparing import in_figures
from search.trial.records import AimKind

if TYPE_CHECKING:
    from search.runs.kept import Entry, Run, Shown

STORE = click.option("--store", type=click.Path(path_type=Path), help="File of kept results.")
JSON = click.option("--json", "as_json", is_flag=True, help="One JSON document on standard output.")


@click.group("kept")
def command() -> None:
    """Show what the store of kept results holds."""


@command.command("list")
@STORE
@click.option(
    "--most", type=click.IntRange(1, 100_000), default=100, show_default=True, help="So many lines."
)
@JSON
def list_(store: Path | None, most: int, as_json: bool) -> int:
    """List kept plans, the latest first."""
    from search.runs.store import DEFAULT_PATH, Store

    with Store(store or DEFAULT_PATH, create=False) as kept:
        entries, count = kept.list(most), kept.count()
    if as_json:
        emit("kept", "listed", {"count": count, "plans": [_entry(entry) for entry in entries]})
        return 0
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
    console = page()
    console.print(table)
    console.print(f"{len(entries)} of {count} kept plans" if count != 1 else "1 kept plan")
    return 0


@command.command("show")
@click.argument("problem")
@STORE
@JSON
def show(problem: str, store: Path | None, as_json: bool) -> int:
    """Show all that is kept of PROBLEM (the first letters of its digest, or the mark of a plan)."""
    from search.runs.store import DEFAULT_PATH, Store

    with Store(store or DEFAULT_PATH, create=False) as kept:
        found = kept.show(problem)
    if as_json:
        emit("kept", "shown", {"problems": [_shown(one) for one in found]})
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
    for run in one.runs:
        console.print(
            f"  {run.made}  seed {run.seed}, {run.moves:,} moves in {run.seconds:.1f} s: "
            f"{in_figures(one.aim, run.score)}, ended by {run.ended_by}"
        )


def _entry(entry: Entry) -> dict[str, Any]:
    return {
        "digest": entry.digest,
        "trial": entry.name,
        "treatments": entry.t,
        "blocks": entry.b,
        "plots": entry.n,
        "aim": entry.aim,
        "score": entry.score,
        "efficiency": _efficiency(entry.aim, entry.score),
        "bound": entry.bound,
        "gap_percent": entry.gap_percent,
        "mark": entry.mark,
        "made": entry.made,
        "runs": entry.runs,
    }


def _shown(one: Shown) -> dict[str, Any]:
    problem, plan, bound = one.problem, one.kept.plan, one.kept.bound
    return {
        "digest": problem.digest,
        "trial": problem.name,
        "treatments": problem.t,
        "blocks": problem.b,
        "plots": problem.n,
        "sizes": list(problem.sizes),
        "aim": one.aim,
        "plan": None
        if plan is None
        else {
            "score": plan.score,
            "efficiency": _efficiency(one.aim, plan.score),
            "contents": [list(block) for block in plan.contents],
            "seed": plan.seed,
            "moves": plan.moves,
            "seconds": plan.seconds,
            "start": plan.start,
            "mark": plan.mark,
            "made": plan.made,
            "versions": dict(plan.versions),
        },
        "bound": None
        if bound is None
        else {
            "value": float(bound.exact),
            "exact": f"{bound.exact.numerator}/{bound.exact.denominator}",
            "argument": bound.argument,
            "certificate": bound.certificate,
        },
        "gap_percent": one.kept.gap_percent(one.aim),
        "runs": [_run(run, one.aim) for run in one.runs],
    }


def _run(run: Run, aim: str) -> dict[str, Any]:
    return {
        "made": run.made,
        "seed": run.seed,
        "workers": run.workers,
        "moves": run.moves,
        "seconds": run.seconds,
        "ended_by": run.ended_by,
        "score": run.score,
        "efficiency": _efficiency(aim, run.score),
        "start": run.start,
    }


def _efficiency(aim: str, score: float) -> float | None:
    """The score of an aim that has an efficiency."""
    return None if aim == AimKind.EVEN_MEETINGS else score
