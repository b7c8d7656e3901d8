"""Plain documents on disk: canonical JSON, whole-or-nothing writing, safe file names."""

from __future__ import annotations

import json
import os
import re
import tempfile
import unicodedata
from collections.abc import Iterable
from pathlib import Path
from typing import Any

from search.foundation.errors import BadInput


def canonical_json(document: Any) -> str:
    """The one text of a JSON document: keys sorted, no blanks, nothing but finite numbers."""
    return json.dumps(document, sort_keys=True, separators=(",", ":"), ensure_ascii=False, allow_nan=False)


def write_whole(path: Path, content: str | bytes | Iterable[str], *, new: bool = False) -> None:
    """Write a file so that a reader sees the old one or the new one, never a part.

    Parameters
    ----------
    path, content : what goes where; a long text may come piece by piece
    new : the file must not be there yet; of two who write it at once, one is told

    Raises
    ------
    BadInput : the folder cannot be written to, or the disk is full
    FileExistsError : it must be new, and is there
    """
    pieces = [content] if isinstance(content, str | bytes) else content
    try:
        path.parent.mkdir(parents=True, exist_ok=True)
        handle, temporary = tempfile.mkstemp(dir=path.parent, prefix=".part-")
        try:
            with os.fdopen(handle, "wb") as stream:
                for piece in pieces:
                    stream.write(piece.encode("utf-8") if isinstance(piece, str) else piece)
                stream.flush()
                os.fsync(stream.fileno())
            os.chmod(temporary, 0o644)
            if new:
                os.link(temporary, path)
                os.unlink(temporary)
            else:
                os.replace(temporary, path)
        except BaseException:
            Path(temporary).unlink(missing_ok=True)
            raise
    except FileExistsError:
        if new and path.exists():
            raise
        raise BadInput(
            f"cannot write {path}: a file is in the way; choose another folder with --out"
        ) from None
    except OSError as error:
        raise BadInput(
            f"cannot write {path}: {error.strerror or error}; choose another folder with --out"
        ) from error


def read_json(path: Path, most_bytes: int) -> Any:
    """The JSON of a file that anybody may have written, as Python data.

    Raises
    ------
    BadInput : it cannot be read, is too large, or is no JSON that every reader understands alike
    """
    try:
        with path.open("rb") as stream:
            data = stream.read(most_bytes + 1)
    except OSError as error:
        raise BadInput(f"cannot read {path}: {error.strerror or error}") from error
    if len(data) > most_bytes:
        raise BadInput(f"{path} is larger than {most_bytes >> 20} MiB, more than any plan needs")
    return parsed_json(data, str(path))


def parsed_json(data: bytes, name: str = "this") -> Any:
    """The JSON of bytes that anybody may have written, as Python data.

    Raises
    ------
    BadInput : it is no JSON that every reader understands alike
    """
    try:
        return json.loads(data.decode("utf-8"), parse_constant=_no_number, object_pairs_hook=_keys_once)
    except (ValueError, RecursionError) as error:
        raise BadInput(f"{name} is not a JSON document in UTF-8: {error}") from error


def _no_number(word: str) -> float:
    raise ValueError(f"{word} is no number")


def _keys_once(pairs: list[tuple[str, Any]]) -> dict[str, Any]:
    # Of two equal keys one reader takes the first and another the last: they would see two plans.
    found = dict(pairs)
    if len(found) < len(pairs):
        raise ValueError("a key stands twice in one object")
    return found


def safe_name(name: str) -> str:
    """A trial's name as a folder name: lower case letters and digits joined by single dashes."""
    plain = unicodedata.normalize("NFKD", name).encode("ascii", "ignore").decode()
    words = re.findall(r"[a-z0-9]+", plain.lower())
    return "-".join(words)[:60].strip("-") or "trial"
