"""Impossible by the literature: proofs by long computation, cited and not repeated here."""

from __future__ import annotations

from search.designs.conditions import Balanced

PUBLISHED = {
    (46, 6, 1): "Houghten, Thiel, Janssen and Lam 2001: There is no (46,6,1) block design, "
    "Journal of Combinatorial Designs 9, 60–71",
    (22, 8, 4): "Bilous, Lam, Thiel and others 2007: There is no 2-(22,8,4) block design, "
    "Journal of Combinatorial Designs 15, 262–267",
    (111, 11, 1): "Lam, Thiel and Swiercz 1989: The nonexistence of finite projective planes of order 10, "
    "Canadian Journal of Mathematics 41, 1117–1123",
}
"""(t, k, λ) to the paper."""


def published(sizes: Balanced) -> str:
    """A published proof by computer that no such design exists."""
    paper = PUBLISHED.get((sizes.t, sizes.k, sizes.meetings), "")
    return f"shown by an exhaustive computation ({paper})" if paper else ""
