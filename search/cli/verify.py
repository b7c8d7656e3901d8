"""`evenfield verify`: rules, score and certificate proved again from the plan file alone."""

from __future__ import annotations

from pathlib import Path
from typing import TYPE_CHECKING

import click

from search.cli.output import emit, indented, page

if TYPE_CHECKING:
    from search.proof.records import Verdict

REFUTED = 1


@click.command("verify")
@click.argument("plan", type=click.Path(path_type=Path))
@click.option("--exhaust", is_flag=True, help="Repeat a proof by exhaustion too; this may take minutes.")
@click.option("--json", "as_json", is_flag=True, help="One JSON document on standard output.")
def command(plan: Path, exhaust: bool, as_json: bool) -> int:
    """Prove every claim of PLAN (a plan.json) again, in exact arithmetic."""
    from search.proof.reading import document_of
    from search.proof.verify import verify

    verdict = verify(document_of(plan), exhaust)
    if as_json:
        status = 0 if verdict.holds else REFUTED
        emit("verify", "proved" if verdict.holds else "refuted", verdict.document(), status)
    else:
        console = page()
        for finding in verdict.findings:
            mark = "✗" if not finding.ok else "○" if finding.on_trust else "✓"
            indented(console, str(finding), mark, "" if finding.ok else "bold")
        console.print(f"\n{_verdict(verdict)}", style="bold")
    return 0 if verdict.holds else REFUTED


def _verdict(verdict: Verdict) -> str:
    if not verdict.holds:
        return "This plan is refuted."
    if verdict.on_trust:
        return "Every claim of this plan holds, as far as it was proved again: see what is marked ○."
    return "Every claim of this plan holds."
