"""The registry of constructions: each takes parameters and gives blocks, or nothing.

To add one: a file in `constructions` with one function and its source, and its name here. `DIRECT` ones
take milliseconds and may be made of one another; `SEARCHES` take seconds and are only for what is asked.
"""

from __future__ import annotations

from functools import cache

from search.designs.conditions import Balanced
from search.designs.constructions.common import Built, Construction
from search.designs.constructions.embedding import embedding
from search.designs.constructions.flats import flats
from search.designs.constructions.hadamard import doubling, extension
from search.designs.constructions.orbits import orbits
from search.designs.constructions.recipes import recipes
from search.designs.constructions.relatives import complement, derived, nested, residual, subsets
from search.designs.constructions.sums import sums
from search.designs.theorems import obstruction

DIRECT: tuple[Construction, ...] = (
    subsets,
    complement,
    flats,
    recipes,
    extension,
    sums,
    residual,
    derived,
    doubling,
    nested,
)
SEARCHES: tuple[Construction, ...] = (embedding, orbits)


def build(sizes: Balanced) -> Built | None:
    """Blocks by the first construction that gives them; remembered."""
    return directly(sizes) or (None if obstruction(sizes) else _searched(sizes))


@cache
def directly(sizes: Balanced) -> Built | None:
    """Blocks without any search."""
    if obstruction(sizes):
        return None
    return _first(DIRECT, sizes)


@cache
def _searched(sizes: Balanced) -> Built | None:
    if 2 * sizes.k > sizes.t:
        return complement(sizes, build)
    return _first(SEARCHES, sizes)


def _first(constructions: tuple[Construction, ...], sizes: Balanced) -> Built | None:
    return next((built for construct in constructions if (built := construct(sizes, directly))), None)
