"""Where the faults of one file are gathered, and what the kinds of the grammar read into."""

from __future__ import annotations

from dataclasses import dataclass, field
from typing import Any, Protocol

from search.foundation.errors import Fault, FaultyTrial
from search.trial.nodes import Node
from search.trial.words import words_of

Schema = dict[str, Any]
MOST_FAULTS = 200


class Kind(Protocol):
    """What may stand at some place of the file."""

    def read(self, node: Node, key: str, report: Report) -> Any:
        """The value of a node, or None after reporting what is wrong with it."""

    def schema(self) -> Schema:
        """The kind as a JSON schema."""


@dataclass(slots=True)
class Report:
    """Collects the faults of one file; raises them all once they are `MOST_FAULTS`."""

    file: str
    faults: list[Fault] = field(default_factory=list)

    def add(
        self, node: Node | None, key: str, found: str, must: str, why: str = "", remedy: str = ""
    ) -> None:
        """Note one fault at a node; why it matters and an example are those of the key where left out."""
        line, column = (node.line, node.column) if node is not None else (0, 0)
        words = words_of(key)
        why = why or words.why
        remedy = remedy or f"for example  {words.example}"
        self.faults.append(Fault(key, found, must, why, remedy, self.file, line, column))
        if len(self.faults) >= MOST_FAULTS:
            raise self.faulty()

    def faulty(self) -> FaultyTrial:
        """All faults in the order of the file; where there are very many, the last one says so."""
        faults = sorted(self.faults, key=lambda fault: (fault.line, fault.column))
        if len(faults) >= MOST_FAULTS:
            why = "so many are seldom mistakes one by one: this may be another kind of file"
            found, must = f"{MOST_FAULTS} faults, and nobody looked further", "a trial file"
            faults.append(Fault("", found, must, why, "mend the first of them and look again", self.file))
        return FaultyTrial(faults)


class Section(dict[str, Any]):
    """Values by key, with the nodes they came from."""

    def __init__(self) -> None:
        super().__init__()
        self.where: dict[str, Node] = {}
        self.key_at: dict[str, Node] = {}


class Items(list[Any]):
    """Values in order, with the nodes they came from."""

    def __init__(self) -> None:
        super().__init__()
        self.where: list[Node] = []
