"""Designs that take long to find, kept as a group and base blocks and developed again when asked for.

All of them were found by this program; `stored.py` says how each was.
"""

from __future__ import annotations

from search.designs.conditions import Balanced
from search.designs.constructions.common import Build, Built
from search.designs.constructions.orbits import described, developed
from search.designs.constructions.stored import RECIPES


def recipes(sizes: Balanced, build: Build) -> Built | None:
    """The stored recipe for these parameters."""
    recipe = RECIPES.get((sizes.t, sizes.k, sizes.meetings))
    if recipe is None:
        return None
    return Built(developed(recipe.group, recipe.base), described(recipe.group, recipe.base))
