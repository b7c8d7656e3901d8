"""What comes with the program: plans and bounds of many plain trials, which nobody has to search again.

One archive of results as `evenfield kept export` writes them, a member for each beginning of a digest, so
that one result is found without a look at the others. It was made by a sweep of `configs/sweeps/grid.yaml`.
"""

from __future__ import annotations

import json
import zipfile
from collections import defaultdict
from collections.abc import Iterable, Iterator
from pathlib import Path
from typing import Any

from search.foundation.documents import canonical_json
from search.foundation.errors import BadInput
from search.runs.exchange import document, shown_of
from search.runs.kept import Problem, Shown

FILE = Path(__file__).with_name("shipped.zip")
DIGITS = 2
"""Results whose digests begin with the same digits share a member of the archive."""
WRITTEN = (2026, 1, 1, 0, 0, 0)
"""Time of every member, so that the same results make the same archive."""


def shipped(digest: str, aim: str, file: Path = FILE) -> Shown | None:
    """What comes with the program for a problem and an aim; None where nothing does.

    Parameters
    ----------
    digest, aim : of the problem, and the kind of aim
    file : the archive
    """
    try:
        with zipfile.ZipFile(file) as archive:
            lines = archive.read(digest[:DIGITS]).splitlines()
        for line in lines:
            # most lines are of other problems: they are not taken apart
            if digest.encode() in line:
                content = json.loads(line)
                if (content["digest"], content["aim"]) == (digest, aim):
                    return _shown(content)
    except (OSError, KeyError, ValueError, zipfile.BadZipFile, BadInput):
        return None  # an installation without it, or with a damaged one, searches all by itself
    return None


def _shown(content: dict[str, Any]) -> Shown:
    keys = ("digest", "text", "treatments", "blocks", "plots", "sizes", "trial")
    digest, text, t, b, n, sizes, name = (content[key] for key in keys)
    return shown_of(content, Problem(digest, text, t, b, n, tuple(sizes), name))


def all_shipped(file: Path = FILE) -> Iterator[dict[str, Any]]:
    """Every result of the archive as JSON data, in the order of their digests."""
    with zipfile.ZipFile(file) as archive:
        for member in archive.namelist():
            yield from map(json.loads, archive.read(member).splitlines())


def ship(results: Iterable[Shown], file: Path = FILE) -> int:
    """Write an archive; how often and by whom the results were searched for stays behind.

    Parameters
    ----------
    results : what goes into it
    file : where to

    Returns
    -------
    count : of results written
    """
    members, count = defaultdict[str, list[str]](list), 0
    for shown in results:
        content = document(shown) | {"runs": [], "issued": []}
        members[shown.problem.digest[:DIGITS]].append(canonical_json(content))
        count += 1
    with zipfile.ZipFile(file, "w", zipfile.ZIP_DEFLATED, compresslevel=9) as archive:
        for name in sorted(members):
            archive.writestr(zipfile.ZipInfo(name, WRITTEN), "\n".join(sorted(members[name])))
    return count
