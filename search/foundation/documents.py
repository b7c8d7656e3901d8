"""Plain documents on disk: canonical JSON, whole-or-nothing writing, safe file names."""

from __future__ import annotations

import json
import os
import re
import tempfile
import unicodedata
from pathlib import Path
from typing import Any

from search.foundation.errors import BadInput


def canonical_json(document: Any) -> str:
    """The one text of a JSON document: keys sorted, no blanks, nothing but finite numbers."""
    return json.dumps(document, sort_keys=True, separators=(",", ":"), ensure_ascii=False, allow_nan=False)


def write_whole(path: Path, content: str | bytes, *, new: bool = False) -> None:
    """Write a file so that a reader sees the old one or the new one, never a part.

    Parameters
    ----------
    path, content : what goes where
    new : the file must not be there yet; of two who write it at once, one is told

    Raises
    ------
    BadInput : the folder cannot be written to, or the disk is full
    FileExistsError : it must be new, and is there
    """
    data = content.encode("utf-8") if isinstance(content, str) else content
    try:
        path.parent.mkdir(parents=True, exist_ok=True)
        handle, temporary = tempfile.mkstemp(dir=path.parent, prefix=".part-")
        try:
            with os.fdopen(handle, "wb") as stream:
                stream.write(data)
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


def safe_name(name: str) -> str:
    """A trial's name as a folder name: lower case letters and digits joined by single dashes."""
    plain = unicodedata.normalize("NFKD", name).encode("ascii", "ignore").decode()
    words = re.findall(r"[a-z0-9]+", plain.lower())
    return "-".join(words)[:60].strip("-") or "trial"
