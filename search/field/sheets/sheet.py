"""One sheet of paper to draw on: points, measured from the top left corner, text by its baseline."""

from __future__ import annotations

from collections.abc import Callable, Iterator, Sequence
from contextlib import contextmanager
from dataclasses import dataclass
from typing import Any

from search.field.sheets.lettering import BOX_WIDTH, run_width, runs, width
from search.field.sheets.palette import HAIR, INK, WARNING, WHITE, Colour

MM = 72 / 25.4
PAPERS = {"A4": (210 * MM, 297 * MM), "letter": (8.5 * 72, 11 * 72)}
MARGIN = 15 * MM
FOOT = 12 * MM
"""Height of the strip at the bottom that belongs to mark, date and page number."""
HAIRLINE = 0.5


@dataclass(frozen=True, slots=True)
class Page:
    """A page still to be drawn."""

    size: tuple[float, float]
    draw: Callable[[Sheet], None]


class Sheet:
    """A page of the document while it is drawn.

    Parameters
    ----------
    canvas : the page of the PDF library
    page_width, page_height : in points
    """

    def __init__(self, canvas: Any, page_width: float, page_height: float) -> None:
        self.canvas = canvas
        self.page_width = page_width
        self.page_height = page_height

    @property
    def left(self) -> float:
        """Left edge of the area to draw in."""
        return MARGIN

    @property
    def right(self) -> float:
        """Right edge of the area to draw in."""
        return self.page_width - MARGIN

    def text(
        self,
        x: float,
        y: float,
        line: str,
        size: float,
        *,
        bold: bool = False,
        ink: Colour = INK,
        align: float = 0.0,
    ) -> float:
        """Draw a line of text and give its width; align 0 starts at x, 0.5 centres, 1 ends at x."""
        total = width(line, size, bold)
        at = x - align * total
        self.canvas.setFillColorRGB(*ink)
        for run in runs(line, bold):
            step = run_width(run, size)
            if run.font is None:
                self._missing(at, y, size, ink)
            else:
                self.canvas.setFont(run.font, size)
                self.canvas.drawString(at, self.page_height - y, run.text)
            at += step
        return total

    def _missing(self, x: float, y: float, size: float, ink: Colour) -> None:
        """The box that stands for letters without glyphs."""
        high = 0.7 * size
        left, wide = x + 0.08 * size, (BOX_WIDTH - 0.16) * size
        self.box(left, y - high, wide, high, stroke=ink, weight=0.6)
        self.canvas.setFillColorRGB(*ink)

    def line(
        self,
        x1: float,
        y1: float,
        x2: float,
        y2: float,
        *,
        weight: float = HAIRLINE,
        ink: Colour = HAIR,
    ) -> None:
        """Draw a straight line."""
        self.canvas.setStrokeColorRGB(*ink)
        self.canvas.setLineWidth(weight)
        self.canvas.setLineCap(1)
        self.canvas.line(x1, self.page_height - y1, x2, self.page_height - y2)

    def box(
        self,
        x: float,
        y: float,
        wide: float,
        high: float,
        *,
        fill: Colour | None = None,
        stroke: Colour | None = None,
        weight: float = HAIRLINE,
    ) -> None:
        """Draw a rectangle whose top left corner is (x, y)."""
        if fill is not None:
            self.canvas.setFillColorRGB(*fill)
        if stroke is not None:
            self.canvas.setStrokeColorRGB(*stroke)
            self.canvas.setLineWidth(weight)
        self.canvas.rect(
            x,
            self.page_height - y - high,
            wide,
            high,
            stroke=int(stroke is not None),
            fill=int(fill is not None),
        )

    def dot(self, x: float, y: float, radius: float, ink: Colour) -> None:
        """Draw a filled disc."""
        self.canvas.setFillColorRGB(*ink)
        self.canvas.circle(x, self.page_height - y, radius, stroke=0, fill=1)

    def shape(self, corners: Sequence[tuple[float, float]], fill: Colour) -> None:
        """Fill a polygon."""
        path = self.canvas.beginPath()
        for number, (x, y) in enumerate(corners):
            (path.lineTo if number else path.moveTo)(x, self.page_height - y)
        path.close()
        self.canvas.setFillColorRGB(*fill)
        self.canvas.drawPath(path, stroke=0, fill=1)

    def strokes(self, x: float, y: float, step: float, rectangles: Sequence[str], fill: Colour) -> None:
        """Fill many rectangles, given as PDF operators in squares of `step` up and right of (x, y)."""
        self.canvas.saveState()
        self.canvas.translate(x, self.page_height - y)
        self.canvas.scale(step, step)
        self.canvas.setFillColorRGB(*fill)
        self.canvas.addLiteral(" ".join(rectangles) + " f")
        self.canvas.restoreState()

    def caution_sign(self, x: float, y: float, size: float) -> None:
        """Draw a warning triangle that stands on the baseline y, its left corner at x."""
        half = 0.58 * size
        self.shape([(x, y), (x + 2 * half, y), (x + half, y - size)], WARNING)
        self.text(x + half, y - 0.1 * size, "!", 0.72 * size, bold=True, ink=WHITE, align=0.5)

    def arrow(self, x: float, y: float, length: float, ink: Colour = INK) -> None:
        """Draw a level arrow from (x, y); a negative length points to the left."""
        way = 1 if length > 0 else -1
        tip, head = x + length, 3.6
        self.line(x, y, tip - way * head, y, weight=1.4, ink=ink)
        self.shape([(tip, y), (tip - way * 1.8 * head, y - head), (tip - way * 1.8 * head, y + head)], ink)

    @contextmanager
    def turned(self, x: float, y: float, degrees: float) -> Iterator[None]:
        """Draw with the page turned clockwise about (x, y), which becomes the origin."""
        self.canvas.saveState()
        self.canvas.translate(x, self.page_height - y)
        self.canvas.rotate(-degrees)
        self.canvas.translate(0, -self.page_height)
        yield
        self.canvas.restoreState()
