"""Text that spreadsheets read as text."""

from __future__ import annotations

import re

FORMULA = re.compile(r"(^|[;|])(\s*)(?=[=+\-@＝＋－＠])")
"""Where a spreadsheet might take text for a formula: at the start of a cell, and after a semicolon or
bar, which some countries' settings take for the end of a cell."""


def inert(text: str) -> str:
    """The text with an apostrophe wherever a spreadsheet might see a formula begin."""
    return FORMULA.sub(r"\1\2'", text)
