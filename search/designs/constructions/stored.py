"""The stored recipes."""

from __future__ import annotations

from dataclasses import dataclass

from search.designs.constructions.groups import Group
from search.designs.records import Blocks


@dataclass(frozen=True, slots=True)
class Recipe:
    """A group, base blocks, and how they were found."""

    group: Group
    base: Blocks
    found: str


RECIPES: dict[tuple[int, int, int], Recipe] = {}
"""(t, k, λ) to the recipe."""
