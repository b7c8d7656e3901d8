"""Which of two plans is better for an aim, which bound is tighter, and how far apart the two are.

Most aims are judged by an efficiency: the greater the better. Even meetings are judged by the whole number
Σλ², the least one: a connected plan comes before any other, and of equally even ones the one with
the smaller average pair variance is better.
"""

from __future__ import annotations

from fractions import Fraction

from search.trial.records import AimKind

SAME = 1e-12
"""Efficiencies and variances closer than this differ by rounding alone."""

Merit = tuple[float, ...]
"""What a plan is judged by, the greater the better, first entries first."""


def merit(aim: str, score: float, variance: float | None) -> Merit:
    """What a plan is judged by for an aim.

    Parameters
    ----------
    aim : word of the aim
    score : the plan's efficiency for the aim; for even meetings its sum of squared meetings
    variance : its mean variance for the aim; None where it is disconnected or the aim has none
    """
    if aim != AimKind.EVEN_MEETINGS:
        return (score,)
    return (0.0, -score) if variance is None else (1.0, -score, -variance)


def beats(one: Merit, other: Merit) -> bool:
    """Whether the first is better by more than rounding."""
    for mine, its in zip(one, other, strict=False):
        if abs(mine - its) > SAME:
            return mine > its
    return False


def is_tighter(aim: str, one: float | Fraction, other: float | Fraction) -> bool:
    """Whether the first of two bounds says more: none passes an efficiency, none is below a sum."""
    return one > other if aim == AimKind.EVEN_MEETINGS else one < other


def gap_percent(aim: str, score: float, bound: float) -> float:
    """How far a plan is from a bound, in percent of the bound; below 0 only where one of them is wrong."""
    if aim == AimKind.EVEN_MEETINGS:
        return 100.0 * (score / bound - 1.0)
    return 100.0 * (1.0 - score / bound)


def in_figures(aim: str, value: float, digits: int = 6) -> str:
    """A score or a bound as it is told: an efficiency with so many decimals, a sum as a whole number."""
    return f"{value:.0f}" if aim == AimKind.EVEN_MEETINGS else f"{value:.{digits}f}"


def measure(aim: str) -> str:
    """What the score of an aim is called."""
    return "sum of squared meetings" if aim == AimKind.EVEN_MEETINGS else "efficiency"


def efficiency_of(aim: str, score: float) -> float | None:
    """The score of an aim that has an efficiency; None for one that is judged by a whole number."""
    return None if aim == AimKind.EVEN_MEETINGS else score
