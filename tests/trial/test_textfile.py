"""What is not a text is refused before anybody looks into it."""

from __future__ import annotations

import os
from pathlib import Path

import pytest

from search.foundation.errors import FaultyTrial
from search.trial.textfile import MOST_BYTES, read_text

TEXT = "trial: Rosé\n"
OTHERS = {
    "latin 1": (TEXT.encode("latin-1"), "the byte 0xe9", 1),
    "UTF-16": (TEXT.encode("utf-16"), "UTF-16", 0),
    "a spreadsheet": (b"PK\x03\x04 and more", "a spreadsheet", 0),
    "a PDF": (b"%PDF-1.7", "a PDF", 0),
    "an old spreadsheet": (b"\xd0\xcf\x11\xe0", "an office program", 0),
    "a store": (b"SQLite format 3\x00", "a database", 0),
    "a bell": (b"trial: x\nabout: {site: \x07}\n", "U+0007", 2),
    "a null": (b"trial: x\x00", "U+0000", 1),
    "too large": (b"# " + b"x" * MOST_BYTES, "at most 1,048,576 bytes", 0),
}


@pytest.mark.parametrize("case", OTHERS)
def test_what_is_not_text_is_refused_by_name(case: str, tmp_path: Path) -> None:
    """Another encoding, another kind of file, hidden characters, too large: each says what it is."""
    data, words, line = OTHERS[case]
    path = tmp_path / "trial.yaml"
    path.write_bytes(data)
    with pytest.raises(FaultyTrial) as caught:
        read_text(path)
    assert words in str(caught.value)
    (fault,) = caught.value.faults
    assert fault.line == line
    assert all((fault.found, fault.must, fault.why, fault.remedy))


@pytest.mark.parametrize("mark", [b"", b"\xef\xbb\xbf"])
def test_the_boundary_is_accepted(mark: bytes, tmp_path: Path) -> None:
    """UTF-8 with or without its mark, and a file of exactly the largest size, are text."""
    path = tmp_path / "trial.yaml"
    data = mark + TEXT.encode()
    path.write_bytes(data + b"#" * (MOST_BYTES - len(data)))
    assert read_text(path).startswith(TEXT)


def test_what_cannot_be_opened_is_told(tmp_path: Path) -> None:
    """No such file, a folder, a name with a null, a pipe without end: a sentence each, no traceback."""
    with pytest.raises(FaultyTrial, match="no such file"):
        read_text(tmp_path / "nobody.yaml")
    with pytest.raises(FaultyTrial, match="a folder"):
        read_text(tmp_path)
    with pytest.raises(FaultyTrial, match="cannot be opened"):
        read_text(Path("tri\0al.yaml"))
    if os.path.exists("/dev/zero"):
        with pytest.raises(FaultyTrial, match="without end"):
            read_text(Path("/dev/zero"))
