"""Inks and tints: calm in colour, told apart in grey, dark enough on light for drizzle at dawn."""

from __future__ import annotations

from collections.abc import Iterable, Sequence

Colour = tuple[float, float, float]


def _colour(hex_digits: str) -> Colour:
    red, green, blue = (int(hex_digits[at : at + 2], 16) / 255 for at in (0, 2, 4))
    return red, green, blue


INK = _colour("16211d")
QUIET = _colour("47554f")
"""For labels and hints; still above 7:1 on white."""
HAIR = _colour("b9c2bc")
ACCENT = _colour("1d5b4f")
WARNING = _colour("7a3b00")
WARNING_TINT = _colour("fbf0dd")
PANEL = _colour("f2f4ef")
WHITE = _colour("ffffff")

TINTS = tuple(
    map(
        _colour,
        ("f7f1e0", "bcd3c6", "dde1ef", "dcb49e", "e9f2ec", "d6c796", "f1dad0", "b0c1d8"),
    )
)
"""For blocks, on four steps of grey, so that neighbours can differ on a grey printer too."""


def hex_of(colour: Colour) -> str:
    """The colour as `#rrggbb`, for sheet and page."""
    return "#" + "".join(f"{round(255 * part):02x}" for part in colour)


def luminance(colour: Colour) -> float:
    """Relative luminance of a colour, 0 for black and 1 for white (WCAG 2.1)."""
    linear = [c / 12.92 if c <= 0.04045 else ((c + 0.055) / 1.055) ** 2.4 for c in colour]
    return 0.2126 * linear[0] + 0.7152 * linear[1] + 0.0722 * linear[2]


def contrast(one: Colour, other: Colour) -> float:
    """Contrast ratio of two colours, 1 to 21 (WCAG 2.1)."""
    dark, light = sorted((luminance(one), luminance(other)))
    return (light + 0.05) / (dark + 0.05)


def tints_for(blocks: int, neighbours: Iterable[tuple[int, int]]) -> tuple[Colour, ...]:
    """A tint for each block, chosen so that blocks side by side differ as much as can be in grey.

    Parameters
    ----------
    blocks : how many
    neighbours : pairs of blocks that touch on the map
    """
    touching: list[set[int]] = [set() for _ in range(blocks)]
    for one, other in neighbours:
        touching[one].add(other)
        touching[other].add(one)
    chosen: list[int] = []
    for block in range(blocks):
        beside = [chosen[other] for other in touching[block] if other < block]
        chosen.append(min(range(len(TINTS)), key=lambda tint: _cost(tint, beside, chosen)))
    return tuple(TINTS[tint] for tint in chosen)


def _cost(tint: int, beside: Sequence[int], chosen: Sequence[int]) -> tuple[bool, int, float, int]:
    """Smaller is better: unlike the neighbours in colour, then seldom used, then unlike in grey."""
    steps = [abs(luminance(TINTS[tint]) - luminance(TINTS[other])) for other in beside]
    too_close = sum(step < 0.09 for step in steps)
    return tint in beside, too_close, chosen.count(tint), tint
