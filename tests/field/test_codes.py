"""Treatment codes: short, all different, never taken for a plot number."""

from __future__ import annotations

from hypothesis import given
from hypothesis import strategies as st

from search.field.codes import treatment_codes


def test_names_give_codes_that_people_would_choose() -> None:
    """First letters, initials, initials with a number, or the short name itself."""
    assert treatment_codes(["Arlen", "Bracken", "Clover"]) == ("AR", "BR", "CL")
    assert treatment_codes(["T01", "T02", "T100"]) == ("T01", "T02", "T100")
    assert treatment_codes(["Line 1", "Line 12", "Low Moor gold"]) == ("L1", "L12", "LMG")
    assert treatment_codes(["Entry 0429", "Élan 7"]) == ("E429", "E7")
    assert treatment_codes(["Arlen", "Arbor", "Arden", "arno"]) == ("AR", "AB", "AD", "AN")


def test_a_name_of_digits_gets_a_sign() -> None:
    """A line called 101 is not to be mistaken for plot 101."""
    assert treatment_codes(["101", "012", "1.10"]) == ("#101", "#012", "#110")


def test_a_name_without_latin_letters_gets_its_number() -> None:
    """The code is the number in the file, also where the digits of another name have taken it."""
    assert treatment_codes(["小麦", "אב"]) == ("#1", "#2")
    assert treatment_codes(["2", "小麦"]) == ("#2", "#2b")


@given(st.lists(st.text(min_size=1, max_size=8), unique=True, max_size=60))
def test_codes_differ_even_without_case(names: list[str]) -> None:
    """Any names get codes that differ in more than case."""
    codes = treatment_codes(names)
    assert len({code.casefold() for code in codes}) == len(names)


def test_a_thousand_alike_names_get_codes() -> None:
    """Long names that differ only at the end still get different codes, and quickly."""
    codes = treatment_codes([f"Breeding line of the second cycle {i:05d}" for i in range(1200)])
    assert len(set(codes)) == 1200
    assert max(map(len, codes)) <= 6
