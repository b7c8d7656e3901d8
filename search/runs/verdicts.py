"""Rows that ended without a plan, written down beside the sweep as each ends: they are not asked again.

The store keeps plans; why a row has none depends on its file and stands here, a JSON line for each row.
A last line that was cut off by a crash is passed over, and so is whatever else is no verdict.
"""

from __future__ import annotations

import json
from dataclasses import dataclass
from hashlib import sha256
from pathlib import Path
from typing import Any

from search.foundation.documents import canonical_json
from search.foundation.errors import BadInput, Clash
from search.foundation.stopping import Limits
from search.foundation.versions import versions
from search.runs.row_search import Found
from search.runs.sweep_records import RowStatus
from search.trial.records import Trial
from search.trial.writing import trial_document

FINAL = (RowStatus.IMPOSSIBLE, RowStatus.UNDECIDED)
"""An error of our own is no verdict: it may be mended by tomorrow."""


@dataclass(frozen=True, slots=True)
class Verdict:
    """Why a row has no plan."""

    status: RowStatus
    reason: str
    clashes: tuple[Clash, ...] = ()


def key_of(trial: Trial, limits: Limits) -> str:
    """What a verdict depends on, in one word: the trial as its file says it, how far to search, the version.

    That a trial is impossible does not depend on the limits, but which of its lines are told may.
    """
    told = (
        trial_document(trial),
        repr(trial.said),
        [limits.seconds, limits.moves],
        versions().get("evenfield"),
    )
    return sha256(canonical_json(told).encode()).hexdigest()


class Verdicts:
    """The verdicts of a file, which need not be there yet.

    Parameters
    ----------
    path : the file; None writes nothing down
    """

    def __init__(self, path: Path | None) -> None:
        self.path = path
        self._known = dict(_read(path)) if path is not None else {}

    def get(self, key: str) -> Verdict | None:
        """The verdict under a key, or None."""
        return self._known.get(key)

    def add(self, key: str, found: Found) -> None:
        """Write down how a row ended, if that is final and not known yet.

        Raises
        ------
        BadInput : the file cannot be written to
        """
        if found.status not in FINAL:
            return
        verdict = Verdict(found.status, found.reason, found.clashes)
        if self._known.get(key) == verdict:
            return
        self._known[key] = verdict
        if self.path is None:
            return
        document = {
            "key": key,
            "status": str(found.status),
            "reason": found.reason,
            "clashes": [clash.document() for clash in found.clashes],
        }
        try:
            self.path.parent.mkdir(parents=True, exist_ok=True)
            with self.path.open("a+b") as stream:
                # A line that was cut off must not spoil this one.
                whole = stream.tell() == 0 or _last_byte(self.path) == b"\n"
                stream.write((b"" if whole else b"\n") + canonical_json(document).encode() + b"\n")
        except OSError as error:
            raise BadInput(
                f"cannot write {self.path}: {error.strerror or error}; choose another folder with --out"
            ) from error


def _last_byte(path: Path) -> bytes:
    with path.open("rb") as stream:
        stream.seek(-1, 2)
        return stream.read(1)


def _read(path: Path) -> list[tuple[str, Verdict]]:
    try:
        lines = path.read_bytes().splitlines()
    except OSError:
        return []
    found = []
    for line in lines:
        try:
            document = json.loads(line)
            verdict = Verdict(
                RowStatus(document["status"]),
                str(document["reason"]),
                tuple(_clash(clash) for clash in document["clashes"]),
            )
            key = str(document["key"])
        except (ValueError, KeyError, TypeError, RecursionError):
            continue
        if verdict.status in FINAL:
            found.append((key, verdict))
    return found


def _clash(document: dict[str, Any]) -> Clash:
    return Clash(
        lines=tuple(_line(line) for line in document["lines"]),
        among=tuple(_line(line) for line in document["among"]),
        is_smallest=bool(document["smallest"]),
        cause=str(document["cause"]),
        shown_by=str(document["shown_by"]),
        changes=tuple(map(str, document["changes"])),
    )


def _line(document: dict[str, Any]) -> tuple[str, int, str]:
    return str(document["key"]), int(document["line"]), str(document["text"])
