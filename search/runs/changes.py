"""Values put into a trial's document in the place of others, by the keys that lead there."""

from __future__ import annotations

from collections.abc import Sequence as Keys
from dataclasses import dataclass

from search.foundation.errors import Fault, FaultyTrial, did_you_mean, shown
from search.trial.nodes import Mapping, Node, Scalar, Sequence, describe

NAMED = ("treatments", "blocks")
"""Under these keys stand names of the planner's own: one that is not there is a slip, not a new name."""
MOST_SHOWN = 200


@dataclass(frozen=True, slots=True)
class Change:
    """A value for one place of a trial.

    Parameters
    ----------
    path : the keys that lead to the place
    key : where the sweep file names the place
    value : what is put there; nothing, or `~`, leaves the last key out
    """

    path: tuple[str, ...]
    key: Node
    value: Node

    @property
    def column(self) -> str:
        """The dotted key."""
        return dotted(self.path)

    def concerns(self, fault: Fault) -> bool:
        """Whether a fault lies in the value that was put there."""
        return fault.key == self.column or fault.key.startswith((f"{self.column}.", f"{self.column}["))


def dotted(path: Keys[str]) -> str:
    """Keys in one word."""
    return ".".join(path)


def changed(document: Mapping, change: Change) -> Mapping:
    """The document with one value in the place of another.

    Raises
    ------
    FaultyTrial : the keys lead through something that has none, or to a name that is not there
    """
    return _put(document, change, 0)


def _put(node: Node, change: Change, depth: int) -> Mapping:
    pairs = _pairs(node, change, depth)
    name, is_last = change.path[depth], depth + 1 == len(change.path)
    at = next((i for i, (key, _) in enumerate(pairs) if _is_called(key, name)), len(pairs))
    if at == len(pairs) and not is_last and dotted(change.path[:depth]) in NAMED:
        names = [key.text for key, _ in pairs if isinstance(key, Scalar)]
        raise _astray(change, depth, f"no {shown(name)}", "a name that is there", did_you_mean(name, names))
    key, old = pairs[at] if at < len(pairs) else (_key(change.key, name), NOTHING)
    put: tuple[tuple[Node, Node], ...] = ()
    if not is_last:
        put = ((key, _put(old, change, depth + 1)),)
    elif not is_nothing(change.value):
        put = ((key, change.value),)
    return Mapping(node.line, node.column, (*pairs[:at], *put, *pairs[at + 1 :]))


def _pairs(node: Node, change: Change, depth: int) -> tuple[tuple[Node, Node], ...]:
    if isinstance(node, Mapping):
        return node.pairs
    if is_nothing(node):
        return ()
    raise _astray(change, depth, describe(node), "names with settings, `name: {…}`")


def _astray(change: Change, depth: int, found: str, must: str, remedy: str = "") -> FaultyTrial:
    place = dotted(change.path[:depth])
    why = f"{change.column} leads through {place}, and would change nothing"
    at = change.key
    return FaultyTrial(
        [Fault(change.column, f"{found} in {place}", must, why, remedy, "", at.line, at.column)]
    )


NOTHING = Scalar(0, 0, "")


def is_nothing(node: Node) -> bool:
    """Whether nothing stands there: no text, or the `~` of YAML."""
    return isinstance(node, Scalar) and not node.quoted and node.text.strip() in ("", "~")


def _is_called(key: Node, name: str) -> bool:
    return isinstance(key, Scalar) and key.text.strip() == name


def _key(place: Node, name: str) -> Scalar:
    return Scalar(place.line, place.column, name)


def in_short(node: Node) -> str:
    """A value in one line, as it could be typed."""
    text = " ".join(_text(node).split())
    return text if len(text) <= MOST_SHOWN else text[: MOST_SHOWN - 1] + "…"


def _text(node: Node) -> str:
    if isinstance(node, Sequence):
        return "[" + ", ".join(map(_text, node.items)) + "]"
    if isinstance(node, Mapping):
        return "{" + ", ".join(f"{_text(key)}: {_text(value)}" for key, value in node.pairs) + "}"
    return node.text if isinstance(node, Scalar) else ""
