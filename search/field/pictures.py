"""Small pictures for the office sheet, made of squares: how often pairs meet, how well they compare."""

from __future__ import annotations

import base64
import struct
import zlib
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from search.field.sheets.palette import Colour, hex_of

LIGHT: Colour = (0.957, 0.949, 0.918)
MIDDLE: Colour = (0.455, 0.667, 0.596)
DARK: Colour = (0.063, 0.208, 0.2)
"""From light to dark without a step back, so that a grey print tells the same."""
BLANK: Colour = (1.0, 1.0, 1.0)
STEPS = 64
MOST_KEYS = 8
"""Different whole numbers beyond these are told as a scale."""


@dataclass(frozen=True, slots=True)
class Key:
    """A colour and what it stands for."""

    colour: str
    told: str


@dataclass(frozen=True, slots=True)
class Picture:
    """A square picture with one cell for each pair of treatments.

    Parameters
    ----------
    title, told : what it shows, and how to read it
    source : the picture itself, as a data address
    size : cells along one side
    keys : colours from the lowest to the highest
    """

    title: str
    told: str
    source: str
    size: int
    keys: tuple[Key, ...]


def picture(title: str, told: str, values: NDArray[np.float64], decimals: int) -> Picture:
    """Draw a symmetric table; its diagonal stays blank.

    Parameters
    ----------
    values : (t, t)
    decimals : of the numbers in the key
    """
    t = len(values)
    off = ~np.eye(t, dtype=np.bool_)
    low, high = float(values[off].min()), float(values[off].max())
    span = (high - low) or 1.0
    cells = 1 + np.clip((values - low) / span * (STEPS - 1), 0, STEPS - 1).round().astype(np.uint8)
    cells[~off] = 0
    scale = [_mixed(step / (STEPS - 1)) for step in range(STEPS)]
    found = sorted({round(float(x), decimals) for x in (low, high)})
    whole = decimals == 0 and high - low < MOST_KEYS
    marks = [float(x) for x in range(round(low), round(high) + 1)] if whole else [*found]
    if not whole and len(found) == 2:
        marks = [low + span * part / 4 for part in range(5)]
    keys = tuple(
        Key(hex_of(_mixed((mark - low) / span if high > low else 0.0)), f"{mark:.{decimals}f}")
        for mark in marks
    )
    return Picture(title, told, _png(cells, [BLANK, *scale]), t, keys)


def _mixed(part: float) -> Colour:
    """The colour at a part of the way from light to dark."""
    one, other, share = (LIGHT, MIDDLE, 2 * part) if part < 0.5 else (MIDDLE, DARK, 2 * part - 1)
    red, green, blue = (a + (b - a) * share for a, b in zip(one, other, strict=True))
    return red, green, blue


def _png(cells: NDArray[np.uint8], palette: list[Colour]) -> str:
    """An indexed picture in the PNG format (ISO/IEC 15948) as a data address."""
    high, wide = cells.shape
    lines = np.zeros((high, wide + 1), dtype=np.uint8)  # each line opens with the number of its filter
    lines[:, 1:] = cells
    colours = bytes(round(255 * part) for colour in palette for part in colour)
    data = (
        b"\x89PNG\r\n\x1a\n"
        + _chunk(b"IHDR", struct.pack(">IIBBBBB", wide, high, 8, 3, 0, 0, 0))
        + _chunk(b"PLTE", colours)
        + _chunk(b"IDAT", zlib.compress(lines.tobytes(), 9))
        + _chunk(b"IEND", b"")
    )
    return "data:image/png;base64," + base64.b64encode(data).decode()


def _chunk(kind: bytes, data: bytes) -> bytes:
    return struct.pack(">I", len(data)) + kind + data + struct.pack(">I", zlib.crc32(kind + data))
