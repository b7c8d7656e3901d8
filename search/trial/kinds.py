"""The grammar of a trial file: kinds of values, each able to read a node and to describe itself.

    Text, Lines, Whole, Number, Ratio, Flag, Choice   a scalar (`search.trial.scalars`)
    Listing, Table, Fields                       a list, names with values, fixed keys
    Either                                       one kind for each shape of node

A kind never raises for what a user typed: it reports a `Fault` and returns None, so that every mistake
of a file is told at once. The same kinds give the JSON schema, so that reader and schema cannot part.
"""

from __future__ import annotations

from collections.abc import Iterable
from dataclasses import dataclass, field
from typing import Any

from search.foundation.errors import did_you_mean, shown
from search.trial.nodes import Mapping, Node, Scalar, Sequence, describe
from search.trial.report import Items, Kind, Report, Schema, Section
from search.trial.scalars import MOST_NAME, Choice, Flag, Lines, Number, Ratio, Text, Whole
from search.trial.slips import list_slip, pairs_slip

__all__ = [
    "MOST_NAME",
    "Choice",
    "Either",
    "Fields",
    "Flag",
    "Items",
    "Kind",
    "Lines",
    "Listing",
    "Number",
    "Ratio",
    "Report",
    "Schema",
    "Section",
    "Table",
    "Text",
    "Whole",
]
MERGE = "<<"


@dataclass(frozen=True, slots=True)
class Listing:
    """A list of values of one kind."""

    item: Kind
    least: int = 0
    most: int = 100_000

    def read(self, node: Node, key: str, report: Report) -> Items | None:
        if not isinstance(node, Sequence):
            report.add(node, key, describe(node), "a list [in, brackets]", remedy=list_slip(node))
            return None
        if isinstance(self.item, Listing) and node.items and _all_scalars(node):
            names = ", ".join(item.text for item in node.items if isinstance(item, Scalar))
            remedy = f"a second pair of brackets: [[{names[:60]}]]"
            report.add(node, key, "one list of names", "a list of lists", remedy=remedy)
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
    """Names, each with a value of one kind; `empty` stands for a name without a value.

    `reserved` are names that have a kind of their own.
    """

    value: Kind
    least: int = 0
    most: int = 100_000
    empty: Any = None
    reserved: dict[str, Kind] = field(default_factory=dict)

    def read(self, node: Node, key: str, report: Report) -> Section | None:
        if not isinstance(node, Mapping):
            must = "names with values, `name: value`"
            report.add(node, key, describe(node), must, remedy=pairs_slip(node))
            return None
        if not self.least <= len(node.pairs) <= self.most:
            report.add(node, key, f"{len(node.pairs)} names", f"{self.least} to {self.most:,} names")
            return None
        section = Section()
        for name_node, value_node in node.pairs:
            name = Text().read(name_node, key, report)
            if name is None or _is_merge(name_node, key, report):
                continue
            if name in section.where:
                _twice(name_node, key, f"{shown(name)} a second time", section, name, report)
                continue
            section.where[name], section.key_at[name] = value_node, name_node
            if self.empty is not None and isinstance(value_node, Scalar) and value_node.nothing:
                section[name] = self.empty
            else:
                kind = self.reserved.get(name, self.value)
                value = kind.read(value_node, f"{key}.{name}", report)
                if value is not None:
                    section[name] = value
        return section

    def schema(self) -> Schema:
        value = self.value.schema()
        return {
            "type": "object",
            "properties": {name: kind.schema() for name, kind in self.reserved.items()},
            "propertyNames": {
                "type": "string",
                "maxLength": MOST_NAME,
                "pattern": Text().schema()["pattern"],
            },
            "additionalProperties": value if self.empty is None else {"anyOf": [{"type": "null"}, value]},
            "minProperties": self.least,
            "maxProperties": self.most,
        }


@dataclass(frozen=True, slots=True)
class Fields:
    """Fixed keys, each with its own kind; unknown keys are faults."""

    kinds: dict[str, Kind]
    required: tuple[str, ...] = ()
    slips: dict[str, str] = field(default_factory=dict)
    """Keys that users often type, and what to write instead."""
    one_of: tuple[str, ...] = ()
    """At least one of these keys must be there."""

    def read(self, node: Node, key: str, report: Report) -> Section | None:
        if not isinstance(node, Mapping):
            must = "keys with values: " + ", ".join(self.kinds)
            empty = isinstance(node, Scalar) and node.nothing
            remedy = "leave the key out, or write something under it" if empty and key else pairs_slip(node)
            report.add(node, key, describe(node), must, remedy=remedy)
            return None
        section = Section()
        meant: set[str] = set()
        for name_node, value_node in node.pairs:
            name = name_node.text if isinstance(name_node, Scalar) else describe(name_node)
            path = f"{key}.{name}" if key else name
            if name in section.where:
                _twice(name_node, path, "the key a second time", section, name, report)
            elif name in self.kinds:
                section.where[name], section.key_at[name] = value_node, name_node
                value = self.kinds[name].read(value_node, path, report)
                if value is not None:
                    section[name] = value
            elif not _is_merge(name_node, key, report):
                meant.add(self._unknown(name_node, name, path, report))
        self._missing(node, section, meant, key, report)
        return section

    def _unknown(self, node: Node, name: str, path: str, report: Report) -> str:
        """Report a key that nobody knows, and hand back the one that was probably meant."""
        slip, near = self.slips.get(name.strip().casefold(), ""), did_you_mean(name, self.kinds)
        remedy = slip or near or "leave it out; `evenfield schema` lists every key"
        why = "a key that nobody reads would be a rule that nobody keeps"
        report.add(node, path, f"the key {shown(name)}", "one of: " + ", ".join(self.kinds), why, remedy)
        return next((known for known in self.kinds if slip == known or f'"{known}"' in near), "")

    def _missing(self, node: Node, section: Section, meant: set[str], key: str, report: Report) -> None:
        there = section.where.keys() | meant
        for name in self.required:
            if name not in there:
                report.add(node, f"{key}.{name}" if key else name, "nothing", f"the key {name}")
        if self.one_of and there.isdisjoint(self.one_of):
            first = f"{key}.{self.one_of[0]}" if key else self.one_of[0]
            report.add(node, first, f"neither {' nor '.join(self.one_of)}", f"{' or '.join(self.one_of)}")

    def schema(self) -> Schema:
        schema: Schema = {
            "type": "object",
            "properties": {name: kind.schema() for name, kind in self.kinds.items()},
            "required": list(self.required),
            "additionalProperties": False,
        }
        some = [name for name in self.one_of if name in self.kinds]
        return schema | {"anyOf": [{"required": [name]} for name in some]} if some else schema


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


def _all_scalars(node: Sequence) -> bool:
    return all(isinstance(item, Scalar) for item in node.items)


def _twice(node: Node, key: str, found: str, section: Section, name: str, report: Report) -> None:
    why = "of two entries only one could be kept, and nobody could tell which"
    remedy = f"delete one; the first stands in line {section.key_at[name].line}"
    report.add(node, key, found, "each of them once", why, remedy)


def _is_merge(node: Node, key: str, report: Report) -> bool:
    merge = isinstance(node, Scalar) and node.text == MERGE and not node.quoted
    if merge:
        why = "what is merged in cannot be seen where it counts"
        report.add(node, key, "the merge key <<", "a file that says each thing once", why, "write it out")
    return merge
