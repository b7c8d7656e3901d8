"""Text that is safe to print."""

from __future__ import annotations

from hypothesis import given
from hypothesis import strategies as st

from search.field.wording import clean, counted, listed


def test_steering_characters_are_taken_out() -> None:
    """Controls, direction marks, lone surrogates and line ends never reach a page."""
    assert clean("a\x1b[31mb\x00\u202ec\u2028d\ud800e") == "a[31mbc de"
    assert clean("  two\t\n words\u00a0here ") == "two words here"
    assert clean("e\u0301lan") == "élan"


@given(st.text())
def test_cleaning_twice_changes_nothing(text: str) -> None:
    """What is clean stays as it is."""
    assert clean(clean(text)) == clean(text)


def test_counts_and_lists_read_as_english() -> None:
    """One plot, two plots; A, B and C."""
    assert (counted(1, "plot"), counted(2, "plot")) == ("1 plot", "2 plots")
    assert listed([]) == ""
    assert listed(["A"]) == "A"
    assert listed(["A", "B"]) == "A and B"
    assert listed(["A", "B", "C"]) == "A, B and C"
    assert listed(list("ABCDE"), most=3) == "A, B and 3 more"
