"""Raw JSON that nobody vouches for, opened key by key: every value is checked when it is taken."""

from __future__ import annotations

import math
import re
from dataclasses import dataclass
from fractions import Fraction
from typing import Any

from search.foundation.errors import shown
from search.proof.records import Refuted

MOST_DIGITS = 400
"""Longest numerator or denominator of a rational written "p/q"."""


@dataclass(frozen=True, slots=True)
class Part:
    """A JSON object of the file and the name of the place where it stands.

    Every method raises `Refuted` where the key is missing or its value is of another kind.
    """

    where: str
    content: dict[str, Any]

    @classmethod
    def of(cls, where: str, value: Any) -> Part:
        """The value as an object with keys."""
        if not isinstance(value, dict):
            raise Refuted(f"{where} is no object with keys")
        return cls(where, value)

    def at(self, key: str) -> str:
        """The name of a key's place, for a message."""
        return f"{self.where}.{key}".lstrip(".")

    def has(self, key: str) -> bool:
        """Whether the key is there with a value other than null."""
        return self.content.get(key) is not None

    def value(self, key: str) -> Any:
        """The value as it stands, null included."""
        if key not in self.content:
            raise Refuted(f"{self.at(key)} is missing")
        return self.content[key]

    def part(self, key: str) -> Part:
        """An object with keys."""
        return Part.of(self.at(key), self.value(key))

    def items(self, key: str) -> list[Any]:
        """A list."""
        return listed(self.at(key), self.value(key))

    def text(self, key: str) -> str:
        """A text that says something."""
        value = self.value(key)
        if not isinstance(value, str) or not value.strip():
            raise Refuted(f"{self.at(key)} is no text")
        return value

    def flag(self, key: str) -> bool:
        """true or false."""
        value = self.value(key)
        if not isinstance(value, bool):
            raise Refuted(f"{self.at(key)} is neither true nor false")
        return value

    def whole(self, key: str) -> int:
        """A whole number."""
        return whole(self.at(key), self.value(key))

    def number(self, key: str) -> Fraction:
        """A number, exactly as the file has it."""
        value = self.value(key)
        if isinstance(value, int) and not isinstance(value, bool):
            return Fraction(value)
        if isinstance(value, float) and math.isfinite(value):
            return Fraction(value)
        raise Refuted(f"{self.at(key)} is no finite number")

    def ratio(self, key: str) -> Fraction:
        """A rational number written as "p" or "p/q"."""
        return ratio(self.at(key), self.value(key))


def listed(where: str, value: Any) -> list[Any]:
    """The value as a list."""
    if not isinstance(value, list):
        raise Refuted(f"{where} is no list")
    return value


def whole(where: str, value: Any) -> int:
    """The value as a whole number; true and false are none."""
    if not isinstance(value, int) or isinstance(value, bool):
        raise Refuted(f"{where} is no whole number")
    return value


def ratio(where: str, value: Any) -> Fraction:
    """The value as a rational number written as "p" or "p/q"."""
    pattern = rf"-?[0-9]{{1,{MOST_DIGITS}}}(/[0-9]{{1,{MOST_DIGITS}}})?"
    if not isinstance(value, str) or not re.fullmatch(pattern, value):
        raise Refuted(f'{where} is no rational number "p/q" of at most {MOST_DIGITS} digits a side')
    over, _, under = value.partition("/")
    if under and not int(under):
        raise Refuted(f"{where} divides by 0")
    return Fraction(int(over), int(under or 1))


def told(x: Fraction) -> str:
    """A number of the file for a sentence: twelve digits at most, whatever its size."""
    if x and not Fraction(1, 10**30) < abs(x) < 10**30:
        return "a number out of all proportion"
    return f"{float(x):.12g}"


def quoted(value: Any) -> str:
    """A text of the file for a sentence; what is no text is only said to be none."""
    return shown(value) if isinstance(value, str) else "something that is no text"
