"""Designs that exist by the literature and that this program does not build; papers cited from memory."""

from __future__ import annotations

from search.designs.conditions import Balanced

HANANI = (
    "Hanani 1975, Balanced incomplete block designs and related designs, Discrete Mathematics 11, 255–369"
)
BEKER_HAEMERS = (
    "Beker and Haemers 1980, 2-designs having an intersection number k − n, "
    "Journal of Combinatorial Theory A 28, 64–81"
)
MATHON_ROSA = (
    "listed by Mathon and Rosa 2007, 2-(v,k,λ) designs of small order, "
    "Handbook of Combinatorial Designs, second edition"
)
BROUWER_WILBRINK = (
    "Brouwer and Wilbrink 1984, A symmetric design with parameters 2-(49,16,5), "
    "Journal of Combinatorial Theory A 37, 193–194"
)
BRIDGES_HALL_HAYDEN = (
    "Bridges, Hall and Hayden 1981, Codes and designs, Journal of Combinatorial Theory A 31, 155–174"
)
KNOWN = {
    (71, 15, 3): BEKER_HAEMERS,
    (56, 12, 3): f"residual of (71, 15, 3), {BEKER_HAEMERS}",
    (28, 10, 5): MATHON_ROSA,
    (49, 16, 5): BROUWER_WILBRINK,
    (33, 11, 5): f"residual of (49, 16, 5), {BROUWER_WILBRINK}",
    (41, 16, 6): BRIDGES_HALL_HAYDEN,
}
"""(t, k, λ) to the paper."""


def known(sizes: Balanced) -> str:
    """The paper that gives a design with these parameters, or an empty string.

    For blocks of 3, 4 and 5 the counting conditions suffice but for (15, 5, 2), and for blocks of 6 with
    λ ≥ 2 but for (21, 6, 2) (Hanani 1975); both exceptions fall to a theorem before this is asked.
    """
    if sizes.k in (3, 4, 5) or (sizes.k == 6 and sizes.meetings > 1):
        return HANANI
    return KNOWN.get((sizes.t, sizes.k, sizes.meetings), "")
