"""The counting conditions of balanced incomplete block designs.

In such a design t treatments stand in b blocks of k plots, k < t, each r times, each pair in λ blocks:
bk = rt and λ(t − 1) = r(k − 1), all whole numbers, and b ≥ t (Fisher 1940). Meeting the conditions is
necessary and not enough: a design that they allow may still not exist.
"""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import dataclass
from fractions import Fraction
from math import gcd


@dataclass(frozen=True, slots=True)
class Balanced:
    """Parameters that meet the counting conditions.

    Parameters
    ----------
    t, b, k : treatments, blocks, plots of a block
    r : plots of each treatment
    meetings : blocks that each pair shares (λ)
    """

    t: int
    b: int
    k: int
    r: int
    meetings: int

    @property
    def efficiency(self) -> Fraction:
        """E = λt / (rk) (Yates 1936)."""
        return Fraction(self.meetings * self.t, self.r * self.k)

    @property
    def plots(self) -> int:
        """Plots in all."""
        return self.b * self.k


@dataclass(frozen=True, slots=True)
class Counted:
    """Whether the counts allow a balanced design; `reason` says why not."""

    allowed: Balanced | None
    reason: str = ""


def conditions(t: int, b: int, k: int) -> Counted:
    """Whether t treatments in b blocks of k plots can be balanced as far as counting goes.

    Source: the two counts of plots and of pairs; Fisher's inequality (Fisher 1940).
    """
    if not 2 <= k < t:
        return Counted(None, f"blocks of {k} plots are not incomplete blocks for {t} treatments")
    if b * k % t:
        return Counted(None, f"{b * k} plots cannot be shared equally among {t} treatments")
    r = b * k // t
    if r * (k - 1) % (t - 1):
        return Counted(
            None,
            f"each treatment meets {r * (k - 1)} others, which cannot be shared equally among {t - 1}",
        )
    if b < t:
        return Counted(None, f"{b} blocks are fewer than {t} treatments (Fisher's inequality)")
    return Counted(Balanced(t, b, k, r, r * (k - 1) // (t - 1)))


def with_meetings(t: int, k: int, meetings: int) -> Balanced | None:
    """The parameters with every pair in `meetings` blocks, where the counts allow them."""
    b, left = divmod(meetings * t * (t - 1), k * (k - 1))
    return None if left else conditions(t, b, k).allowed


def multiples(t: int, k: int) -> Iterator[Balanced]:
    """Every number of blocks that the conditions allow for t and k, from the fewest on.

    Pairs are counted twice: λt(t − 1) = bk(k − 1), so b is a multiple of t(t − 1) over its common
    divisor with k(k − 1).
    """
    step = t * (t - 1) // gcd(t * (t - 1), k * (k - 1))
    b = step
    while True:
        verdict = conditions(t, b, k)
        if verdict.allowed is not None:
            yield verdict.allowed
        b += step


def smallest(t: int, k: int) -> Balanced:
    """The fewest blocks that the conditions allow for t treatments in blocks of k.

    Raises
    ------
    ValueError : not 2 ≤ k < t
    """
    if not 2 <= k < t:
        raise ValueError("blocks must be incomplete")
    return next(multiples(t, k))


def nearby(t: int, k: int, plots: int, most: int = 4) -> tuple[Balanced, ...]:
    """Balanced sizes near to what is planned: one treatment or one plot of a block more or fewer.

    Parameters
    ----------
    t, k, plots : what is planned
    most : how many to name

    Returns
    -------
    those with the nearest numbers of plots first, at most half as many again as planned
    """
    found = []
    for near_t in (t, t - 1, t + 1):
        for near_k in (k, k - 1, k + 1):
            if not 2 <= near_k < near_t:
                continue
            for design in multiples(near_t, near_k):
                if design.plots > 1.5 * plots:
                    break
                found.append(design)
    found.sort(key=lambda d: (abs(d.plots - plots) + abs(d.t - t) + abs(d.k - k), d.t, d.k))
    return tuple(found[:most])
