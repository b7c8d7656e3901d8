"""Pieces stacked down a page, and on to the next when it is full."""

from __future__ import annotations

from collections.abc import Callable, Sequence
from dataclasses import dataclass

from search.field.sheets.lettering import wrapped
from search.field.sheets.palette import INK, Colour
from search.field.sheets.sheet import FOOT, MARGIN, Page, Sheet

Draw = Callable[[Sheet, float], None]
"""Draws a piece with its upper edge at the height given."""


@dataclass(frozen=True, slots=True)
class Piece:
    """Something of a known height.

    Parameters
    ----------
    height : in points, white space included
    draw : draws it below a given height
    clings : stands on one page with the piece after it
    context : stands above the piece once more where that comes first on a page
    blank : nothing to see: where the page is full it is dropped, and never opens another
    """

    height: float
    draw: Draw
    clings: bool = False
    context: Piece | None = None
    blank: bool = False


def space(height: float) -> Piece:
    """White space."""
    return Piece(height, lambda sheet, top: None, blank=True)


def paragraph(
    text: str,
    x: float,
    room: float,
    *,
    size: float = 10,
    leading: float = 14,
    bold: bool = False,
    ink: Colour = INK,
    after: float = 0,
    most: int | None = None,
) -> Piece:
    """A paragraph from x on, `room` wide."""
    lines = wrapped(text, size, room, bold, most)

    def draw(sheet: Sheet, top: float) -> None:
        for number, line in enumerate(lines):
            sheet.text(x, top + size + number * leading, line, size, bold=bold, ink=ink)

    return Piece(len(lines) * leading + after, draw)


def beside(*pieces: Piece) -> Piece:
    """Pieces that start at one height; as high as the highest."""

    def draw(sheet: Sheet, top: float) -> None:
        for piece in pieces:
            piece.draw(sheet, top)

    return Piece(max(piece.height for piece in pieces), draw)


def below(*pieces: Piece) -> Piece:
    """Pieces one under the other that are never parted."""

    def draw(sheet: Sheet, top: float) -> None:
        for piece in pieces:
            piece.draw(sheet, top)
            top += piece.height

    return Piece(sum(piece.height for piece in pieces), draw)


def pages_of(pieces: Sequence[Piece], size: tuple[float, float], head: Piece | None = None) -> list[Page]:
    """Pages that hold the pieces in order.

    Parameters
    ----------
    pieces : one under the other; a piece higher than a page gets a page of its own
    size : width and height of the paper
    head : stands again at the top of every page
    """
    top = MARGIN + (head.height if head else 0)
    room = size[1] - FOOT - MARGIN * 0.6 - top
    stacks: list[list[Piece]] = [[]]
    used = 0.0
    for group in _clinging(pieces):
        height = sum(piece.height for piece in group)
        if stacks[-1] and used + height > room:
            if all(piece.blank for piece in group):
                continue
            context = group[0].context
            stacks.append([context] if context else [])
            used = context.height if context else 0.0
        stacks[-1] += group
        used += height
    return [Page(size, _drawing(head, top, stack)) for stack in stacks]


def _clinging(pieces: Sequence[Piece]) -> list[list[Piece]]:
    groups: list[list[Piece]] = []
    held = False
    for piece in pieces:
        if held:
            groups[-1].append(piece)
        else:
            groups.append([piece])
        held = piece.clings
    return groups


def _drawing(head: Piece | None, top: float, stack: Sequence[Piece]) -> Callable[[Sheet], None]:
    def draw(sheet: Sheet) -> None:
        if head is not None:
            head.draw(sheet, MARGIN)
        below(*stack).draw(sheet, top)

    return draw
