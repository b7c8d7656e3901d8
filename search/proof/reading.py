"""From the raw JSON of a plan file to a trial and block contents, or a sentence about what is wrong."""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import dataclass
from pathlib import Path
from typing import Any

from search.foundation.documents import read_json
from search.foundation.errors import BadInput, EvenfieldError
from search.proof.parts import Part, listed, quoted
from search.proof.records import Refuted
from search.trial.reading import trial_from_document
from search.trial.records import Contents, Trial

FORMAT = "evenfield plan 1"
MOST_BYTES = 1 << 26


@dataclass(frozen=True, slots=True)
class Plot:
    """A plot of the file, its block and treatment by number; filler has no treatment."""

    number: int
    block: int
    line: int
    place: int
    treatment: int | None


def document_of(path: Path) -> Any:
    """The JSON of a file as Python data.

    Raises
    ------
    BadInput : the file cannot be read, or is no JSON that every reader understands alike
    """
    return read_json(path, MOST_BYTES)


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
        block = row.text("block")
        if block not in blocks:
            raise Refuted(f"{row.where} stands in {quoted(block)}, which is no block of the trial")
        filler = row.has("filler") and row.flag("filler")
        treatment = None if filler and row.value("treatment") is None else row.text("treatment")
        if treatment is not None and (filler or treatment not in treatments):
            what = "said to be filler" if filler else "which is no treatment of the trial"
            raise Refuted(f"{row.where} holds {quoted(treatment)}, {what}")
        return Plot(
            number=row.whole("plot"),
            block=blocks[block],
            line=row.whole("line"),
            place=row.whole("place"),
            treatment=None if treatment is None else treatments[treatment],
        )

    rows = listed("plots", file.value("plots"))
    return tuple(plot(at, value) for at, value in enumerate(rows, start=1))
