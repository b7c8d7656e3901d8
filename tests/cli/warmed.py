"""Imported by a server of forks before it forks: all that `plan` and `sweep` load when they first run."""

from __future__ import annotations

import contextlib
import io
import json
import tempfile
from pathlib import Path

from search.cli.main import invoke
from tests.cli.killing import sweep_of, trial_of

with tempfile.TemporaryDirectory() as _name, contextlib.redirect_stdout(io.StringIO()) as _out:
    _folder = Path(_name)
    for _command, _document in (("plan", trial_of(1)), ("sweep", sweep_of(1))):
        _file = _folder / f"{_command}.yaml"
        _file.write_text(json.dumps(_document), encoding="utf-8")
        _words = ["--workers", "1", "--store", str(_folder / "store.sqlite"), "--json"]
        assert invoke([_command, str(_file), "--out", str(_folder / _command), *_words]) == 0, _out.getvalue()
