"""QR codes as runs of dark squares, row by row: far fewer strokes than square by square."""

from __future__ import annotations

from functools import cache
from itertools import groupby

from search.field.sheets.palette import INK, Colour
from search.field.sheets.sheet import Sheet

MASK = 3
"""Any of the eight masks can be read; trying all of them takes five times as long."""
QUIET = 2
"""Squares of white around a code; the paper beside it gives the rest of the four that the norm asks."""


def qr_code(sheet: Sheet, text: str, x: float, y: float, size: float, ink: Colour = INK) -> None:
    """Draw the code of a short text in a square whose top left corner is (x, y)."""
    import segno

    rows = segno.make_qr(text, error="m", boost_error=False, mask=MASK).matrix
    step = size / (len(rows) + 2 * QUIET)
    runs = []
    for row, squares in enumerate(rows):
        column = 0
        for dark, run in groupby(squares):
            long = sum(1 for _ in run)
            if dark:
                runs.append(_run(column, len(rows) - 1 - row, long))
            column += long
    sheet.strokes(x + QUIET * step, y + size - QUIET * step, step, runs, ink)


@cache
def _run(column: int, row: int, long: int) -> str:
    return f"{column} {row} {long} 1 re"
