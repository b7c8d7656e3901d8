"""`evenfield new`: a first trial file from a few questions or options."""

from __future__ import annotations

import sys
from pathlib import Path

import click

from search.cli.output import emit, page
from search.foundation.errors import BadInput


@click.command("new")
@click.argument("file", type=click.Path(path_type=Path), required=False)
@click.option("--name", help="Name of the trial.  [default: My trial]")
@click.option("--treatments", help="How many, or their names: 'Arlen, Bracken, Clover'.")
@click.option("--bays", type=click.IntRange(1, 5000), help="How many bays (blocks).")
@click.option("--plots", help="Plots of each bay: 8, or one number for each: 8,8,7.")
@click.option("--json", "as_json", is_flag=True, help="One JSON document on standard output; no questions.")
def command(
    file: Path | None,
    name: str | None,
    treatments: str | None,
    bays: int | None,
    plots: str | None,
    as_json: bool,
) -> int:
    """Write a commented trial FILE that `evenfield plan` accepts as it stands.

    What no option tells is asked. Without FILE it is named after the trial, in the working folder. A file
    that is there already stays as it is.
    """
    asking = not as_json
    name = name or (_asked("Name of the trial", "My trial") if asking and not treatments else "My trial")
    treatments = treatments or _required("--treatments", "How many treatments, or their names", "9", asking)
    sizes = plots or _required("--plots", "Plots of a bay, or one number for each bay", "4", asking)
    many = len(sizes.split(","))
    if bays is None and many == 1:
        bays = int(_required("--bays", "How many bays", "8", asking) or 0)

    from search.runs.starting import write_first

    written = write_first(file, name, treatments, sizes, bays)
    if as_json:
        emit("new", "written", {"file": str(written)})
        return 0
    console = page()
    console.print(f"{written} is written. Look through it, then:", soft_wrap=True)
    console.print(f"  evenfield inspect {written}\n  evenfield plan {written}", soft_wrap=True)
    return 0


def _required(option: str, question: str, usual: str, asking: bool) -> str:
    if not asking:
        raise BadInput(f"{option} is missing: with --json nothing is asked")
    return _asked(question, usual)


def _asked(question: str, usual: str) -> str:
    click.echo(f"{question} [{usual}]: ", nl=False, err=True)
    answer = sys.stdin.readline()
    if not answer:
        raise BadInput("nobody is there to answer: give the options; `evenfield new --help` lists them")
    return answer.strip() or usual
