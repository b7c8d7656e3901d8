"""The command `evenfield`: finds the command, runs it, and turns every ending into an exit status.

0 done   1 refuted   2 bad input   3 impossible   4 undecided   70 our fault   130 interrupted

The form of what is printed is described in `search.cli.output`.
"""

from __future__ import annotations

import os
import sys
import traceback
from collections.abc import Sequence
from importlib import import_module

import click

from search.cli.interrupts import HEARD
from search.cli.output import failure, report
from search.foundation.errors import BadInput, EvenfieldError

COMMANDS = (
    "new",
    "inspect",
    "bound",
    "plan",
    "verify",
    "exists",
    "packet",
    "sweep",
    "kept",
    "schema",
)
INTERNAL = 70
INTERRUPTED = 130


class Commands(click.Group):
    """Imports a command's module when it is called, so that the start stays fast."""

    def list_commands(self, ctx: click.Context) -> list[str]:
        return list(COMMANDS)

    def get_command(self, ctx: click.Context, name: str) -> click.Command | None:
        if name not in COMMANDS:
            return None
        command: click.Command = import_module(f"search.cli.{name}").command
        return command


@click.group(cls=Commands, context_settings={"help_option_names": ["-h", "--help"]})
@click.version_option(package_name="evenfield", prog_name="evenfield")
def evenfield() -> None:
    """Plan field trials that no balanced design fits: find, prove, keep, hand to the crew."""


def invoke(arguments: Sequence[str]) -> int:
    """Run one command line and return its exit status; nothing but an exit status ever leaves here."""
    as_json = "--json" in arguments
    command = next((word for word in arguments if word in COMMANDS), "")
    try:
        status = evenfield.main(list(arguments), prog_name="evenfield", standalone_mode=False)
        sys.stdout.flush()
        return int(status or 0)
    except SystemExit as ended:
        # click leaves by this door where nobody reads on; that is no failure of ours.
        return 0 if isinstance(ended.__context__, OSError) else int(ended.code or 0)
    except (KeyboardInterrupt, click.Abort):
        return failure(command, "interrupted", "interrupted", INTERRUPTED, as_json)
    except click.ClickException as error:
        return failure(command, "bad input", _click_message(error), BadInput.exit_status, as_json)
    except EvenfieldError as error:
        return report(command, error, as_json)
    except BrokenPipeError:
        # Nobody reads on: leave quietly, and keep Python from complaining at its own end.
        os.dup2(os.open(os.devnull, os.O_WRONLY), sys.stdout.fileno())
        return 0
    except Exception as error:
        if HEARD.is_set():  # raised within a library, an interrupt may surface as anything
            return failure(command, "interrupted", "interrupted", INTERRUPTED, as_json)
        if os.environ.get("EVENFIELD_DEBUG"):
            traceback.print_exc()
        text = f"internal error, please report it: {type(error).__name__}: {error}"
        return failure(command, "internal error", text, INTERNAL, as_json)


def _click_message(error: click.ClickException) -> str:
    where = getattr(error, "ctx", None)
    hint = f"; see `{where.command_path} --help`" if where is not None else ""
    return error.format_message() + hint


if __name__ == "__main__":
    sys.exit(invoke(sys.argv[1:]))
