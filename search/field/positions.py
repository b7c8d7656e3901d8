"""Where plots lie in metres, as measured or as their places on the map say."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

from search.trial.numbering import Place, extent
from search.trial.records import Ground


@dataclass(frozen=True, slots=True)
class Position:
    """The middle of a plot in metres: x to the right of the reader, y away from the reader."""

    x_m: float
    y_m: float


def positions(sites: Sequence[Place], ground: Ground) -> tuple[Position, ...]:
    """The middle of each plot; the map's lower left corner is the origin unless a table measures.

    Parameters
    ----------
    sites : plots of the ground
    ground : the field; without a size of plots they are taken as one metre square
    """
    if ground.spots and ground.spots[0].x_m is not None:
        measured = {(spot.line, spot.place): spot for spot in ground.spots}
        found = (measured[site.line, site.place] for site in sites)
        return tuple(Position(spot.x_m or 0.0, spot.y_m or 0.0) for spot in found)
    wide, long = ground.plot_m or (1.0, 1.0)
    across, along = ground.gap_m
    height, _ = extent(sites, ground)
    return tuple(
        Position(
            site.column * (wide + across) + wide / 2, (height - 1 - site.row) * (long + along) + long / 2
        )
        for site in sites
    )


def is_measured(ground: Ground) -> bool:
    """Whether a table gives the positions of plots."""
    return bool(ground.spots) and ground.spots[0].x_m is not None
