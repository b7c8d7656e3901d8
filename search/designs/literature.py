"""Designs that exist by the literature and that this program does not build."""

from __future__ import annotations

from search.designs.conditions import Balanced

KNOWN: dict[tuple[int, int, int], str] = {}
"""(t, k, λ) to the paper."""


def known(sizes: Balanced) -> str:
    """The paper that gives a design with these parameters, or an empty string."""
    return KNOWN.get((sizes.t, sizes.k, sizes.meetings), "")
