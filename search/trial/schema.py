"""The JSON schema of a trial file: the grammar's own, with the words of each key.

Editors complete and check with it. It knows shapes, numbers and words to choose from; whether a rule names
a treatment that there is, only the reader can tell.
"""

from __future__ import annotations

from typing import Any

from search.trial.catalogue import TRIAL
from search.trial.report import Schema
from search.trial.words import WORDS, Words

DIALECT = "https://json-schema.org/draft/2020-12/schema"


def trial_schema() -> Schema:
    """The schema of a trial file, JSON Schema 2020-12."""
    return {"$schema": DIALECT, **worded(TRIAL.schema(), "")}


def worded(schema: Schema, path: str) -> Schema:
    """A schema with title, description and example at every place that has words.

    Parameters
    ----------
    schema : of the place
    path : of the place, as in `search.trial.words.WORDS`
    """
    result = _inside(schema, path)
    words = WORDS.get(_generic(path))
    return _told(words) | result if words is not None else result


def _told(words: Words) -> Schema:
    return {"title": words.title, "description": words.about, "$comment": f"for example  {words.example}"}


def _generic(path: str) -> str:
    return path.replace("meet_at_least[]", "meet_*[]").replace("meet_at_most[]", "meet_*[]")


def _inside(schema: Schema, path: str) -> Schema:
    """The same for everything below a place."""
    result: dict[str, Any] = dict(schema)
    if "properties" in schema:
        below = {name: worded(part, _below(path, name)) for name, part in schema["properties"].items()}
        result["properties"] = below
        if not below:
            del result["properties"]
    if isinstance(schema.get("additionalProperties"), dict):
        result["additionalProperties"] = worded(schema["additionalProperties"], _below(path, "*"))
    if "items" in schema:
        result["items"] = worded(schema["items"], f"{path}[]")
    if "anyOf" in schema:
        result["anyOf"] = [_inside(choice, path) for choice in schema["anyOf"]]
    return result


def _below(path: str, name: str) -> str:
    return f"{path}.{name}" if path else name
