"""Options of the commands about kept results: which store, and which of its results."""

from __future__ import annotations

import re
from collections.abc import Callable
from functools import wraps
from pathlib import Path
from typing import TYPE_CHECKING, Any, TypeVar

import click

from search.foundation.errors import shown
from search.trial.records import AimKind

if TYPE_CHECKING:
    from search.runs.selection import Selection

Command = TypeVar("Command", bound=Callable[..., Any])

STORE = click.option("--store", type=click.Path(path_type=Path), help="File of kept results.")
JSON = click.option("--json", "as_json", is_flag=True, help="One JSON document on standard output.")
STANDINGS = ("balanced", "proven optimal", "bounded", "feasible")


def _span(_: click.Context, option: click.Parameter, value: str | None) -> tuple[int, int] | None:
    """A whole number, or the fewest and the most with a dash between them."""
    if value is None:
        return None
    found = re.fullmatch(r"([0-9]{1,9})(?:-([0-9]{1,9}))?", value, re.ASCII)
    if found is None:
        text = f"{shown(value)} is neither a number, such as 12, nor a range, such as 10-14"
        raise click.BadParameter(text, param=option)
    least = int(found[1])
    return least, int(found[2]) if found[2] else least


PER_CENT = click.FloatRange(0, 100)
DAYS = click.FloatRange(0, 36_500)
OPTIONS = (
    click.option("--name", default="", help="A part of the trial's name."),
    click.option("--treatments", metavar="N or N-M", callback=_span, help="So many treatments."),
    click.option("--blocks", metavar="N or N-M", callback=_span, help="So many blocks."),
    click.option("--aim", type=click.Choice([kind.value for kind in AimKind]), help="This aim."),
    click.option("--standing", type=click.Choice(STANDINGS), help="This standing."),
    click.option("--gap-least", type=PER_CENT, help="A gap of so many per cent or more."),
    click.option("--gap-most", type=PER_CENT, help="A gap of at most so many per cent."),
    click.option("--older", "older_days", type=DAYS, metavar="DAYS", help="Found before so many days."),
    click.option("--newer", "newer_days", type=DAYS, metavar="DAYS", help="Found within so many days."),
    click.option("--issued/--not-issued", default=None, help="With a plan that was issued, or without."),
)
KEYS = (
    "name",
    "treatments",
    "blocks",
    "aim",
    "standing",
    "gap_least",
    "gap_most",
    "older_days",
    "newer_days",
    "issued",
)


def selecting(command: Callable[..., int]) -> Callable[..., int]:
    """Give a command the options that select results; it is called with them as `where`."""

    @wraps(command)
    def selected(**options: Any) -> int:
        from search.runs.selection import Selection

        values = {key: options.pop(key) for key in KEYS}
        values |= {key: values[key] or "" for key in ("aim", "standing")}
        where: Selection = Selection(**values)
        return command(where=where, **options)

    for option in reversed(OPTIONS):
        selected = option(selected)
    return selected
