"""A YAML or JSON document as plain nodes: raw text with its place in the file, no guessed types.

YAML's own typing would turn a variety called `No` into false, `1.10` into 1.1 and `3:20` into 200;
here every scalar stays the text that was typed, and the schema alone says what is a number.
"""

from __future__ import annotations

import math
from dataclasses import dataclass
from pathlib import Path
from typing import Any

import yaml

from search.foundation.errors import shown
from search.trial.textfile import read_text, refusal, refuse_hidden
from search.trial.yaml_slips import yaml_fault

MOST_NODES = 200_000
MOST_DEPTH = 50
MOST_BITS = 1024
"""Longer whole numbers are refused unread; Python itself would not print those of 4,300 digits."""
NOTHING = ("", "~", "null", "Null", "NULL")
"""What YAML calls nothing, unless it stands in quotes."""
ONCE = "a file that says each thing once"
WHY_ONCE = "what is not written out cannot be seen in the file, and would be planned all the same"
_Events = getattr(yaml, "CBaseLoader", yaml.BaseLoader)


@dataclass(frozen=True, slots=True)
class Node:
    """A piece of a document and where it stands (line 0: not from a file)."""

    line: int
    column: int


@dataclass(frozen=True, slots=True)
class Scalar(Node):
    """Text as typed; `quoted` tells `"12"` from `12`."""

    text: str
    quoted: bool = False

    @property
    def nothing(self) -> bool:
        """Whether the place was left empty."""
        return not self.quoted and self.text in NOTHING


@dataclass(frozen=True, slots=True)
class Sequence(Node):
    """A list."""

    items: tuple[Node, ...]


@dataclass(frozen=True, slots=True)
class Mapping(Node):
    """Keys with values, in the order of the file; keys may repeat here, and be lists."""

    pairs: tuple[tuple[Node, Node], ...]


def describe(node: Node) -> str:
    """What stands there, short enough for a message."""
    if isinstance(node, Scalar):
        return "nothing" if node.nothing else shown(node.text)
    if isinstance(node, Sequence):
        return f"a list of {len(node.items)}"
    if isinstance(node, Mapping):
        first = describe(node.pairs[0][0]) if node.pairs else ""
        return f"a mapping ({first}, …)" if first else "an empty mapping"
    raise TypeError(type(node))


def read_nodes(path: Path) -> Node:
    """The document of a YAML file.

    Raises
    ------
    FaultyTrial : no such file, not text, too large, not YAML, or YAML that hides something
    """
    return _parsed(read_text(path), str(path))


def parse_nodes(text: str, file: str) -> Node:
    """The document of a YAML text.

    Raises
    ------
    FaultyTrial : not YAML, or YAML that hides something (tags, aliases that explode)
    """
    refuse_hidden(text, file)
    return _parsed(text, file)


def nodes_of(data: Any) -> Node:
    """Plain JSON data as nodes, numbers as their shortest text.

    Raises
    ------
    FaultyTrial : something that JSON cannot hold
    """
    if data is None:
        return Scalar(0, 0, "")
    if isinstance(data, bool):
        return Scalar(0, 0, "true" if data else "false")
    if isinstance(data, str):
        return Scalar(0, 0, data, quoted=True)
    if isinstance(data, float) and math.isfinite(data):
        # JSON knows no difference between 3 and 3.0: both are whole.
        return Scalar(0, 0, str(int(data)) if data.is_integer() and abs(data) < 1e15 else repr(data))
    if isinstance(data, int):
        if data.bit_length() > MOST_BITS:
            raise _no_data("a number of hundreds of digits", "numbers that a field can have")
        return Scalar(0, 0, repr(data))
    if isinstance(data, list | tuple):
        return Sequence(0, 0, tuple(nodes_of(item) for item in data))
    if isinstance(data, dict):
        return Mapping(0, 0, tuple((nodes_of(k), nodes_of(v)) for k, v in data.items()))
    raise _no_data(shown(repr(data)), "plain data: text, numbers, lists, mappings")


def _no_data(found: str, must: str) -> Exception:
    return refusal("", found, must, "a trial is kept as JSON, and read again from it", "hand over plain data")


def _parsed(text: str, file: str) -> Node:
    try:
        return _Builder(file).document(text)
    except yaml.MarkedYAMLError as error:
        raise yaml_fault(error, text, file) from None
    except (yaml.YAMLError, ValueError) as error:
        found = shown(str(error).split("\n", 1)[0])
        why = "what cannot be read cannot be planned"
        raise refusal(file, found, "text that YAML can carry", why, "delete what is not text") from None


@dataclass(slots=True)
class _Open:
    """A list or mapping whose end is not yet read."""

    event: Any
    children: list[Node]
    size: int = 1


class _Builder:
    """Builds nodes from the parser's events, one by one, so that nothing hostile is ever unfolded."""

    def __init__(self, file: str) -> None:
        self.file = file
        self.stack: list[_Open] = []
        self.anchors: dict[str, tuple[Node, int]] = {}
        self.root: Node | None = None
        self.count = 0

    def document(self, text: str) -> Node:
        parser = _Events(text)
        try:
            while parser.check_event():
                self._take(parser.get_event())
        finally:
            parser.dispose()
        if self.root is None or (isinstance(self.root, Scalar) and self.root.nothing):
            must = "a trial: treatments, blocks and rules"
            why = "nothing is planned without a file to go by"
            raise refusal(self.file, "an empty file", must, why, "`evenfield new` writes a first one")
        return self.root

    def _take(self, event: Any) -> None:
        if isinstance(event, yaml.AliasEvent):
            self._alias(event)
        elif isinstance(event, yaml.ScalarEvent):
            self._refuse_tag(event)
            line, column = _place(event)
            self._add(Scalar(line, column, event.value, event.style not in (None, "")), event.anchor, 1)
        elif isinstance(event, yaml.CollectionStartEvent):
            self._refuse_tag(event)
            if len(self.stack) >= MOST_DEPTH:
                remedy = "look for brackets that are opened again and again"
                raise self._refusal(
                    event, "lists in lists, more than fifty deep", "the form of a trial", remedy
                )
            self.stack.append(_Open(event, []))
        elif isinstance(event, yaml.CollectionEndEvent):
            self._close()
        elif isinstance(event, yaml.DocumentStartEvent) and self.root is not None:
            remedy = "one file for each trial; delete the line `---`"
            raise self._refusal(event, "a second document after ---", "one trial in a file", remedy)

    def _close(self) -> None:
        done = self.stack.pop()
        line, column = _place(done.event)
        children = done.children
        node: Node
        if isinstance(done.event, yaml.SequenceStartEvent):
            node = Sequence(line, column, tuple(children))
        else:
            node = Mapping(line, column, tuple(zip(children[::2], children[1::2], strict=True)))
        self._add(node, done.event.anchor, done.size)

    def _add(self, node: Node, anchor: str | None, size: int) -> None:
        if anchor is not None:
            self.anchors[anchor] = node, size
        if not self.stack:
            self.root = node
            return
        self.stack[-1].children.append(node)
        self.stack[-1].size += size

    def _alias(self, event: Any) -> None:
        if event.anchor not in self.anchors:
            found = f"the alias *{event.anchor}, which nothing before it explains"
            raise self._refusal(
                event, found, "a file that says each thing once", "write it out, or in quotes"
            )
        node, size = self.anchors[event.anchor]
        self._counted(event, size)
        self._add(node, None, size)

    def _refuse_tag(self, event: Any) -> None:
        self._counted(event, 1)
        if event.tag is not None:
            remedy = "leave the tag out; put a text that begins with ! in quotes"
            raise self._refusal(event, f"the tag {shown(event.tag)}", "plain YAML without tags (!)", remedy)

    def _counted(self, event: Any, size: int) -> None:
        self.count += size
        if self.count > MOST_NODES:
            found = f"more than {MOST_NODES:,} values, aliases (&, *) unfolded"
            raise self._refusal(event, found, ONCE, "write out what is meant")

    def _refusal(self, event: Any, found: str, must: str, remedy: str) -> Exception:
        return refusal(self.file, found, must, WHY_ONCE, remedy, *_place(event))


def _place(event: Any) -> tuple[int, int]:
    return event.start_mark.line + 1, event.start_mark.column + 1
