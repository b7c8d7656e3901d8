"""Records of the store as rows of its tables, and rows back as records, believed in nothing."""

from __future__ import annotations

import json
import math
from collections.abc import Mapping, Sequence
from dataclasses import fields
from fractions import Fraction
from types import NoneType
from typing import Any

from search.foundation.documents import canonical_json
from search.runs.kept import Entry, IssuedPlan, KeptBound, KeptPlan, Problem, Run
from search.trial.canonical import EMPTIER
from search.trial.records import AimKind, Contents

Row = tuple[Any, ...]
Types = Mapping[str, type | tuple[type, ...]]

MOST_DIGITS = 2000
"""Of numerator and denominator of a bound."""

PROBLEM: Types = {"digest": str, "text": str, "t": int, "b": int, "n": int, "sizes": str, "name": str}
PLAN: Types = {
    "contents": str,
    "score": float,
    "objective": (float, NoneType),
    "seed": int,
    "moves": int,
    "seconds": float,
    "start": str,
    "mark": str,
    "versions": str,
    "made": str,
    "balanced": int,
}
BOUND: Types = {"exact": str, "argument": str, "certificate": str, "versions": str, "made": str}
RUN: Types = {
    "seed": int,
    "workers": int,
    "limit_seconds": (float, NoneType),
    "limit_moves": (int, NoneType),
    "moves": int,
    "seconds": float,
    "ended_by": str,
    "score": float,
    "start": str,
    "versions": str,
    "made": str,
    "uid": str,
}
ENTRY: Types = {
    "digest": str,
    "name": str,
    "t": int,
    "b": int,
    "n": int,
    "sizes": str,
    "aim": str,
    "score": float,
    "bound": (float, NoneType),
    "gap_percent": (float, NoneType),
    "standing": str,
    "made": str,
    "mark": str,
    "runs": int,
}
ISSUED: Types = {"mark": str, "contents": str, "score": float, "made": str}


MOST_INTEGER = 2**63 - 1
"""A column holds no larger one."""


class Damaged(Exception):
    """A row has not the shape that it must have."""


def written(record: Problem | KeptPlan | KeptBound | IssuedPlan | Run) -> Row:
    """A record as a row, its columns in the order of its fields."""
    return tuple(_written(getattr(record, field.name)) for field in fields(record))


def _written(value: Any) -> Any:
    if isinstance(value, Fraction):
        return f"{value.numerator}/{value.denominator}"
    if isinstance(value, Mapping):
        return canonical_json(dict(value))
    return canonical_json(value) if isinstance(value, tuple) else value


def problem_from(row: Row) -> Problem:
    """A problem.

    Raises
    ------
    Damaged : the row is none
    """
    values = typed(row, PROBLEM)
    sizes = sizes_from(values["sizes"])
    if len(sizes) != values["b"] or sum(sizes) != values["n"]:
        raise Damaged("sizes")
    return Problem(**values | {"sizes": sizes})


def plan_from(row: Row, problem: Problem, aim: str) -> KeptPlan:
    """A plan of a problem, its shape and sizes checked; whether it obeys the rules is for others to ask.

    Raises
    ------
    Damaged : the row is none
    """
    values = typed(row, PLAN)
    _check_score(values["score"], aim)
    more = {
        "contents": _contents(values["contents"], problem),
        "versions": _versions(values["versions"]),
        "balanced": bool(values["balanced"]),
    }
    return KeptPlan(**values | more)


def bound_from(row: Row) -> KeptBound:
    """A bound; whether its certificate proves it is for others to ask.

    Raises
    ------
    Damaged : the row is none
    """
    values = typed(row, BOUND)
    return KeptBound(
        **values
        | {
            "exact": _rational(values["exact"]),
            "certificate": _certificate(values["certificate"]),
            "versions": _versions(values["versions"]),
        }
    )


def run_from(row: Row) -> Run:
    """A run.

    Raises
    ------
    Damaged : the row is none
    """
    values = typed(row, RUN)
    return Run(**values | {"versions": _versions(values["versions"])})


def issued_from(row: Row, problem: Problem, aim: str) -> IssuedPlan:
    """An issued plan of a problem for an aim.

    Raises
    ------
    Damaged : the row is none
    """
    values = typed(row, ISSUED)
    _check_score(values["score"], aim)
    return IssuedPlan(**values | {"contents": _contents(values["contents"], problem)})


def entry_from(row: Row) -> Entry:
    """A line of the list.

    Raises
    ------
    Damaged : the row is none
    """
    values = typed(row, ENTRY)
    _check_score(values["score"], values["aim"])
    return Entry(**values | {"sizes": sizes_from(values["sizes"])})


def typed(row: Row, types: Types) -> dict[str, Any]:
    """The values of a row by their columns, each of its kind, every number finite.

    Raises
    ------
    Damaged : a value is of another kind
    """
    values = dict(zip(types, row, strict=True))
    for key, kinds in types.items():
        value = values[key]
        if not isinstance(value, kinds) or (isinstance(value, float) and not math.isfinite(value)):
            raise Damaged(key)
        if isinstance(value, int) and not -MOST_INTEGER <= value <= MOST_INTEGER:
            raise Damaged(key)
    return values


def _check_score(value: float, aim: str) -> None:
    sensible = value >= 0 and value.is_integer() if aim == AimKind.EVEN_MEETINGS else 0 <= value <= 1 + 1e-9
    if not sensible:
        raise Damaged("score")


def contents_from(text: str, t: int, sizes: Sequence[int], emptier: bool = False) -> Contents:
    """Contents of blocks of these sizes, or partly empty ones, of so many treatments.

    Raises
    ------
    Damaged : the text is not that
    """
    blocks = _parsed(text, list)
    if len(blocks) != len(sizes):
        raise Damaged("contents")
    for block, size in zip(blocks, sizes, strict=True):
        if not isinstance(block, list) or not (1 if emptier else size) <= len(block) <= size:
            raise Damaged("contents")
        if not all(type(i) is int and 0 <= i < t for i in block):
            raise Damaged("contents")
    return tuple(tuple(sorted(block)) for block in blocks)


def _contents(text: str, problem: Problem) -> Contents:
    return contents_from(text, problem.t, problem.sizes, f'"{EMPTIER}"' in problem.text)


def sizes_from(text: str) -> tuple[int, ...]:
    """Plots of the blocks.

    Raises
    ------
    Damaged : the text is not that
    """
    sizes = _parsed(text, list)
    if not all(type(size) is int and size > 0 for size in sizes):
        raise Damaged("sizes")
    return tuple(sizes)


def _certificate(text: str) -> dict[str, Any]:
    certificate: dict[str, Any] = _parsed(text, dict)
    shape = {"kind": str, "statement": str, "multipliers": dict}
    if not all(isinstance(certificate.get(key), kind) for key, kind in shape.items()):
        raise Damaged("certificate")
    return certificate


def _versions(text: str) -> dict[str, str]:
    return {str(key): str(value) for key, value in _parsed(text, dict).items()}


def _rational(text: str) -> Fraction:
    top, slash, bottom = text.partition("/")
    plain = all(part.isascii() and part.isdigit() and len(part) <= MOST_DIGITS for part in (top, bottom))
    if not slash or not plain or int(top) == 0 or int(bottom) == 0:
        raise Damaged("exact")
    return Fraction(int(top), int(bottom))


def _parsed(text: str, kind: type) -> Any:
    def refuse(word: str) -> Any:
        raise ValueError(word)

    try:
        value = json.loads(text, parse_constant=refuse)
    except (ValueError, RecursionError):
        raise Damaged("JSON") from None
    if not isinstance(value, kind):
        raise Damaged("JSON")
    return value
