"""Kinds of single values: text, drawings, numbers, truth, words to choose from."""

from __future__ import annotations

import re
from dataclasses import dataclass
from fractions import Fraction

from search.foundation.errors import did_you_mean, shown
from search.trial.nodes import Node, Scalar, describe
from search.trial.report import Report, Schema
from search.trial.slips import number_slip, truth_slip
from search.trial.textfile import named_character

MOST_NAME = 200
CONTROL = r"\u0000-\u001f\u007f-\u009f\ud800-\udfff"
UNSEEN = r"\u00ad\u061c\u115f\u1160\u180e\u200b\u200e\u200f\u2028-\u202e\u2060-\u206f\u3164\ufeff"
"""Characters that show nothing, or turn the direction of those after them. The two joiners of Persian and
Indian scripts (U+200C, U+200D) are letters of their words, and stay."""
CLEAN = rf"^\s*[^\s{CONTROL}{UNSEEN}](?:[^{CONTROL}{UNSEEN}]*[^\s{CONTROL}{UNSEEN}])?\s*$"
MOST_RATIO = 10**9
DECIMAL = r"[+-]?(?:(?:0|[1-9][0-9]{0,17})(?:\.[0-9]{0,30})?|\.[0-9]{1,30})(?:[eE][+-]?[0-9]{1,3})?"
QUOTIENT = r"[+-]?[0-9]{1,9}/[1-9][0-9]{0,8}"


@dataclass(frozen=True, slots=True)
class Text:
    """A name or free text, exactly as typed but for blanks at its ends."""

    most: int = MOST_NAME

    def read(self, node: Node, key: str, report: Report) -> str | None:
        if not isinstance(node, Scalar):
            report.add(node, key, describe(node), "a text")
        elif node.nothing or not node.text.strip():
            remedy = "put it in quotes if it really is called so" if node.nothing and node.text else ""
            report.add(node, key, describe(node), "a text", remedy=remedy)
        elif len(node.text) > self.most:
            why = "it has to fit on labels and pages"
            report.add(node, key, f"{len(node.text):,} characters", f"at most {self.most}", why, "shorten it")
        elif not re.match(CLEAN, node.text):
            hidden = re.search(f"[{CONTROL}{UNSEEN}]", node.text.strip())
            found = (
                f"{shown(node.text)} with {named_character(hidden.group())}" if hidden else "a hidden sign"
            )
            why = "two names could look the same on a label and differ, or show another order of letters"
            must = "a text in one line without hidden characters"
            report.add(node, key, found, must, why, "type it again by hand")
        else:
            return node.text.strip()
        return None

    def schema(self) -> Schema:
        # A name may look like a number in the file: YAML editors then see a number.
        return {"type": ["string", "number", "boolean"], "maxLength": self.most, "pattern": CLEAN}


@dataclass(frozen=True, slots=True)
class Lines:
    """A drawing in text: lines of characters."""

    most: int

    def read(self, node: Node, key: str, report: Report) -> tuple[str, ...] | None:
        must = "lines of text after `|`"
        if not isinstance(node, Scalar) or node.nothing or not node.text.strip():
            report.add(node, key, describe(node), must)
            return None
        if len(node.text) > self.most:
            report.add(node, key, f"{len(node.text):,} characters", f"at most {self.most:,}")
            return None
        return tuple(line.strip() for line in node.text.strip("\n").split("\n"))

    def schema(self) -> Schema:
        return {"type": ["string", "number", "boolean"], "maxLength": self.most, "pattern": r"\S"}


@dataclass(frozen=True, slots=True)
class Whole:
    """A whole number within limits."""

    least: int = 0
    most: int = 10**9

    def read(self, node: Node, key: str, report: Report) -> int | None:
        must = f"a whole number from {self.least} to {self.most:,}"
        text = node.text.strip() if isinstance(node, Scalar) and not node.quoted else ""
        if not re.fullmatch(r"[+-]?(0|[1-9][0-9]{0,29})(\.0{1,30})?", text):
            report.add(node, key, describe(node), must, remedy=number_slip(node))
            return None
        value = int(text.split(".")[0])
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
        must = f"a number {low} to {self.most:,g}"
        text = node.text.strip() if isinstance(node, Scalar) and not node.quoted else ""
        if not re.fullmatch(DECIMAL, text):
            report.add(node, key, describe(node), must, remedy=number_slip(node))
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
        text = node.text if isinstance(node, Scalar) else ""
        quotient = re.fullmatch(QUOTIENT, text)
        decimal = isinstance(node, Scalar) and not node.quoted and re.fullmatch(DECIMAL, text)
        value = Fraction(text) if quotient or decimal else None
        if value is None:
            report.add(node, key, describe(node), must, remedy=number_slip(node))
        elif abs(value) > MOST_RATIO or (self.positive and value <= 0):
            report.add(node, key, text, f"{must}, at most {MOST_RATIO:,}")
        else:
            return value
        return None

    def schema(self) -> Schema:
        sign, digit = ("[+]?", "(?=[0-9]*[1-9][0-9]*/)") if self.positive else ("[+-]?", "")
        number: Schema = {"type": "number", "minimum": -MOST_RATIO, "maximum": MOST_RATIO}
        if self.positive:
            number = {"type": "number", "exclusiveMinimum": 0, "maximum": MOST_RATIO}
        return {"anyOf": [number, {"type": "string", "pattern": f"^{sign}{digit}{QUOTIENT[5:]}$"}]}


@dataclass(frozen=True, slots=True)
class Flag:
    """true or false."""

    def read(self, node: Node, key: str, report: Report) -> bool | None:
        text = node.text if isinstance(node, Scalar) and not node.quoted else ""
        if text not in ("true", "false", "True", "False", "TRUE", "FALSE"):
            report.add(node, key, describe(node), "true or false", remedy=truth_slip(node))
            return None
        return text.casefold() == "true"

    def schema(self) -> Schema:
        return {"type": "boolean"}


@dataclass(frozen=True, slots=True)
class Choice:
    """One of a few words."""

    words: tuple[str, ...]

    def read(self, node: Node, key: str, report: Report) -> str | None:
        text = node.text if isinstance(node, Scalar) else ""
        if text in self.words:
            return text
        must = "one of: " + ", ".join(self.words)
        report.add(node, key, describe(node), must, remedy=did_you_mean(text, self.words))
        return None

    def schema(self) -> Schema:
        return {"enum": list(self.words)}
