"""`evenfield verify`: rules, score and certificate proved again from the plan file alone."""

from __future__ import annotations

from pathlib import Path

import click

from search.cli.output import emit, indented, page

REFUTED = 1


@click.command("verify")
@click.argument("plan", type=click.Path(path_type=Path))
@click.option("--json", "as_json", is_flag=True, help="One JSON document on standard output.")
def command(plan: Path, as_json: bool) -> int:
    """Prove every claim of PLAN (a plan.json) again, in exact arithmetic."""
    from search.proof.reading import document_of
    from search.proof.verify import verify

    verdict = verify(document_of(plan))
    if as_json:
        status = 0 if verdict.holds else REFUTED
        emit("verify", "proved" if verdict.holds else "refuted", verdict.document(), status)
    else:
        console = page()
        for finding in verdict.findings:
            indented(console, str(finding), "✓" if finding.ok else "✗", "" if finding.ok else "bold")
        console.print(
            "\nEvery claim of this plan holds." if verdict.holds else "\nThis plan is refuted.", style="bold"
        )
    return 0 if verdict.holds else REFUTED
