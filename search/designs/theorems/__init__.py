"""Impossibility theorems: each takes parameters and says why no such design exists, or nothing.

To add one: a file here with one function and its source, and its name in the registry below.
"""

from __future__ import annotations

from collections.abc import Callable

from search.designs.conditions import Balanced
from search.designs.theorems.literature import published
from search.designs.theorems.quasi_residual import hall_connor
from search.designs.theorems.resolvable import bose
from search.designs.theorems.symmetric import bruck_ryser_chowla, schuetzenberger

Theorem = Callable[[Balanced], str]
"""The obstruction in a sentence, with its source; empty where the theorem says nothing."""

THEOREMS: tuple[Theorem, ...] = (schuetzenberger, bruck_ryser_chowla, hall_connor, published)
RESOLVABLE: tuple[Theorem, ...] = (bose,)


def obstruction(sizes: Balanced, *, resolvable: bool = False) -> str:
    """Why no design (or no resolvable one) has these parameters; empty where no theorem here forbids it."""
    theorems = (*THEOREMS, *(RESOLVABLE if resolvable else ()))
    return next((reason for theorem in theorems if (reason := theorem(sizes))), "")
