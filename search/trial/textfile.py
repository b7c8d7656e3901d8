"""A text file as text: size, encoding and hidden characters are looked at before anything else is."""

from __future__ import annotations

import re
import unicodedata
from pathlib import Path

from search.foundation.errors import Fault, FaultyTrial

MOST_BYTES = 1 << 20
HIDDEN = re.compile("[\x00-\x08\x0b\x0c\x0e-\x1f\x7f-\x84\x86-\x9f\ud800-\udfff\ufffe\uffff]")
"""Characters that no YAML text may hold."""
OTHER_FILES = {
    b"PK": "a spreadsheet or another packed file",
    b"%PDF": "a PDF",
    b"\xd0\xcf": "a file of an office program",
    b"SQLi": "a database",
    b"\xff\xfe": "text saved as UTF-16",
    b"\xfe\xff": "text saved as UTF-16",
    b"\x1f\x8b": "a packed file",
}
WHY = "a file that is not read whole and exactly could plan another trial than yours"


def read_text(path: Path) -> str:
    """The text of a file of at most `MOST_BYTES`, UTF-8 with or without its mark.

    Raises
    ------
    FaultyTrial : no such file, too large, not text, or characters that nobody can see
    """
    file = str(path)
    data = _bytes(path)
    for start, what in OTHER_FILES.items():
        if data.startswith(start):
            raise refusal(file, what, "a text file saved as UTF-8", WHY, "save it as plain text, UTF-8")
    try:
        text = data.decode("utf-8-sig")
    except UnicodeDecodeError as error:
        line, column = _place(error.object.decode("latin-1"), error.start)
        letter = f"the byte {error.object[error.start]:#04x}, which is not UTF-8 text"
        remedy = "save the file as UTF-8: most editors ask for the encoding under Save as"
        raise refusal(file, letter, "a text file saved as UTF-8", WHY, remedy, line, column) from None
    refuse_hidden(text, file)
    return text


def refuse_hidden(text: str, file: str) -> None:
    """Refuse control characters.

    Raises
    ------
    FaultyTrial : at the first of them
    """
    hidden = HIDDEN.search(text)
    if hidden is not None:
        line, column = _place(text, hidden.start())
        found = f"a control character (U+{ord(hidden.group()):04X})"
        why = "it can be neither seen nor printed, so two names could look the same and differ"
        raise refusal(file, found, "text that can be seen", why, "delete it", line, column)


def refusal(
    file: str, found: str, must: str, why: str, remedy: str, line: int = 0, column: int = 0
) -> FaultyTrial:
    """A file that cannot be used at all, for one reason."""
    return FaultyTrial([Fault("", found, must, why, remedy, file, line, column)])


def named_character(character: str) -> str:
    """The name of a character that cannot be shown."""
    return f"U+{ord(character):04X} {unicodedata.name(character, 'without a name').lower()}"


def _bytes(path: Path) -> bytes:
    file = str(path)
    most = f"at most {MOST_BYTES:,} bytes"
    why = "a trial file is typed by a person: a larger one is some other file"
    try:
        if path.is_dir():
            remedy = "name a file in it"
            raise refusal(file, "a folder", "a trial file in YAML", "a folder holds many trials", remedy)
        size = path.stat().st_size
        if size > MOST_BYTES:
            raise refusal(file, f"{size:,} bytes", most, why, "look whether this is the file you mean")
        with path.open("rb") as stream:
            data = stream.read(MOST_BYTES + 1)
    except (OSError, ValueError) as error:
        reason = (getattr(error, "strerror", None) or "a name that cannot be opened").lower()
        remedy = "look at the name and the folder; `evenfield new` writes a first trial file"
        why = "nothing is planned without a file to go by"
        raise refusal(file, reason, "a trial file that can be read", why, remedy) from None
    if len(data) > MOST_BYTES:
        raise refusal(file, "a stream without end", most, why, "name an ordinary file")
    return data


def _place(text: str, at: int) -> tuple[int, int]:
    before = text[:at]
    return before.count("\n") + 1, at - before.rfind("\n")
