"""Plots on the globe: valid GeoJSON, the right way round, the right size."""

from __future__ import annotations

import json
from itertools import pairwise
from math import cos, hypot, radians
from typing import Any

import pytest

from search.field.crew import crew_packet
from search.field.geojson import plots_geojson
from search.trial.reading import trial_from_document
from tests.field.made import LOW_MOOR, document_of

DEGREE_M = 111_319.49
"""Metres in a degree of longitude at the equator (WGS 84: a circle of 6,378,137 m radius, over 360)."""


def collection(**ground: Any) -> dict[str, Any]:
    """The GeoJSON of Low Moor with other ground."""
    trial = trial_from_document({**LOW_MOOR, "ground": {**LOW_MOOR["ground"], **ground}})
    text = plots_geojson(crew_packet(trial, document_of(trial)))
    assert text is not None
    found: dict[str, Any] = json.loads(text)
    return found


def ring(found: dict[str, Any], plot: int) -> list[list[float]]:
    """The outline of a plot."""
    feature = next(f for f in found["features"] if f["properties"]["plot"] == plot)
    outline: list[list[float]] = feature["geometry"]["coordinates"][0]
    return outline


def test_it_is_valid_geojson() -> None:
    """RFC 7946: closed rings of four corners, counter-clockwise, longitude first, within their ranges."""
    found = collection(corner=[52.1, 0.3], north_deg=20)
    assert found["type"] == "FeatureCollection"
    assert "crs" not in found
    assert len(found["features"]) == 30
    for feature in found["features"]:
        assert feature["type"] == "Feature"
        assert feature["geometry"]["type"] == "Polygon"
        (outline,) = feature["geometry"]["coordinates"]
        assert len(outline) == 5
        assert outline[0] == outline[-1]
        area = sum(a[0] * b[1] - b[0] * a[1] for a, b in pairwise(outline))
        assert area > 0
        assert all(0.2 < x < 0.4 and 52 < y < 52.2 for x, y in outline)


@pytest.mark.parametrize("latitude", [0.0, 52.1, -33.0])
def test_plots_have_their_size_and_place(latitude: float) -> None:
    """Facing north, the second place of line 1 lies a plot right of the corner, 1.5 m by 9 m."""
    found = collection(corner=[latitude, 10.0], north_deg=0)
    first = ring(found, 102)  # the first line of Low Moor opens with a place without a plot
    # Away from the equator the ellipsoid makes a degree up to three parts in a thousand longer.
    east_m = DEGREE_M * cos(radians(latitude))
    assert (first[0][0] - 10.0) * east_m == pytest.approx(1.5, rel=0.004)
    assert (first[1][0] - first[0][0]) * east_m == pytest.approx(1.5, rel=0.004)
    assert first[0][1] == pytest.approx(latitude, abs=1e-8)
    assert (first[2][1] - first[1][1]) * 111_000 == pytest.approx(9.0, rel=0.01)


def test_the_bearing_turns_the_field() -> None:
    """With the far side in the east, going up the map goes east, and going right goes south."""
    found = collection(corner=[0.0, 0.0], north_deg=90)
    outline = ring(found, 102)
    assert outline[3][0] > outline[0][0]
    assert outline[3][1] == pytest.approx(outline[0][1], abs=1e-8)
    assert outline[1][1] < outline[0][1]
    assert hypot(*(a - b for a, b in zip(outline[3], outline[0], strict=True))) * DEGREE_M == pytest.approx(
        9.0, abs=0.01
    )


def test_the_corner_is_the_one_where_numbering_starts() -> None:
    """From the top right the field lies to the south and west of its corner."""
    found = collection(corner=[0.0, 0.0], north_deg=0, numbering={"start": "top right", "way": "same way"})
    points = [p for f in found["features"] for p in f["geometry"]["coordinates"][0]]
    assert max(x for x, _ in points) == pytest.approx(0, abs=1e-8)
    assert max(y for _, y in points) == pytest.approx(0, abs=1e-8)


def test_without_corner_or_bearing_there_is_none() -> None:
    """Nobody guesses where a field lies."""
    for ground in ({}, {"corner": [1, 1]}, {"north_deg": 3}):
        trial = trial_from_document({**LOW_MOOR, "ground": {**LOW_MOOR["ground"], **ground}})
        assert plots_geojson(crew_packet(trial, document_of(trial))) is None


def test_beyond_the_date_line_counting_starts_anew() -> None:
    """A field at 180° has longitudes of both signs and none beyond."""
    found = collection(corner=[10.0, 179.99999], north_deg=0)
    xs = [x for f in found["features"] for x, _ in f["geometry"]["coordinates"][0]]
    assert all(-180 <= x <= 180 for x in xs)
