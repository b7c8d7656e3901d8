"""What a text that is not YAML was meant to be: the usual slips, each recognised by name."""

from __future__ import annotations

import re
from dataclasses import dataclass

import yaml

from search.foundation.errors import Fault, FaultyTrial, shown

WHY = "from this place on nobody can tell which words belong together"
NO_BLANK = re.compile(r"^\s*(?:-\s+)?[A-Za-z_][\w ]*:(?=[^\s/])")
"""A key whose colon touches its value."""


@dataclass(frozen=True, slots=True)
class _Slip:
    found: str
    must: str
    remedy: str


def yaml_fault(error: yaml.MarkedYAMLError, text: str, file: str) -> FaultyTrial:
    """The fault behind an error of the YAML scanner or parser.

    Parameters
    ----------
    error : as the scanner raised it
    text : the whole text
    file : its name, for the message
    """
    mark = error.problem_mark or error.context_mark
    line, column = (mark.line + 1, mark.column + 1) if mark else (0, 0)
    lines = text.splitlines()
    context = f"{error.context or ''} {error.problem or ''}"
    opened = error.context_mark
    left_open = opened is not None and ("flow" in context or "quoted" in context)
    if opened is not None and left_open and opened.line + 1 < line:
        return _left_open(context, file, opened)
    for near in (line, line - 1):
        here = lines[near - 1] if 0 < near <= len(lines) else ""
        slip = _slip_of_line(here)
        if slip is not None:
            tab = here.find("\t") + 1
            return _fault(slip, file, near, tab or column)
    if opened is not None and left_open:
        return _left_open(context, file, opened)
    return _fault(_slip_of_error(context), file, line, column)


def _left_open(context: str, file: str, opened: yaml.Mark) -> FaultyTrial:
    what = "a quote" if "quoted" in context else "a bracket"
    slip = _Slip(f"{what} that is not closed", f"{what} closed where it ends", f"close the {what[2:]}")
    return _fault(slip, file, opened.line + 1, opened.column + 1)


def _slip_of_line(here: str) -> _Slip | None:
    if "\t" in here:
        return _Slip("a tab", "blanks before and between words", "replace the tab by blanks")
    if NO_BLANK.match(here) and not re.search(r":(\s|$)", here):
        must = "`key: value` with a blank after the colon"
        return _Slip(shown(here.strip()), must, "put a blank after the colon")
    if re.match(r"[^:{\[]*:\s[^\"'\[{|>#]*:(\s|$)", here):
        must = "one `key: value` a line"
        return _Slip("a second colon in one line", must, 'put a text that holds a colon in quotes: "…"')
    marked = re.search(r"(?:^|[:\-,\[{]\s*)([@`%*&!])", here)
    if marked is not None:
        sign = marked.group(1)
        must = "a name that begins with a letter or a digit, or stands in quotes"
        return _Slip(f"a text that begins with {sign}", must, f'put it in quotes: "{sign}…"')
    return None


def _slip_of_error(context: str) -> _Slip:
    if "alias" in context or "anchor" in context:
        return _Slip("an alias that nothing explains", "a file that says each thing once", "write it out")
    if "block" in context or "mapping" in context or "indentation" in context:
        must = "keys of one list or section one below the other, behind equally many blanks"
        return _Slip("a line set in too far or too little", must, "look at the blanks before this line")
    remedy = "look at the blanks before this line and at colons, brackets and quotes in it"
    return _Slip("something that is not YAML", "YAML: `key: value`, one a line", remedy)


def _fault(slip: _Slip, file: str, line: int, column: int) -> FaultyTrial:
    return FaultyTrial([Fault("", slip.found, slip.must, WHY, slip.remedy, file, line, column)])
