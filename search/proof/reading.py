"""From the raw JSON of a plan file to a trial and block contents, or a sentence about what is wrong."""

from __future__ import annotations

import json
from collections.abc import Iterator
from dataclasses import dataclass
from pathlib import Path
from typing import Any

from search.foundation.errors import BadInput, EvenfieldError, shown
from search.proof.parts import Part, listed, quoted
from search.proof.records import Refuted
from search.trial.reading import trial_from_document
from search.trial.records import Contents, Trial

FORMAT = "evenfield plan 1"
MOST_BYTES = 1 << 26


@dataclass(frozen=True, slots=True)
class Plot:
    """A plot of the file, its block and treatment by number."""

    number: int
    block: int
    line: int
    place: int
    treatment: int


def document_of(path: Path) -> Any:
    """The JSON of a file as Python data.

    Raises
    ------
    BadInput : the file cannot be read, or is no JSON that every reader understands alike
    """
    try:
        with path.open("rb") as stream:
            data = stream.read(MOST_BYTES + 1)
    except OSError as error:
        raise BadInput(f"cannot read {path}: {error.strerror or error}") from error
    if len(data) > MOST_BYTES:
        raise BadInput(f"{path} is larger than {MOST_BYTES >> 20} MiB, more than any plan needs")
    try:
        return json.loads(data.decode("utf-8"), object_pairs_hook=_keys_once, parse_constant=_no_number)
    except ValueError as error:
        raise BadInput(f"{path} is no JSON in UTF-8: {error}") from error
    except RecursionError as error:
        raise BadInput(f"{path} nests its parts beyond reading") from error


def _keys_once(pairs: list[tuple[str, Any]]) -> dict[str, Any]:
    # Of two equal keys one reader takes the first and another the last: they would see two plans.
    found = dict(pairs)
    if len(found) < len(pairs):
        raise ValueError("a key stands twice in one object")
    return found


def _no_number(word: str) -> float:
    raise ValueError(f"{shown(word)} is no number")


def opened(document: Any) -> Part:
    """The document as a plan file.

    Raises
    ------
    BadInput : it is no plan file at all, or one of a format that this version does not read
    """
    if not isinstance(document, dict):
        raise BadInput("this is no plan file: a plan file is a JSON object with keys")
    if document.get("format") != FORMAT:
        found = quoted(document.get("format"))
        raise BadInput(
            f'this is no plan file that can be verified: its "format" must be "{FORMAT}", found {found}'
        )
    return Part("", document)


def trial_of(file: Part) -> Trial:
    """The trial that the plan says it answers."""
    try:
        trial = trial_from_document(file.part("trial").content)
    except EvenfieldError as error:
        raise Refuted(f"the trial in the file has faults: {error}") from error
    except RecursionError as error:
        raise Refuted("the trial in the file is nested beyond reading") from error
    return trial


def contents_of(file: Part, trial: Trial) -> Contents:
    """For each block of the trial the numbers of its treatments."""
    blocks = file.part("blocks")
    known = {block.name for block in trial.blocks}
    for name in blocks.content:
        if name not in known:
            raise Refuted(f"blocks has {quoted(name)}, which the trial has not")
    number = {treatment.name: i for i, treatment in enumerate(trial.treatments)}
    return tuple(
        tuple(sorted(_numbers(blocks.at(block.name), blocks.items(block.name), number)))
        for block in trial.blocks
    )


def _numbers(where: str, names: list[Any], number: dict[str, int]) -> Iterator[int]:
    for name in names:
        if not isinstance(name, str) or name not in number:
            raise Refuted(f"{where} names {quoted(name)}, which is no treatment of the trial")
        yield number[name]


def plots_of(file: Part, trial: Trial) -> tuple[Plot, ...]:
    """The plots of the file in its order."""
    treatments = {treatment.name: i for i, treatment in enumerate(trial.treatments)}
    blocks = {block.name: j for j, block in enumerate(trial.blocks)}

    def plot(at: int, value: Any) -> Plot:
        row = Part.of(f"plots[{at}]", value)
        block, treatment = row.text("block"), row.text("treatment")
        if block not in blocks:
            raise Refuted(f"{row.where} stands in {quoted(block)}, which is no block of the trial")
        if treatment not in treatments:
            raise Refuted(f"{row.where} holds {quoted(treatment)}, which is no treatment of the trial")
        return Plot(
            number=row.whole("plot"),
            block=blocks[block],
            line=row.whole("line"),
            place=row.whole("place"),
            treatment=treatments[treatment],
        )

    rows = listed("plots", file.value("plots"))
    return tuple(plot(at, value) for at, value in enumerate(rows, start=1))
