"""`evenfield schema`: the JSON schema of a trial file, for editors that complete and check."""

from __future__ import annotations

import json
import sys

import click


@click.command("schema")
@click.option("--json", "as_json", is_flag=True, help="The same: the schema is a JSON document.")
def command(as_json: bool) -> int:
    """Print the JSON schema (2020-12) of a trial file.

    Save it, and tell your editor that your trial files follow it: it then completes keys, shows what they
    mean, and marks slips while you type.
    """
    from search.trial.schema import trial_schema

    json.dump(trial_schema(), sys.stdout, ensure_ascii=True, indent=1, allow_nan=False)
    sys.stdout.write("\n")
    return 0
