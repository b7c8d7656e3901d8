"""Text in the fonts that are shipped: split by glyph coverage, measured, wrapped, cut.

Nothing here knows markup: a name goes to the page as glyphs and as nothing else.
"""

from __future__ import annotations

import unicodedata
from collections.abc import Iterator
from dataclasses import dataclass
from functools import cache, lru_cache
from itertools import groupby
from pathlib import Path
from typing import Any

from search.field.sheets.scripts import isolated, joined, visual

FONTS = Path(__file__).parent.parent / "fonts"
PLAIN, BOLD, EAST = "EvenfieldPlain", "EvenfieldBold", "EvenfieldEast"
FILES = {
    PLAIN: "DejaVuSansCondensed.ttf",
    BOLD: "DejaVuSansCondensed-Bold.ttf",
    EAST: "DroidSansFallback.ttf",
}
ELLIPSIS = "…"
BOX = "□"
BOX_WIDTH = 0.62
"""Width of the box for a missing glyph, in type sizes."""


@dataclass(frozen=True, slots=True)
class Run:
    """Glyphs of one font in drawing order; font None: one box in place of glyphs that no font has."""

    text: str
    font: str | None


@cache
def _font(name: str) -> Any:
    from reportlab.pdfbase import pdfmetrics
    from reportlab.pdfbase.ttfonts import TTFont

    font = TTFont(name, str(FONTS / FILES[name]))
    pdfmetrics.registerFont(font)
    return font


@cache
def _font_for(c: str, bold: bool) -> str | None:
    """The first font that has the glyph; the large one for eastern scripts is opened only on need."""
    for name in (BOLD, PLAIN, EAST) if bold else (PLAIN, EAST):
        if ord(c) in _font(name).face.charToGlyph:
            return name
    return None


def readable(text: str) -> bool:
    """Whether every letter of a text has a glyph."""
    return all(_font_for(c, False) for c in visual(joined(text)) if not c.isspace())


def named(name: str, number: int) -> str:
    """A treatment's name for a sentence, with its number where the fonts cannot spell it."""
    return isolated(name) if readable(name) else f"{isolated(name)} (treatment {number})"


@lru_cache(maxsize=4096)
def runs(line: str, bold: bool = False) -> tuple[Run, ...]:
    """A line as it is drawn from left to right."""
    found = groupby(visual(joined(line)), key=lambda c: _font_for(c, bold))
    return tuple(Run("".join(letters) if font else BOX, font) for font, letters in found)


def width(line: str, size: float, bold: bool = False) -> float:
    """Width of a line in points."""
    return sum(run_width(run, size) for run in runs(line, bold))


def run_width(run: Run, size: float) -> float:
    """Width of a run in points."""
    if run.font is None:
        return BOX_WIDTH * size
    return float(_font(run.font).stringWidth(run.text, size))


@lru_cache(maxsize=4096)
def cut(line: str, size: float, room: float, bold: bool = False) -> str:
    """The line, or as much of its beginning as fits with an ellipsis."""
    if width(line, size, bold) <= room:
        return line
    kept = list(_clusters(line))
    while kept and width("".join(kept).rstrip() + ELLIPSIS, size, bold) > room:
        kept.pop()
    return "".join(kept).rstrip() + ELLIPSIS


@lru_cache(maxsize=4096)
def wrapped(
    text: str, size: float, room: float, bold: bool = False, most: int | None = None
) -> tuple[str, ...]:
    """The text in lines that fit; broken between words, within them only where one is too long.

    Parameters
    ----------
    text : one paragraph
    size : type size in points
    room : width of a line in points
    most : lines allowed; what is left after them is cut with an ellipsis
    """
    lines = [""]
    for piece in _pieces(text, size, room, bold):
        if lines[-1] and width((lines[-1] + piece).rstrip(), size, bold) > room:
            lines.append("")
        lines[-1] += piece.lstrip() if not lines[-1] else piece
    if most is not None and len(lines) > most:
        rest = "".join(lines[most - 1 :])
        lines[most - 1 :] = [cut(rest, size, room, bold)]
    return tuple(line.rstrip() for line in lines)


def _pieces(text: str, size: float, room: float, bold: bool) -> Iterator[str]:
    """Words with the blank after them; one that is wider than a line comes letter by letter."""
    for word in text.split():
        if width(word, size, bold) <= room:
            yield word + " "
        else:
            yield from _clusters(word)
            yield " "


def _clusters(text: str) -> Iterator[str]:
    """Letters with the accents that belong to them."""
    cluster = ""
    for c in text:
        if cluster and not unicodedata.combining(c):
            yield cluster
            cluster = ""
        cluster += c
    if cluster:
        yield cluster
