"""Pieces on pages."""

from __future__ import annotations

from search.field.sheets.flow import Piece, pages_of, space
from search.field.sheets.sheet import Sheet

SIZE = (500.0, 400.0)


class Written:
    """Collects what was drawn, in place of a page."""

    def __init__(self) -> None:
        self.pieces: list[tuple[str, float]] = []

    def piece(self, name: str, height: float, clings: bool = False, context: Piece | None = None) -> Piece:
        """A piece that only says that it was drawn, and where."""
        return Piece(height, lambda sheet, top: self.pieces.append((name, top)), clings, context)

    def pages(self, pieces: list[Piece], head: Piece | None = None) -> list[list[str]]:
        """Names of the pieces on each page."""
        pages = []
        for page in pages_of(pieces, SIZE, head):
            self.pieces = []
            page.draw(Sheet(None, *page.size))
            pages.append([name for name, _ in self.pieces])
        return pages


def test_pieces_fill_a_page_and_go_on() -> None:
    """Three pieces of 120 points: two to a page; the head stands on both."""
    written = Written()
    pieces = [written.piece(name, 120) for name in "abc"]
    assert written.pages(pieces, written.piece("head", 20)) == [["head", "a", "b"], ["head", "c"]]


def test_a_heading_goes_with_what_follows() -> None:
    """A piece that clings is not left alone at the foot of a page."""
    written = Written()
    pieces = [written.piece("a", 250), written.piece("heading", 30, clings=True), written.piece("b", 100)]
    assert written.pages(pieces) == [["a"], ["heading", "b"]]


def test_a_page_that_begins_inside_a_part_says_which() -> None:
    """The context of a piece is repeated where the piece comes first on a page, and only there."""
    written = Written()
    again = written.piece("again", 10)
    pieces = [written.piece(name, 140, context=again) for name in "abc"]
    assert written.pages(pieces) == [["a", "b"], ["again", "c"]]


def test_a_piece_higher_than_a_page_stands_alone() -> None:
    """It is drawn once, on a page of its own."""
    written = Written()
    pieces = [written.piece("a", 10), written.piece("high", 900), written.piece("b", 10)]
    assert written.pages(pieces) == [["a"], ["high"], ["b"]]


def test_white_space_never_opens_a_page() -> None:
    """Space after the last piece of a full page is dropped: nobody is handed an empty sheet."""
    written = Written()
    pieces = [written.piece(name, 120) for name in "ab"]
    assert written.pages([*pieces, space(200)]) == [["a", "b"]]
