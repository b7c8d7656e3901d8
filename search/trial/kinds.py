"""The grammar of a trial file: kinds of values, each able to read a node and to describe itself.

    Text, Lines, Whole, Number, Ratio, Flag, Choice   a scalar
    Listing, Table, Fields                       a list, names with values, fixed keys
    Either                                       one kind for each shape of node
    NotYet                                       a key of the design that this version does not do

A kind never raises for what a user typed: it reports a `Fault` and returns None, so that every mistake
of a file is told at once. The same kinds give the JSON schema, so that reader and schema cannot part.
"""

from __future__ import annotations

import re
from collections.abc import Iterable
from dataclasses import dataclass, field
from fractions import Fraction
from typing import Any, Protocol

from search.foundation.errors import Fault, did_you_mean, shown
from search.trial.nodes import Mapping, Node, Scalar, Sequence, describe

Schema = dict[str, Any]
MOST_NAME = 200


class Kind(Protocol):
    """What may stand at some place of the file."""

    def read(self, node: Node, key: str, report: Report) -> Any:
        """The value of a node, or None after reporting what is wrong with it."""

    def schema(self) -> Schema:
        """The kind as a JSON schema."""


@dataclass(slots=True)
class Report:
    """Collects the faults of one file."""

    file: str
    faults: list[Fault] = field(default_factory=list)

    def add(
        self, node: Node | None, key: str, found: str, must: str, why: str = "", remedy: str = ""
    ) -> None:
        """Note one fault at a node."""
        line, column = (node.line, node.column) if node is not None else (0, 0)
        self.faults.append(Fault(key, found, must, why, remedy, self.file, line, column))


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


@dataclass(frozen=True, slots=True)
class Text:
    """A name or free text, exactly as typed but for blanks at its ends."""

    most: int = MOST_NAME

    def read(self, node: Node, key: str, report: Report) -> str | None:
        if not isinstance(node, Scalar):
            report.add(node, key, describe(node), "a text")
            return None
        text = node.text.strip()
        if not text:
            report.add(node, key, "nothing", "a text")
        elif len(text) > self.most:
            report.add(node, key, f"{len(text):,} characters", f"at most {self.most}")
        elif any(ord(c) < 32 or 127 <= ord(c) < 160 or 0xD800 <= ord(c) < 0xE000 for c in text):
            report.add(node, key, shown(text), "a text without control characters")
        else:
            return text
        return None

    def schema(self) -> Schema:
        # A name may look like a number in the file: YAML editors then see a number.
        return {"type": ["string", "number", "boolean"], "maxLength": self.most}


@dataclass(frozen=True, slots=True)
class Lines:
    """A drawing in text: lines of printable characters."""

    most: int

    def read(self, node: Node, key: str, report: Report) -> tuple[str, ...] | None:
        must = "lines of text after `|`"
        if not isinstance(node, Scalar) or not node.text.strip():
            report.add(node, key, describe(node), must)
            return None
        lines = tuple(line.strip() for line in node.text.strip("\n").split("\n"))
        if len(node.text) > self.most or not all(line.isprintable() for line in lines):
            report.add(node, key, "characters that cannot be read on a map, or too many", must)
            return None
        return lines

    def schema(self) -> Schema:
        return {"type": "string", "maxLength": self.most}


@dataclass(frozen=True, slots=True)
class Whole:
    """A whole number within limits."""

    least: int = 0
    most: int = 10**9

    def read(self, node: Node, key: str, report: Report) -> int | None:
        must = f"a whole number from {self.least} to {self.most:,}"
        if not isinstance(node, Scalar):
            report.add(node, key, describe(node), must)
            return None
        text = node.text.strip()
        if not re.fullmatch(r"[+-]?[0-9]{1,30}", text):
            report.add(node, key, describe(node), must, remedy=_number_slip(text))
            return None
        value = int(text)
        if not self.least <= value <= self.most:
            report.add(node, key, text, must)
            return None
        return value

    def schema(self) -> Schema:
        return {"type": "integer", "minimum": self.least, "maximum": self.most}


@dataclass(frozen=True, slots=True)
class Number:
    """A decimal number within limits."""

    least: float
    most: float
    above: bool = False
    """The least value itself is excluded."""

    def read(self, node: Node, key: str, report: Report) -> float | None:
        low = f"above {self.least:g}" if self.above else f"from {self.least:g}"
        must = f"a number {low} to {self.most:g}"
        text = node.text.strip() if isinstance(node, Scalar) else ""
        if not re.fullmatch(r"[+-]?([0-9]{1,18}(\.[0-9]{0,18})?|\.[0-9]{1,18})([eE][+-]?[0-9]{1,3})?", text):
            report.add(node, key, describe(node), must, remedy=_number_slip(text))
            return None
        value = float(text)
        if not self.least <= value <= self.most or (self.above and value == self.least):
            report.add(node, key, text, must)
            return None
        return value

    def schema(self) -> Schema:
        low = "exclusiveMinimum" if self.above else "minimum"
        return {"type": "number", low: self.least, "maximum": self.most}


@dataclass(frozen=True, slots=True)
class Ratio:
    """An exact coefficient: a whole number, a decimal, or p/q."""

    positive: bool = False

    def read(self, node: Node, key: str, report: Report) -> Fraction | None:
        must = "a number above 0, or p/q" if self.positive else "a number, or p/q"
        text = node.text.strip() if isinstance(node, Scalar) else ""
        if not re.fullmatch(r"[+-]?[0-9]{1,9}(\.[0-9]{1,9}|/[1-9][0-9]{0,8})?", text):
            report.add(node, key, describe(node), must, remedy=_number_slip(text))
            return None
        value = Fraction(text)
        if self.positive and value <= 0:
            report.add(node, key, text, must)
            return None
        return value

    def schema(self) -> Schema:
        return {"type": ["number", "string"]}


@dataclass(frozen=True, slots=True)
class Flag:
    """true or false."""

    def read(self, node: Node, key: str, report: Report) -> bool | None:
        text = node.text.strip().lower() if isinstance(node, Scalar) else ""
        if text not in ("true", "false"):
            report.add(node, key, describe(node), "true or false")
            return None
        return text == "true"

    def schema(self) -> Schema:
        return {"type": "boolean"}


@dataclass(frozen=True, slots=True)
class Choice:
    """One of a few words; `not_yet` are words of the design that this version does not do."""

    words: tuple[str, ...]
    not_yet: tuple[str, ...] = ()

    def read(self, node: Node, key: str, report: Report) -> str | None:
        must = "one of: " + ", ".join(self.words)
        text = node.text.strip() if isinstance(node, Scalar) else ""
        for word in self.words:
            if text.casefold() == word.casefold():
                return word
        if text.casefold() in self.not_yet:
            report.add(node, key, shown(text), must, remedy="not yet in this version: choose another")
        else:
            report.add(node, key, describe(node), must, remedy=did_you_mean(text, self.words))
        return None

    def schema(self) -> Schema:
        return {"enum": list(self.words)}


@dataclass(frozen=True, slots=True)
class Listing:
    """A list of values of one kind."""

    item: Kind
    least: int = 0
    most: int = 100_000

    def read(self, node: Node, key: str, report: Report) -> Items | None:
        if not isinstance(node, Sequence):
            report.add(node, key, describe(node), "a list [in, brackets]")
            return None
        if not self.least <= len(node.items) <= self.most:
            wanted = f"{self.least}" if self.least == self.most else f"{self.least} or more"
            report.add(node, key, f"a list of {len(node.items)}", f"a list of {wanted}")
            return None
        items = Items()
        for number, item in enumerate(node.items, start=1):
            value = self.item.read(item, f"{key}[{number}]", report)
            if value is not None:
                items.append(value)
                items.where.append(item)
        return items

    def schema(self) -> Schema:
        return {
            "type": "array",
            "items": self.item.schema(),
            "minItems": self.least,
            "maxItems": self.most,
        }


@dataclass(frozen=True, slots=True)
class Table:
    """Names, each with a value of one kind; `empty` stands for a name without a value."""

    value: Kind
    least: int = 0
    most: int = 100_000
    empty: Any = None

    def read(self, node: Node, key: str, report: Report) -> Section | None:
        if not isinstance(node, Mapping):
            report.add(node, key, describe(node), "names with values, `name: value`")
            return None
        if not self.least <= len(node.pairs) <= self.most:
            report.add(node, key, f"{len(node.pairs)} names", f"{self.least} to {self.most:,} names")
            return None
        section = Section()
        for name_node, value_node in node.pairs:
            name = Text().read(name_node, key, report)
            if name is None:
                continue
            if name in section.where:
                report.add(
                    name_node,
                    key,
                    f"{shown(name)} a second time",
                    "each name once",
                    remedy=f"the first stands in line {section.key_at[name].line}",
                )
                continue
            section.where[name], section.key_at[name] = value_node, name_node
            if self.empty is not None and isinstance(value_node, Scalar) and not value_node.text:
                section[name] = self.empty
            else:
                value = self.value.read(value_node, f"{key}.{name}", report)
                if value is not None:
                    section[name] = value
        return section

    def schema(self) -> Schema:
        value = self.value.schema()
        return {
            "type": "object",
            "additionalProperties": value if self.empty is None else {"anyOf": [{"type": "null"}, value]},
            "minProperties": self.least,
        }


@dataclass(frozen=True, slots=True)
class Fields:
    """Fixed keys, each with its own kind; unknown keys are faults."""

    kinds: dict[str, Kind]
    required: tuple[str, ...] = ()
    slips: dict[str, str] = field(default_factory=dict)
    """Keys that users often type, and what to write instead."""

    def read(self, node: Node, key: str, report: Report) -> Section | None:
        if not isinstance(node, Mapping):
            report.add(node, key, describe(node), "keys with values: " + ", ".join(self.kinds))
            return None
        section = Section()
        for name_node, value_node in node.pairs:
            name = name_node.text.strip() if isinstance(name_node, Scalar) else describe(name_node)
            path = f"{key}.{name}" if key else name
            if name in section.where:
                report.add(
                    name_node,
                    path,
                    "the key a second time",
                    "each key once",
                    remedy=f"the first stands in line {section.key_at[name].line}",
                )
            elif name not in self.kinds:
                remedy = self.slips.get(name.casefold()) or did_you_mean(name, self.kinds)
                report.add(
                    name_node,
                    path,
                    f"the key {shown(name)}",
                    "one of: " + ", ".join(self.kinds),
                    "a key that nobody reads would be a rule that nobody keeps",
                    remedy,
                )
            else:
                section.where[name], section.key_at[name] = value_node, name_node
                value = self.kinds[name].read(value_node, path, report)
                if value is not None:
                    section[name] = value
        for name in self.required:
            if name not in section.where:
                report.add(node, f"{key}.{name}" if key else name, "nothing", f"the key {name}")
        return section

    def schema(self) -> Schema:
        known = {name: kind for name, kind in self.kinds.items() if not isinstance(kind, NotYet)}
        return {
            "type": "object",
            "properties": {name: kind.schema() for name, kind in known.items()},
            "required": list(self.required),
            "additionalProperties": False,
        }


@dataclass(frozen=True, slots=True)
class Either:
    """One kind for a scalar, one for a list, one for a mapping; `must` says it in words."""

    must: str
    scalar: Kind | None = None
    sequence: Kind | None = None
    mapping: Kind | None = None
    remedy: str = ""

    def read(self, node: Node, key: str, report: Report) -> Any:
        kind = {Scalar: self.scalar, Sequence: self.sequence, Mapping: self.mapping}[type(node)]
        if kind is None:
            report.add(node, key, describe(node), self.must, remedy=self.remedy)
            return None
        return kind.read(node, key, report)

    def schema(self) -> Schema:
        kinds: Iterable[Kind | None] = (self.scalar, self.sequence, self.mapping)
        return {"anyOf": [kind.schema() for kind in kinds if kind is not None]}


@dataclass(frozen=True, slots=True)
class NotYet:
    """A part of the design that this version refuses by name, so that no rule is silently dropped."""

    what: str

    def read(self, node: Node, key: str, report: Report) -> None:
        report.add(
            node,
            key,
            self.what,
            "what this version can plan",
            "a plan that ignored it would look as if it kept it",
            "not yet in this version: leave it out",
        )

    def schema(self) -> Schema:
        return {"not": {}}


def _number_slip(text: str) -> str:
    if re.fullmatch(r"[0-9]+,[0-9]+", text):
        return f"a decimal point: {text.replace(',', '.')}"
    if text.endswith("%"):
        return f"the number alone: {text[:-1].strip()}"
    return ""
