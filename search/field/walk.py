"""The way through the field: pass by pass, turning at each end as a drill does."""

from __future__ import annotations

from dataclasses import dataclass
from itertools import groupby, pairwise

from search.trial.numbering import Place, places
from search.trial.records import Ground, Trial

COMPASS = ("north", "north-east", "east", "south-east", "south", "south-west", "west", "north-west")


@dataclass(frozen=True, slots=True)
class Stop:
    """A plot on the way.

    Parameters
    ----------
    place : the plot
    skipped : places without a plot that lie between the stop before and this one
    """

    place: Place
    skipped: int


@dataclass(frozen=True, slots=True)
class Pass:
    """A line of plots in the order in which it is planted.

    Parameters
    ----------
    number : counted from 1
    line : line of the field
    to_right : whether it runs to the right of the map
    heading : the direction in words
    stops : the plots in order
    """

    number: int
    line: int
    to_right: bool
    heading: str
    stops: tuple[Stop, ...]


def passes(trial: Trial) -> tuple[Pass, ...]:
    """The planting order of a trial: from the start corner along each line and back along the next.

    Without a ground there is nothing to turn in: block after block, each in the order of its numbers.
    """
    ground = trial.ground
    by_line = groupby(sorted(places(trial), key=lambda place: place.line), key=lambda place: place.line)
    found = []
    for number, (line, along) in enumerate(by_line, start=1):
        to_right = ground is None or ground.numbering.start.endswith("left") == (number % 2 == 1)
        sites = sorted(along, key=lambda place: place.column, reverse=not to_right)
        found.append(Pass(number, line, to_right, _heading(ground, to_right), _stops(sites)))
    return tuple(found)


def _stops(sites: list[Place]) -> tuple[Stop, ...]:
    columns = [site.column for site in sites]
    gaps = [0, *(abs(after - before) - 1 for before, after in pairwise(columns))]
    return tuple(Stop(site, gap) for site, gap in zip(sites, gaps, strict=True))


def _heading(ground: Ground | None, to_right: bool) -> str:
    if ground is None:
        return "in the order of plot numbers"
    side = "left to right" if to_right else "right to left"
    if ground.north_deg is None:
        return f"{side} on the map"
    bearing = ground.north_deg + (90 if to_right else -90)
    return f"{side} on the map, heading {COMPASS[round(bearing / 45) % 8]}"
