"""`evenfield packet`: the crew's documents alone, from a plan file."""

from __future__ import annotations

from pathlib import Path

import click

from search.cli.output import emit, page


@click.command("packet")
@click.argument("plan", type=click.Path(path_type=Path))
@click.option("--out", type=click.Path(path_type=Path), required=True, help="Folder for the packet.")
@click.option("--layout-seed", type=click.IntRange(0, 2**63 - 1), help="Draw a new layout with this seed.")
@click.option("--json", "as_json", is_flag=True, help="One JSON document on standard output.")
def command(plan: Path, out: Path, layout_seed: int | None, as_json: bool) -> int:
    """Draw the packet of PLAN (a plan.json) again.

    With --layout-seed the plots are drawn anew: that is another plan with a mark of its own, and its
    plan.json goes into the folder too.
    """
    from search.field.redraw import redraw

    issued = redraw(plan, out, layout_seed)
    if as_json:
        emit("packet", "written", {"mark": issued.document["mark"], "files": [str(p) for p in issued.files]})
        return 0
    console = page()
    console.print(f"Packet of plan {issued.document['mark']}")
    for path in issued.files:
        console.print(f"  {path}", soft_wrap=True)
    return 0
