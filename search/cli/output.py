"""What every command prints: a page for people, or one JSON document; failures in both forms."""

from __future__ import annotations

import json
import os
import sys
from collections.abc import Mapping
from typing import TYPE_CHECKING, Any

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


def emit(command: str, status: str, content: Mapping[str, Any]) -> None:
    """Print the one JSON document of a command on standard output."""
    document = {"format": f"evenfield {command} 1", "status": status, "faults": [], **content}
    json.dump(document, sys.stdout, ensure_ascii=False, indent=1, allow_nan=False)
    sys.stdout.write("\n")


def failure(command: str, status: str, message: str, exit_status: int, as_json: bool) -> int:
    """Tell that a command failed, in the form asked for, and hand its exit status on."""
    if as_json:
        emit(command, status, {"message": message})
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
        content |= {"causes": list(error.causes), "shown_by": error.shown_by}
    emit(command, error.status, content)
    return error.exit_status


def _in_words(error: EvenfieldError) -> str:
    if isinstance(error, FaultyTrial):
        count = len(error.faults)
        head = "one fault" if count == 1 else f"{count} faults"
        return f"the file has {head}\n\n" + "\n\n".join(str(fault) for fault in error.faults)
    if isinstance(error, Impossible):
        causes = "\n".join(f"  - {cause}" for cause in error.causes)
        return f"no plan obeys the rules of this trial (shown by: {error.shown_by})\n{causes}"
    return str(error)
