"""What every command prints: a page for people, or one JSON document; failures in both forms.

With `--json` standard output holds one JSON document and nothing else, whatever happens:

    format     "evenfield <command> 1"; the number changes when a key changes its meaning
    status     how it ended, a word: possible, planned, proved, … or one of those below
    exit       the exit status of the command
    message    where it failed: what happened, in words; else an empty text
    faults     every mistake of the file: [{file, line, column, key, found, must_hold, why, try}]
    …          what the command has to say; keys are only ever added

    exit  status when it failed    further keys
    1     refuted                  the findings of `verify`
    2     bad file                 faults
    2     bad input                a plan file, a store or an option that cannot be used
    2     workers lost             `sweep` on other machines: rows and files as far as it came
    3     impossible               causes, shown_by,
                                   clashes: [{lines: [{key, line, text}], among, smallest, cause, shown_by,
                                   changes}]
    4     undecided                the time ran out before it was known whether the rules can be met
    70    internal error           a mistake of this program
    130   interrupted              nothing was kept; `plan` keeps the best so far under its own status

Line numbers are 0 where a thing is not said in the file (a default) or the file has no lines.
"""

from __future__ import annotations

import json
import os
import sys
from collections.abc import Mapping
from typing import TYPE_CHECKING, Any

from search.cli.clashes import clash_lines
from search.foundation.errors import EvenfieldError, FaultyTrial, Impossible

if TYPE_CHECKING:
    from rich.console import Console

PIPE_WIDTH = 120


def page() -> Console:
    """Standard output for people; names from files are never read as markup."""
    from rich.console import Console

    # A file or a pipe has no width of its own: wide enough for every table.
    width = None if sys.stdout.isatty() or "COLUMNS" in os.environ else PIPE_WIDTH
    return Console(highlight=False, markup=False, emoji=False, width=width)


def aside() -> Console:
    """Standard error for people: progress and failures."""
    from rich.console import Console

    return Console(stderr=True, highlight=False, markup=False, emoji=False)


def indented(console: Console, text: str, mark: str = "", style: str = "") -> None:
    """Print a paragraph set in by two blanks, after a mark, its later lines aligned."""
    from rich.table import Table
    from rich.text import Text

    grid = Table.grid(padding=(0, 1, 0, 0))
    grid.add_column(width=1)
    grid.add_column(width=1)
    grid.add_column()
    grid.add_row("", mark, Text(text, style=style))
    console.print(grid)


def shortened(text: str, most: int = 80) -> str:
    """A sentence cut to fit a line; the plan file has it whole."""
    return text if len(text) <= most else f"{text[: most - 1].rstrip()}…"


def emit(command: str, status: str, content: Mapping[str, Any], exit_status: int = 0) -> None:
    """Print the one JSON document of a command on standard output."""
    document: dict[str, Any] = {
        "format": " ".join(("evenfield", command, "1") if command else ("evenfield", "1")),
        "status": status,
        "exit": exit_status,
        "message": "",
        "faults": [],
        **content,
    }
    # Whole before the first letter is written: what fails half-way would leave two documents.
    text = json.dumps(document, ensure_ascii=False, indent=1, allow_nan=False)
    sys.stdout.write(text + "\n")


def failure(command: str, status: str, message: str, exit_status: int, as_json: bool) -> int:
    """Tell that a command failed, in the form asked for, and hand its exit status on."""
    if as_json:
        emit(command, status, {"message": message}, exit_status)
    else:
        print(f"evenfield: {message}", file=sys.stderr)
    return exit_status


def report(command: str, error: EvenfieldError, as_json: bool) -> int:
    """Tell what a user did not expect, in the form asked for, and hand the exit status on."""
    if not as_json:
        return failure(command, error.status, _in_words(error), error.exit_status, False)
    content: dict[str, Any] = {"message": str(error)}
    if isinstance(error, FaultyTrial):
        content["faults"] = [fault.document() for fault in error.faults]
    if isinstance(error, Impossible):
        content |= {
            "causes": list(error.causes),
            "shown_by": error.shown_by,
            "clashes": [clash.document() for clash in error.clashes],
        }
    emit(command, error.status, content, error.exit_status)
    return error.exit_status


def _in_words(error: EvenfieldError) -> str:
    if isinstance(error, FaultyTrial):
        count = len(error.faults)
        head = "one fault" if count == 1 else f"{count} faults"
        return f"the file has {head}\n\n" + "\n\n".join(str(fault) for fault in error.faults)
    if isinstance(error, Impossible):
        head = "no plan obeys the rules of this trial"
        if error.clashes:
            alone = len(error.clashes) == 1
            return "\n\n".join([head, *("\n".join(clash_lines(clash, alone)) for clash in error.clashes)])
        causes = "\n".join(f"  - {cause}" for cause in error.causes)
        return f"{head} (shown by: {error.shown_by})\n{causes}"
    return str(error)
