"""Raw JSON, opened key by key."""

from __future__ import annotations

from fractions import Fraction
from typing import Any

import pytest

from search.proof.parts import Part, quoted, told
from search.proof.records import Refuted


@pytest.mark.parametrize(
    ("reader", "value"),
    [
        ("text", 3),
        ("text", "  "),
        ("flag", 1),
        ("whole", True),
        ("whole", 1.0),
        ("number", float("nan")),
        ("number", float("inf")),
        ("number", "0.5"),
        ("number", True),
        ("ratio", 0.5),
        ("ratio", "1/0"),
        ("ratio", "1/-2"),
        ("ratio", " 1/2"),
        ("ratio", "٣/2"),
        ("ratio", "9" * 401),
        ("part", []),
        ("items", {}),
    ],
)
def test_refuses_a_value_of_another_kind(reader: str, value: Any) -> None:
    """A value of the wrong kind is refuted with the place where it stands."""
    with pytest.raises(Refuted, match=r"score\.key"):
        getattr(Part("score", {"key": value}), reader)("key")


def test_refuses_a_missing_key() -> None:
    """A missing key is refuted, a null one is no less there."""
    with pytest.raises(Refuted, match="aim is missing"):
        Part("", {}).value("aim")
    assert Part("", {"aim": None}).value("aim") is None


def test_takes_numbers_exactly() -> None:
    """Numbers are taken as the file has them, rationals in lowest terms."""
    part = Part("", {"whole": 3, "float": 0.1, "huge": 10**400, "ratio": "-4/6"})
    assert part.number("whole") == 3
    assert part.number("float") == Fraction(0.1)
    assert part.number("huge") == 10**400
    assert part.ratio("ratio") == Fraction(-2, 3)


def test_says_numbers_of_any_size() -> None:
    """A sentence can hold any number of the file, also one that no float holds."""
    assert told(Fraction(7, 9)) == "0.777777777778"
    assert told(Fraction(10**5000)) == "a number out of all proportion"
    assert told(Fraction(0)) == "0"
    assert quoted(10**5000) == "something that is no text"
