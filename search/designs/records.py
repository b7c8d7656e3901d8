"""What this floor hands on: a design, and a verdict on whether there is one."""

from __future__ import annotations

from dataclasses import dataclass
from enum import StrEnum

from search.designs.conditions import Balanced

Blocks = tuple[tuple[int, ...], ...]
"""For each block its points, numbered from 0, in rising order."""


class Existence(StrEnum):
    """The three verdicts; a search that found nothing is UNKNOWN, never IMPOSSIBLE."""

    EXISTS = "exists"
    IMPOSSIBLE = "impossible"
    UNKNOWN = "unknown"


@dataclass(frozen=True, slots=True)
class Design:
    """A balanced incomplete block design, built and checked.

    Parameters
    ----------
    sizes : its parameters
    blocks : its blocks
    construction : how it was built, in a sentence with its source
    replicates : numbers of the blocks of each replicate where it is resolved, else empty
    """

    sizes: Balanced
    blocks: Blocks
    construction: str
    replicates: tuple[tuple[int, ...], ...] = ()


@dataclass(frozen=True, slots=True)
class Verdict:
    """Whether a balanced design with these parameters exists.

    Parameters
    ----------
    existence : exists, impossible or unknown
    reason : the construction, the theorem, or what was tried
    sizes : the parameters, None where the counts do not even allow any
    design : the design, None where it exists by the literature only, or not
    resolvable : whether replicates were asked for
    """

    existence: Existence
    reason: str
    sizes: Balanced | None = None
    design: Design | None = None
    resolvable: bool = False
