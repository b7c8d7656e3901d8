"""The form that a plan must have before anybody relies on it."""

from __future__ import annotations

import re
from dataclasses import dataclass
from typing import Any

Document = dict[str, Any]
ANY_KEY = "*"
"""Stands for keys that are names."""


@dataclass(frozen=True, slots=True)
class Optional:
    """A shape for a value that may be missing."""

    shape: Any


FLAG = Optional(bool)
_NUMBER = (int, float)
_MAYBE = (int, float, type(None))
RESTRICTION = Optional(
    {
        "method": str,
        "uniform": bool,
        "told": str,
        "never": [{"plot": int, "treatment": str}],
        "never_complete": bool,
    }
)
SHAPE: Document = {
    "mark": str,
    "issued": re.compile(r"\d{4}-\d\d-\d\dT\d\d:\d\d:\d\dZ", re.ASCII),
    "trial": dict,
    "blocks": {ANY_KEY: [str]},
    "plots": [
        {"plot": int, "block": str, "line": int, "place": int, "treatment": Optional(str), "filler": FLAG}
    ],
    "layout": {"seed": int, "scheme": str, "restriction": RESTRICTION},
    "score": {
        "aim": _NUMBER,
        "residual_df": int,
        "connected": bool,
        "average_pair_variance": Optional(_NUMBER),
        "largest_pair_variance": Optional(_NUMBER),
        "loss_to_replication_percent": Optional(_NUMBER),
        "loss_to_blocks_percent": Optional(_NUMBER),
        "meetings": Optional({"least": int, "most": int}),
    },
    "bound": (dict, type(None)),
    "gap_percent": _MAYBE,
    "standing": re.compile("balanced|proven optimal|bounded|feasible"),
    "seal": str,
}
"""What the packet reads of a plan; `verify` looks at everything else."""


def misfit(document: Document) -> str:
    """The first place at which a plan lacks what its readers need, in words; empty where it has it all."""
    return _misfit(document, SHAPE, "")


def _misfit(value: Any, shape: Any, where: str) -> str:
    """The first place at which a value has not the shape that it must have, or an empty text."""
    if isinstance(shape, Optional):
        return "" if value is None else _misfit(value, shape.shape, where)
    if isinstance(shape, dict):
        if not isinstance(value, dict):
            return f"{where} is not an object"
        wanted = dict.fromkeys(value, shape[ANY_KEY]) if ANY_KEY in shape else shape
        inner = ((f"{where}.{key}".lstrip("."), value.get(key), part) for key, part in wanted.items())
        return next(filter(None, (_misfit(found, part, at) for at, found, part in inner)), "")
    if isinstance(shape, list):
        if not isinstance(value, list):
            return f"{where} is not a list"
        items = (_misfit(item, shape[0], f"{where}[{at}]") for at, item in enumerate(value, 1))
        return next(filter(None, items), "")
    if isinstance(shape, re.Pattern):
        whole = isinstance(value, str) and shape.fullmatch(value) is not None
        return "" if whole else f"{where} is not one of the forms it may have"
    kinds = shape if isinstance(shape, tuple) else (shape,)
    fits = isinstance(value, kinds) and (bool in kinds or not isinstance(value, bool))
    return "" if fits else f"{where} is missing or of the wrong kind"
