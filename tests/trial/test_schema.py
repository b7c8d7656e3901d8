"""The JSON schema and the reader are one grammar told twice."""

from __future__ import annotations

import json
from collections.abc import Iterator
from pathlib import Path
from typing import Any

import pytest
import yaml
from hypothesis import assume, given, settings
from hypothesis import strategies as st
from jsonschema import Draft202012Validator

from search.trial.catalogue import TRIAL
from search.trial.nodes import nodes_of, parse_nodes
from search.trial.reading import read_trial
from search.trial.report import Report
from search.trial.schema import trial_schema
from search.trial.words import WORDS
from search.trial.writing import trial_document
from tests.drawn import small_documents

CONFIGS = Path(__file__).parents[2] / "configs"
SCHEMA = trial_schema()
VALIDATOR = Draft202012Validator(SCHEMA)

NUMBERS = [0, 1, 2, 3, -1, 3.0, 3.5, 0.01, 1e9, 10**12]
TEXTS = ["", " ", "A", "b0", "A5", "A4", "all pairs", "Overall", "yes", "true", " a ", "x" * 201]
ODD_TEXTS = ["3", "8,1", "9%", "1/3", "-2/4", "0/1", "1/0", "a\tb", "a\u202eb"]
SCALARS = st.sampled_from([None, True, False, *NUMBERS, *TEXTS, *ODD_TEXTS])
VALUES = st.one_of(
    SCALARS,
    st.lists(SCALARS, max_size=3),
    st.lists(st.lists(SCALARS, max_size=3), max_size=2),
    st.dictionaries(st.sampled_from(["A", "b0", "pair", "plots", "count", "of", "x"]), SCALARS, max_size=3),
)
KEYS = sorted({part.strip("[]") for path in WORDS for part in path.split(".")} - {"", "*"})
EXTRAS: dict[str, Any] = {
    "about": {"site": "Low Moor"},
    "precision": {"cv_percent": 9, "mean": 8.1, "unit": "t/ha", "level_percent": 5.0},
    "search": {"seconds": 2, "seed": 3},
    "randomise": {"seed": 1, "sites": 2},
    "packet": {"paper": "A4", "labels": "single", "spare_bags": 1},
    "ground": {"rows": "aab\nbb.", "plot_m": [1.5, 9], "names": {"a": "bay"}, "north_deg": 20.5},
}


def places(value: Any, path: tuple[Any, ...] = ()) -> Iterator[tuple[Any, ...]]:
    """Every place of a document."""
    yield path
    inside = value.items() if isinstance(value, dict) else enumerate(value) if isinstance(value, list) else ()
    for key, part in inside:
        yield from places(part, (*path, key))


@st.composite
def documents(draw: st.DrawFn) -> Any:
    """A trial file as data, with up to two values, names or keys changed at random."""
    document: Any = draw(small_documents())
    for word in draw(st.lists(st.sampled_from(sorted(EXTRAS)), max_size=3, unique=True)):
        document[word] = json.loads(json.dumps(EXTRAS[word]))
    for _ in range(draw(st.integers(0, 2))):
        path = draw(st.sampled_from(list(places(document))))
        document = _changed(draw, document, path)
    return document


def _changed(draw: st.DrawFn, document: Any, path: tuple[Any, ...]) -> Any:
    if not path:
        return draw(VALUES) if draw(st.integers(0, 9)) == 0 else document
    inside = document
    for key in path[:-1]:
        inside = inside[key]
    how = draw(st.sampled_from(["value", "value", "delete", "add"]))
    if how == "value":
        inside[path[-1]] = draw(VALUES)
    elif how == "delete":
        del inside[path[-1]]
    elif isinstance(inside, dict):
        inside[draw(st.sampled_from(KEYS))] = draw(VALUES)
    else:
        inside.append(draw(SCALARS))
    return document


def reader_accepts(document: Any) -> bool:
    """Whether the grammar of the reader finds no fault."""
    report = Report("")
    TRIAL.read(nodes_of(document), "", report)
    return not report.faults


@settings(max_examples=1000, deadline=None)
@given(documents())
def test_schema_and_reader_are_equal(document: Any) -> None:
    """On 1,000 drawn and changed files the schema accepts exactly what the grammar accepts."""
    assert VALIDATOR.is_valid(document) == reader_accepts(document)


@settings(max_examples=60, deadline=None)
@given(documents())
def test_the_same_file_as_text_reads_alike(document: Any) -> None:
    """Written as YAML and parsed again a document has the same faults as the data itself."""
    assume(document is not None)
    report, again = Report(""), Report("")
    TRIAL.read(nodes_of(document), "", report)
    TRIAL.read(parse_nodes(yaml.safe_dump(document, sort_keys=False, allow_unicode=True), ""), "", again)
    assert [(f.key, f.must) for f in again.faults] == [(f.key, f.must) for f in report.faults]


@pytest.mark.parametrize("path", sorted(CONFIGS.glob("*.yaml")), ids=lambda path: path.stem)
def test_the_examples_obey_the_schema(path: Path) -> None:
    """Every shipped trial, and the document of it in a plan file, obeys the schema."""
    document = yaml.safe_load(path.read_text(encoding="utf-8"))
    # An editor takes every key for text, plot numbers too; so does JSON.
    assert VALIDATOR.is_valid(json.loads(json.dumps(document)))
    assert VALIDATOR.is_valid(json.loads(json.dumps(trial_document(read_trial(path)))))


def test_the_schema_is_a_schema() -> None:
    """It is valid JSON Schema 2020-12 itself, in plain ASCII JSON."""
    Draft202012Validator.check_schema(SCHEMA)
    assert json.dumps(SCHEMA).isascii()
    assert SCHEMA["$schema"] == "https://json-schema.org/draft/2020-12/schema"


def described(schema: Any, path: str = "") -> Iterator[tuple[str, bool]]:
    """Every key of the schema by its path, and whether it has a title and a description."""
    if not isinstance(schema, dict):
        return
    for choice in (schema, *schema.get("anyOf", ())):
        for name, part in choice.get("properties", {}).items():
            below = f"{path}.{name}" if path else name
            yield below, "title" in part and "description" in part
            yield from described(part, below)
        yield from described(choice.get("items"), f"{path}[]")
        yield from described(choice.get("additionalProperties"), f"{path}.*")


def test_every_key_has_words() -> None:
    """Editors show a title and a sentence for every key."""
    found = dict(described(SCHEMA))
    assert not [path for path, told in found.items() if not told]
    assert len(found) > 50
