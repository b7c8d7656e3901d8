"""Is there a balanced design with these numbers? Built and checked, impossible by a theorem, or unknown."""

from __future__ import annotations

from math import comb

from search.designs.attempts import notes
from search.designs.building import build, directly
from search.designs.checking import faults
from search.designs.conditions import Balanced, conditions, smallest
from search.designs.literature import known
from search.designs.records import Design, Existence, Verdict
from search.designs.resolution import resolved
from search.designs.theorems import obstruction
from search.foundation.errors import BadInput

MOST_TREATMENTS = 1000
MOST_PLOTS = 200_000
RESOLVED_UP_TO = 10
"""Replicates up to which every resolvable design was found in about a second."""


def exists(
    t: int,
    k: int,
    *,
    blocks: int | None = None,
    meetings: int | None = None,
    resolvable: bool = False,
) -> Verdict:
    """Whether a balanced incomplete block design exists, and which.

    Parameters
    ----------
    t, k : treatments, plots of a block
    blocks, meetings : b, or λ; with neither, the fewest blocks that the counts allow
    resolvable : the blocks must fall into complete replicates

    Raises
    ------
    BadInput : numbers that no block design has, or more than this program builds
    """
    _check(t, k, blocks, meetings)
    if k == t:
        return _complete(t, blocks or meetings or 1, resolvable)
    if blocks is None and meetings is not None:
        blocks, left = divmod(meetings * t * (t - 1), k * (k - 1))
        if left:
            return Verdict(
                Existence.IMPOSSIBLE,
                f"{meetings * comb(t, 2)} meetings of pairs cannot fill whole blocks of {comb(k, 2)} pairs",
                resolvable=resolvable,
            )
    if blocks is None:
        blocks = smallest(t, k).b
    counted = conditions(t, blocks, k)
    if counted.allowed is None:
        return Verdict(Existence.IMPOSSIBLE, counted.reason, resolvable=resolvable)
    if counted.allowed.plots > MOST_PLOTS:
        raise BadInput(f"{counted.allowed.plots} plots are more than the {MOST_PLOTS} that are built here")
    return decide(counted.allowed, resolvable=resolvable)


def decide(sizes: Balanced, *, resolvable: bool = False) -> Verdict:
    """The verdict for parameters that meet the counting conditions."""
    if reason := obstruction(sizes, resolvable=resolvable):
        return Verdict(Existence.IMPOSSIBLE, reason, sizes, resolvable=resolvable)
    design = resolved(sizes) if resolvable else _plain(sizes)
    if design is not None:
        if wrong := faults(design):
            raise RuntimeError(f"a construction failed its check for {sizes}: {wrong[0]}")
        return Verdict(Existence.EXISTS, design.construction, sizes, design, resolvable)
    if not resolvable and (paper := known(sizes)):
        note = f"; {tried}" if (tried := notes(sizes)) else ""
        return Verdict(Existence.EXISTS, f"by the literature, not built here: {paper}{note}", sizes)
    return Verdict(Existence.UNKNOWN, _tried(sizes, resolvable), sizes, resolvable=resolvable)


def at_once(sizes: Balanced, *, resolvable: bool = False) -> Verdict:
    """The verdict as far as theorems, constructions without a search, and the literature give it."""
    if reason := obstruction(sizes, resolvable=resolvable):
        return Verdict(Existence.IMPOSSIBLE, reason, sizes, resolvable=resolvable)
    if resolvable and sizes.r <= RESOLVED_UP_TO:
        return decide(sizes, resolvable=True)
    if not resolvable:
        if built := directly(sizes):
            return Verdict(Existence.EXISTS, built.how, sizes, Design(sizes, built.blocks, built.how))
        if paper := known(sizes):
            return Verdict(Existence.EXISTS, f"by the literature, not built here: {paper}", sizes)
    return Verdict(Existence.UNKNOWN, "`evenfield exists` searches longer", sizes, resolvable=resolvable)


def _tried(sizes: Balanced, resolvable: bool) -> str:
    note = "" if resolvable else notes(sizes)
    tried = "no theorem here forbids it and no construction here gave one, which does not decide it"
    return f"{tried} ({note})" if note else tried


def _plain(sizes: Balanced) -> Design | None:
    built = build(sizes)
    return None if built is None else Design(sizes, built.blocks, built.how)


def _complete(t: int, blocks: int, resolvable: bool) -> Verdict:
    sizes = Balanced(t, blocks, t, blocks, blocks)
    design = Design(
        sizes,
        (tuple(range(t)),) * blocks,
        "complete blocks: every block holds every treatment",
        tuple((j,) for j in range(blocks)) if resolvable else (),
    )
    return Verdict(Existence.EXISTS, design.construction, sizes, design, resolvable)


def _check(t: int, k: int, blocks: int | None, meetings: int | None) -> None:
    if not 3 <= t <= MOST_TREATMENTS:
        raise BadInput(f"{t} treatments: give 3 to {MOST_TREATMENTS}")
    if not 2 <= k <= t:
        raise BadInput(f"blocks of {k} plots: give 2 to {t}, as no treatment stands twice in a block")
    if blocks is not None and meetings is not None:
        raise BadInput("give the number of blocks or the meetings of a pair, not both, as one follows")
    for name, value in (("blocks", blocks), ("meetings of each pair", meetings)):
        if value is not None and value < 1:
            raise BadInput(f"{value} {name}: give at least 1")
