"""The text of a first trial file: short, commented, ready to be planned as it stands."""

from __future__ import annotations

import json
import re
from collections import Counter
from collections.abc import Sequence

from search.trial.nodes import NOTHING

READ_AS_OTHER = {"yes", "no", "on", "off", "true", "false", "y", "n", *map(str.casefold, NOTHING)}
"""Plain words that other readers of YAML take for truth or nothing."""


def first_file(name: str, treatments: int | Sequence[str], bays: Sequence[int]) -> str:
    """A trial file in YAML.

    Parameters
    ----------
    name : of the trial
    treatments : their names, or how many
    bays : plots of each
    """
    many = treatments if isinstance(treatments, int) else len(treatments)
    plots = sum(bays)
    lines = [
        "# A trial for Evenfield. Everything behind # is a comment; take one away to use its line.",
        "#   evenfield inspect  tells every mistake and what the rules force;  evenfield plan  plans it.",
        "",
        f"trial: {quoted(name)}",
        "# about: {site: Low Moor, season: 2027, number: LM-27-03}   # printed on the packet",
        "",
        *_treatments(treatments),
        "",
        *_bays(bays),
        "",
        f"# {plots} plots for {many} treatments: as even as that allows, unless you say otherwise.",
        f"# plots_each: [{max(1, plots // many)}, {-(-plots // many)}]",
        "",
        *_rules(treatments, bays, many),
        "",
        "# What the plan is best for: all pairs, overall, against control (mark a treatment control: true).",
        "aim: all pairs",
        "search: {seconds: 20}",
        "# precision: {cv_percent: 9, mean: 8.1, unit: t/ha}   # then differences are told in t/ha",
        "",
    ]
    return "\n".join(lines)


LINE_BREAKS = {ord(mark): f"\\u{ord(mark):04x}" for mark in "\x85\u2028\u2029"}
"""Marks that YAML folds into a blank unless they are written as numbers."""


def quoted(text: str) -> str:
    """A text as YAML, in quotes where it could be taken for anything else."""
    plain = re.fullmatch(r"[A-Za-z](?:[A-Za-z0-9 _-]*[A-Za-z0-9_])?", text)
    if plain and text.casefold() not in READ_AS_OTHER:
        return text
    return json.dumps(text, ensure_ascii=False).translate(LINE_BREAKS)


def _treatments(treatments: int | Sequence[str]) -> list[str]:
    settings = (
        '# Settings of one go behind its name: Arlen: {plots: 6, control: true, caution: "Treated seed"}'
    )
    if isinstance(treatments, int):
        return [f"treatments: {treatments}   # named T01, T02, ...; or a list of names", settings]
    return ["treatments:", *(f"  {quoted(name)}:" for name in treatments), settings]


def _bays(bays: Sequence[int]) -> list[str]:
    head = "# Plots of one bay are compared with one another: keep a bay small and even."
    if len(set(bays)) == 1:
        return [head, f"blocks: {{count: {len(bays)}, plots: {bays[0]}}}"]
    return [head, "blocks:", *(f"  bay {number}: {plots}" for number, plots in enumerate(bays, start=1))]


def _rules(treatments: int | Sequence[str], bays: Sequence[int], many: int) -> list[str]:
    names = ["T01", "T02"] if isinstance(treatments, int) else list(treatments[:2])
    first, second = (quoted(name) for name in names)
    bay = "block 1" if len(Counter(bays)) == 1 else "bay 1"
    twice = max(bays) > many
    lines = ["rules:"] if twice else ["# rules:"]
    if twice:
        lines.append("  twice_in_block: true   # some bays have more plots than there are treatments")
    return [
        *lines,
        f"#   never_share_block: [[{first}, {second}]]",
        f"#   keep_out: {{{first}: [{bay}]}}",
        f"#   must_hold: {{every block: [{second}]}}",
    ]
