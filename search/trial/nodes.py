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

from search.foundation.errors import Fault, FaultyTrial, shown

MOST_BYTES = 1 << 20
MOST_NODES = 200_000
MOST_BITS = 1024
"""Longer whole numbers are refused unread; Python itself would not print those of 4,300 digits."""
PLAIN_TAGS = frozenset(f"tag:yaml.org,2002:{kind}" for kind in ("str", "seq", "map"))


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
        return shown(node.text) if node.text or node.quoted else "nothing"
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
    return parse_nodes(_text(path), str(path))


def parse_nodes(text: str, file: str) -> Node:
    """The document of a YAML text.

    Raises
    ------
    FaultyTrial : not YAML, or YAML that hides something (tags, aliases that explode)
    """
    loader = yaml.BaseLoader(text)
    try:
        root = loader.get_single_node()
        if root is None:
            raise _refusal(file, "an empty file", "a trial: treatments, blocks and rules")
        return _Converter(file).convert(root)
    except yaml.MarkedYAMLError as error:
        raise _yaml_fault(error, text, file) from None
    except (yaml.YAMLError, ValueError) as error:
        raise _refusal(file, _first_line(error), "text that YAML can carry") from None
    except RecursionError:
        raise _refusal(file, "lists in lists, hundreds deep", "the form of the README") from None
    finally:
        loader.dispose()


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
        return Scalar(0, 0, repr(data))
    if isinstance(data, int):
        if data.bit_length() > MOST_BITS:
            raise _refusal("", "a number of hundreds of digits", "numbers that a field can have")
        return Scalar(0, 0, repr(data))
    if isinstance(data, list | tuple):
        return Sequence(0, 0, tuple(nodes_of(item) for item in data))
    if isinstance(data, dict):
        return Mapping(0, 0, tuple((nodes_of(k), nodes_of(v)) for k, v in data.items()))
    raise _refusal("", shown(repr(data)), "plain data: text, numbers, lists, mappings")


class _Converter:
    def __init__(self, file: str) -> None:
        self.file = file
        self.count = 0
        self.open: set[int] = set()

    def convert(self, node: yaml.Node) -> Node:
        line, column = node.start_mark.line + 1, node.start_mark.column + 1
        self.count += 1
        if self.count > MOST_NODES or id(node) in self.open:
            raise _refusal(
                self.file,
                "aliases (&, *) that unfold without end",
                "a file that says each thing once",
                line,
                column,
            )
        if node.tag not in PLAIN_TAGS:
            raise _refusal(
                self.file, f"the tag {shown(node.tag)}", "plain YAML without tags (!)", line, column
            )
        if isinstance(node, yaml.ScalarNode):
            return Scalar(line, column, node.value, quoted=node.style is not None)
        self.open.add(id(node))
        result: Node
        if isinstance(node, yaml.SequenceNode):
            result = Sequence(line, column, tuple(self.convert(item) for item in node.value))
        else:
            pairs = tuple((self.convert(k), self.convert(v)) for k, v in node.value)
            result = Mapping(line, column, pairs)
        self.open.discard(id(node))
        return result


def _text(path: Path) -> str:
    try:
        if path.is_dir():
            raise _refusal(str(path), "a folder", "a trial file in YAML")
        if path.stat().st_size > MOST_BYTES:
            raise _refusal(str(path), f"{path.stat().st_size:,} bytes", f"at most {MOST_BYTES:,}")
        with path.open("rb") as stream:
            data = stream.read(MOST_BYTES + 1)
        if len(data) > MOST_BYTES:
            raise _refusal(str(path), "a stream without end", f"at most {MOST_BYTES:,} bytes")
        return data.decode("utf-8-sig")
    except UnicodeDecodeError as error:
        line = error.object[: error.start].count(b"\n") + 1
        raise _refusal(
            str(path), "bytes that are not UTF-8 text", "a text file saved as UTF-8", line, 1
        ) from None
    except (OSError, ValueError) as error:
        reason = getattr(error, "strerror", None) or "it cannot be opened"
        raise _refusal(str(path), reason.lower(), "a trial file that can be read") from None


def _yaml_fault(error: yaml.MarkedYAMLError, text: str, file: str) -> FaultyTrial:
    mark = error.problem_mark or error.context_mark
    line, column = (mark.line + 1, mark.column + 1) if mark else (0, 0)
    lines = text.splitlines()
    here = lines[line - 1] if 0 < line <= len(lines) else ""
    if "\t" in here:
        return _refusal(file, "a tab", "blanks before and between words", line, here.index("\t") + 1)
    remedy = "look at the blanks before this line and at colons, brackets and quotes in it"
    return FaultyTrial(
        [
            Fault(
                "",
                (error.problem or "something that is not YAML"),
                "YAML: `key: value`, one a line",
                remedy=remedy,
                file=file,
                line=line,
                column=column,
            )
        ]
    )


def _refusal(file: str, found: str, must: str, line: int = 0, column: int = 0) -> FaultyTrial:
    return FaultyTrial([Fault("", found, must, file=file, line=line, column=column)])


def _first_line(error: Exception) -> str:
    return str(error).splitlines()[0] if str(error) else "something unreadable"
