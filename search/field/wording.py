"""Text from a file, made safe to print: names are hostile until they have passed here."""

from __future__ import annotations

import unicodedata

UNPRINTABLE = frozenset({"Cc", "Cf", "Cs", "Co", "Cn", "Zl", "Zp"})


def clean(text: str) -> str:
    """The text without characters that steer a printer, a screen or the reading direction.

    Blanks of any sort become single spaces; letters are composed, so that one glyph is drawn for one.
    """
    spaced = "".join(" " if c.isspace() else c for c in text)
    visible = "".join(c for c in spaced if unicodedata.category(c) not in UNPRINTABLE)
    return " ".join(unicodedata.normalize("NFC", visible).split())


def counted(number: int, thing: str) -> str:
    """`1 plot`, `30 plots`."""
    return f"{number} {thing}" if number == 1 else f"{number} {thing}s"


def listed(names: list[str], most: int = 12) -> str:
    """`A`, `A and B`, `A, B and C`, `A, B, C and 9 more`."""
    if len(names) > most:
        names = [*names[: most - 1], f"{len(names) - most + 1} more"]
    return " and ".join(filter(None, (", ".join(names[:-1]), names[-1]))) if names else ""
