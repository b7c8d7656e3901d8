"""plots.geojson: every plot as a polygon on the globe (RFC 7946)."""

from __future__ import annotations

import json
from collections.abc import Iterator, Sequence
from math import cos, radians, sin, sqrt
from typing import Any

from search.field.crew import CrewPacket
from search.field.positions import Position, positions
from search.field.tables import named
from search.trial.records import Ground

RADIUS_M, FLATTENING = 6_378_137.0, 1 / 298.257223563
"""The ellipsoid of WGS 84, which RFC 7946 asks for."""
DIGITS = 8
"""Decimals of a degree: a millimetre."""
Point = tuple[float, float]


def plots_geojson(packet: CrewPacket) -> str | None:
    """The plots as a feature collection; None where corner, bearing or size of plots is not known."""
    ground = packet.ground
    if ground is None or ground.corner is None or ground.north_deg is None or ground.plot_m is None:
        return None
    sites = [planted.place for planted in packet.plots]
    middles = positions(sites, ground)
    globe = _Globe(ground, middles)
    features = []
    for planted, middle in zip(packet.plots, middles, strict=True):
        note = packet.note(planted)
        features.append(
            {
                "type": "Feature",
                "id": planted.place.plot,
                "geometry": {"type": "Polygon", "coordinates": [globe.ring(middle, ground.plot_m)]},
                "properties": {
                    "mark": packet.mark,
                    "plot": planted.place.plot,
                    "block": packet.blocks[planted.place.block].name,
                    "line": planted.place.line,
                    "place": planted.place.place,
                    "treatment": named(packet, planted) or None,
                    "code": packet.held(planted).code,
                    **({"note": note} if note else {}),
                },
            }
        )
    collection: dict[str, Any] = {"type": "FeatureCollection", "features": features}
    return json.dumps(collection, ensure_ascii=False, allow_nan=False, indent=None) + "\n"


class _Globe:
    """From metres on the field to degrees, on the plane that touches the ellipsoid at the corner.

    A field of a kilometre is off by less than a decimetre, and its plots against one another by far less.
    The radii of curvature are those of the meridian and of the prime vertical.
    """

    def __init__(self, ground: Ground, middles: Sequence[Position]) -> None:
        latitude, self.longitude = ground.corner or (0.0, 0.0)
        self.latitude = latitude
        eccentricity = FLATTENING * (2 - FLATTENING)
        bend = 1 - eccentricity * sin(radians(latitude)) ** 2
        self.north_m = radians(1) * RADIUS_M * (1 - eccentricity) / bend**1.5
        self.east_m = radians(1) * RADIUS_M / sqrt(bend) * max(cos(radians(latitude)), 1e-9)
        bearing = radians(ground.north_deg or 0.0)
        self.away, self.right = (sin(bearing), cos(bearing)), (cos(bearing), -sin(bearing))
        self.origin = _corner(ground, middles)

    def ring(self, middle: Position, plot_m: tuple[float, float]) -> list[Point]:
        """The outline of a plot, counter-clockwise and closed."""
        corners = list(self._corners(middle, plot_m))
        return [*corners, corners[0]]

    def _corners(self, middle: Position, plot_m: tuple[float, float]) -> Iterator[Point]:
        for across, along in ((-0.5, -0.5), (0.5, -0.5), (0.5, 0.5), (-0.5, 0.5)):
            x = middle.x_m + across * plot_m[0] - self.origin.x_m
            y = middle.y_m + along * plot_m[1] - self.origin.y_m
            east = x * self.right[0] + y * self.away[0]
            north = x * self.right[1] + y * self.away[1]
            longitude = self.longitude + east / self.east_m
            longitude = (longitude + 180) % 360 - 180  # beyond the date line counting starts anew
            yield round(longitude, DIGITS), round(self.latitude + north / self.north_m, DIGITS)


def _corner(ground: Ground, middles: Sequence[Position]) -> Position:
    """The outer corner of the plots at which numbering starts."""
    wide, long = ground.plot_m or (0.0, 0.0)
    left, bottom = ground.numbering.start.endswith("left"), ground.numbering.start.startswith("bottom")
    xs, ys = [middle.x_m for middle in middles], [middle.y_m for middle in middles]
    return Position(
        min(xs) - wide / 2 if left else max(xs) + wide / 2,
        min(ys) - long / 2 if bottom else max(ys) + long / 2,
    )
