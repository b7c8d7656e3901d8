"""What the file says of itself: seal, mark, dates, where the plan came from."""

from __future__ import annotations

import hashlib
import re

from search.foundation.documents import canonical_json
from search.foundation.stopping import Ended
from search.proof.parts import Part, quoted
from search.proof.records import Finding, Refuted

DATE = r"\d{4}-\d\d-\d\dT\d\d:\d\d:\d\d(\.\d+)?(Z|[+-]\d\d:\d\d)"


def sealed(file: Part) -> Finding:
    """The seal is the sha256 of everything else; it finds accidents, not intent."""
    rest = {key: value for key, value in file.content.items() if key != "seal"}
    try:
        text = canonical_json(rest).encode("utf-8")
    except (ValueError, TypeError, RecursionError) as error:
        raise Refuted("the file holds values that plain JSON does not have") from error
    if file.text("seal") != hashlib.sha256(text).hexdigest():
        raise Refuted("the content was changed after it was sealed")
    return Finding("seal", True, "nothing was changed since the file was sealed")


def marked(file: Part) -> Finding:
    """The plan has a mark and a date of issue."""
    mark, issued = file.text("mark"), file.text("issued")
    if not re.fullmatch(DATE, issued, re.ASCII):
        raise Refuted(f"issued is no date with time and zone: {quoted(issued)}")
    return Finding("mark", True, f"{quoted(mark)}, issued {issued}")


def laid_out(file: Part) -> Finding:
    """The layout tells its seed and how it was drawn."""
    layout = file.part("layout")
    layout.text("scheme")
    return Finding("layout", True, f"drawn with the seed {_short(layout.whole('seed'))}")


def ended(file: Part) -> Finding:
    """The search ended in one of the ways that there are."""
    word = file.text("ended_by")
    if word not in tuple(Ended):
        raise Refuted(f"a search cannot end by {quoted(word)}; it ends by {', '.join(Ended)}")
    return Finding("ended by", True, word)


def provenance(file: Part) -> Finding:
    """The file says how the plan can be made again."""
    origin = file.part("provenance")
    origin.text("digest")
    origin.text("start")
    origin.part("versions")
    seed, moves, seconds = origin.whole("seed"), origin.whole("moves"), origin.number("seconds")
    if moves < 0 or seconds < 0:
        raise Refuted("moves and seconds of a search are not below 0")
    return Finding("provenance", True, f"seed {_short(seed)}, {_short(moves)} moves")


def _short(number: int) -> str:
    return str(number) if abs(number) < 10**20 else "of more than twenty digits"
