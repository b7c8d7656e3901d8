"""Text measured, split by glyphs, wrapped and cut."""

from __future__ import annotations

from hypothesis import given, settings
from hypothesis import strategies as st

from search.field.sheets.lettering import (
    BOLD,
    EAST,
    FILES,
    FONTS,
    PLAIN,
    cut,
    named,
    readable,
    runs,
    width,
    wrapped,
)

WORDS = st.text(st.sampled_from("abc xyz éß小麦אב\u0301"), max_size=80).map(
    lambda text: " ".join(text.split())
)


def test_fonts_are_shipped_with_their_licences() -> None:
    """Every font file is there, and a licence beside it."""
    assert all((FONTS / name).is_file() for name in FILES.values())
    assert len(list(FONTS.glob("LICENSE*"))) == 2


def test_text_is_split_by_the_fonts_that_have_its_glyphs() -> None:
    """Latin in the plain font, eastern letters in theirs, a script that no font has as one box."""
    assert [(run.text, run.font) for run in runs("Low 小麦")] == [("Low ", PLAIN), ("小麦", EAST)]
    assert [run.font for run in runs("Low", bold=True)] == [BOLD]
    assert [(run.text, run.font) for run in runs("गेहूँ")] == [("□", None)]


def test_a_name_that_cannot_be_spelled_is_numbered() -> None:
    """The reader of the paper finds the treatment by its number."""
    assert readable("Arlen 小麦 קמח قمح")
    assert named("Arlen", 3) == "Arlen"
    assert named("गेहूँ", 3).endswith("(treatment 3)")


@settings(max_examples=60, deadline=None)
@given(WORDS, st.floats(30, 200))
def test_wrapped_lines_fit_and_lose_nothing(text: str, room: float) -> None:
    """Every line fits the room, and together they hold the text."""
    lines = wrapped(text, 10, room)
    assert all(width(line, 10) <= room + 1e-6 for line in lines)
    assert "".join(lines).replace(" ", "") == text.replace(" ", "")


@settings(max_examples=60, deadline=None)
@given(WORDS, st.floats(30, 200), st.integers(1, 3))
def test_cut_text_fits(text: str, room: float, most: int) -> None:
    """A line that is cut fits; a paragraph has no more lines than allowed."""
    assert width(cut(text, 10, room), 10) <= room + 1e-6
    lines = wrapped(text, 10, room, most=most)
    assert len(lines) <= most
    assert all(width(line, 10) <= room + 1e-6 for line in lines)


def test_what_is_cut_says_so() -> None:
    """A name that fits stays whole; one that does not ends in an ellipsis."""
    assert cut("Arlen", 10, 100) == "Arlen"
    assert cut("x" * 200, 10, 100).endswith("…")
    assert wrapped("one two three four five", 10, 40, most=2)[-1].endswith("…")
