"""What can go wrong, and what the user is told.

EvenfieldError                 everything a user can meet; never a traceback
├── FaultyTrial                the trial or sweep file has faults (all of them at once)
├── BadInput                   another input is unusable: a plan file, a store, an option
├── Impossible                 no plan obeys the trial's rules
├── Undecided                  the time ran out before the rules were decided
└── WorkersLost                other machines that searched for this one are gone
"""

from __future__ import annotations

from collections.abc import Iterable, Sequence
from dataclasses import dataclass
from difflib import get_close_matches


@dataclass(frozen=True, slots=True)
class Fault:
    """One mistake in a file, in five parts: where, found, must hold, why, what to try."""

    key: str
    found: str
    must: str
    why: str = ""
    remedy: str = ""
    file: str = ""
    line: int = 0
    column: int = 0

    def __str__(self) -> str:
        place = self.file
        if self.line:
            place += f", line {self.line}, column {self.column}"
        head = ": ".join(part for part in (place.lstrip(", "), self.key) if part)
        lines = [f"{head}: found {self.found}", f"  must hold: {self.must}"]
        if self.why:
            lines.append(f"  why: {self.why}")
        if self.remedy:
            lines.append(f"  try: {self.remedy}")
        return "\n".join(lines)

    def document(self) -> dict[str, object]:
        """The fault as plain JSON data."""
        return {
            "file": self.file,
            "line": self.line,
            "column": self.column,
            "key": self.key,
            "found": self.found,
            "must_hold": self.must,
            "why": self.why,
            "try": self.remedy,
        }


class EvenfieldError(Exception):
    """Anything that a user can meet; the roof prints it and exits with `exit_status`."""

    exit_status = 2
    status = "bad input"


class FaultyTrial(EvenfieldError):
    """The file cannot be used as it stands; `faults` holds every mistake found in it."""

    status = "bad file"

    def __init__(self, faults: Iterable[Fault]) -> None:
        self.faults: tuple[Fault, ...] = tuple(faults)
        super().__init__("\n".join(str(fault) for fault in self.faults))


class BadInput(EvenfieldError):
    """A plan file, a store or an option that cannot be used, with what to do instead."""


@dataclass(frozen=True, slots=True)
class Clash:
    """Lines of a file that cannot all hold, told in its own words.

    Parameters
    ----------
    lines : the clashing lines, each as (key, line number or 0, what it asks for)
    among : lines that say what there is to plant and where, in the same form
    is_smallest : every clashing line is needed: without it a plan was found
    cause : why they clash, in a sentence
    shown_by : how that was shown
    changes : what to relax, the smallest change first; each alone was tried and serves
    """

    lines: tuple[tuple[str, int, str], ...]
    among: tuple[tuple[str, int, str], ...]
    is_smallest: bool
    cause: str
    shown_by: str
    changes: tuple[str, ...]

    def document(self) -> dict[str, object]:
        """The clash as plain JSON data."""
        return {
            "lines": [_line(line) for line in self.lines],
            "among": [_line(line) for line in self.among],
            "smallest": self.is_smallest,
            "cause": self.cause,
            "shown_by": self.shown_by,
            "changes": list(self.changes),
        }


def _line(line: tuple[str, int, str]) -> dict[str, object]:
    key, number, text = line
    return {"key": key, "line": number, "text": text}


class Impossible(EvenfieldError):
    """No plan obeys the rules; `causes` says why, `clashes` which lines of the file cannot all hold."""

    exit_status = 3
    status = "impossible"

    def __init__(self, causes: Sequence[str], shown_by: str, clashes: Sequence[Clash] = ()) -> None:
        self.causes = tuple(causes)
        self.shown_by = shown_by
        self.clashes = tuple(clashes)
        super().__init__("; ".join(self.causes))


class Undecided(EvenfieldError):
    """It is not known whether a plan exists: the search for one ran out of time."""

    exit_status = 4
    status = "undecided"


class WorkersLost(EvenfieldError):
    """Other machines that searched for this one answer no more; what they had finished is kept."""

    status = "workers lost"


def did_you_mean(word: str, known: Iterable[str]) -> str:
    """A short question with the nearest known word, or an empty string."""
    table = {name.casefold(): name for name in known}
    near = get_close_matches(word.casefold(), table, n=1, cutoff=0.6)
    return f'did you mean "{table[near[0]]}"?' if near else ""


def shown(text: str, most: int = 60) -> str:
    """Text from a file made safe and short for a message: quoted, escaped, cut."""
    safe = "".join(c if c.isprintable() else f"\\u{ord(c):04x}" for c in text[: most + 1])
    return f'"{safe[:most]}…"' if len(text) > most else f'"{safe}"'
