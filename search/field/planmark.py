"""The short mark and the seal of a plan, both from its canonical text."""

from __future__ import annotations

import hashlib

from search.field.planshape import Document
from search.foundation.documents import canonical_json

MARK_LETTERS = "3479CDFHJKMNPQRTWXY"
"""No letter or digit that another could be taken for, and no vowel that could make a word."""


def mark_of(document: Document) -> str:
    """The short mark of a plan, from what is planted where: trial, blocks, plots and layout.

    Two packets have one mark exactly when a crew would plant the same from both.
    """
    planted = {key: document[key] for key in ("trial", "blocks", "plots", "layout")}
    number = int.from_bytes(hashlib.sha256(canonical_json(planted).encode()).digest())
    letters = []
    for _ in range(4):
        number, at = divmod(number, len(MARK_LETTERS))
        letters.append(MARK_LETTERS[at])
    return "{}{}-{}{}".format(*letters)


def seal_of(document: Document) -> str:
    """The sha256 of a plan's canonical JSON without its seal; it finds accidents, not forgers."""
    unsealed = {key: value for key, value in document.items() if key != "seal"}
    return hashlib.sha256(canonical_json(unsealed).encode()).hexdigest()
