"""Where rows and columns of the map lie: at even steps, or as a table of plots has measured them."""

from __future__ import annotations

from collections.abc import Iterable
from dataclasses import dataclass, replace
from itertools import pairwise

from search.field.crew import CrewPacket
from search.field.positions import is_measured, positions
from search.field.sheets.tiling import Proportions, Tile, proportions

ALIGNED_M = 0.05
"""Plots of one column may differ by so much and still be drawn in line."""


@dataclass(frozen=True, slots=True)
class Steps:
    """Upper left edges of rows and columns, in the unit of the proportions.

    Parameters
    ----------
    shape : a plot, with the mean gaps
    columns, rows : left edge of each column, upper edge of each row, from the first
    gap_across, gap_along : the usual gap, in the middle of which the outline of a block runs
    """

    shape: Proportions
    columns: tuple[float, ...]
    rows: tuple[float, ...]
    gap_across: float
    gap_along: float

    def width(self, tile: Tile) -> float:
        """Width of a part of the map."""
        return self.columns[tile.columns.stop - 1] - self.columns[tile.columns.start] + self.shape.wide

    def height(self, tile: Tile) -> float:
        """Height of a part of the map, gaps around it included."""
        span = self.rows[tile.rows.stop - 1] - self.rows[tile.rows.start]
        return span + self.shape.long + self.gap_along


def steps_of(packet: CrewPacket) -> Steps:
    """The steps of a packet's map; measured plots that are not in line lie on an even grid, not to scale."""
    ground = packet.ground
    shape = proportions(ground.plot_m, ground.gap_m) if ground else proportions(None, (0, 0))
    if ground is not None and is_measured(ground):
        return _measured(packet, shape) or _even(packet, replace(shape, true=False))
    return _even(packet, shape)


def _even(packet: CrewPacket, shape: Proportions) -> Steps:
    rows, columns = packet.extent
    return Steps(
        shape,
        tuple(column * (shape.wide + shape.gap_across) for column in range(columns)),
        tuple(row * (shape.long + shape.gap_along) for row in range(rows)),
        shape.gap_across,
        shape.gap_along,
    )


def _measured(packet: CrewPacket, shape: Proportions) -> Steps | None:
    ground = packet.ground
    if ground is None or ground.plot_m is None or (shape.wide, shape.long) != ground.plot_m:
        return None
    sites = [planted.place for planted in packet.plots]
    middles = positions(sites, ground)
    columns = _edges([(site.column, m.x_m) for site, m in zip(sites, middles, strict=True)], shape.wide)
    rows = _edges([(site.row, -m.y_m) for site, m in zip(sites, middles, strict=True)], shape.long)
    if columns is None or rows is None:
        return None
    across, along = _gaps(columns, shape.wide), _gaps(rows, shape.long)
    mean = replace(shape, gap_across=across[1], gap_along=along[1], true=True)
    return Steps(mean, columns, rows, across[0], along[0])


def _edges(found: Iterable[tuple[int, float]], side: float) -> tuple[float, ...] | None:
    """Edges by number, empty ones between their neighbours; None where plots are not in line."""
    at: dict[int, list[float]] = {}
    for number, place in found:
        at.setdefault(number, []).append(place)
    if any(max(places) - min(places) > ALIGNED_M for places in at.values()):
        return None
    known = {number: min(places) for number, places in at.items()}
    first, last = min(known), max(known)
    edges = [known[first] - (first - number) * side for number in range(first)]
    before = first
    for number in sorted(known):
        step = (known[number] - known[before]) / max(1, number - before)
        edges += [known[before] + step * (between - before) for between in range(before + 1, number)]
        edges.append(known[number])
        before = number
    if any(after - edge < side - ALIGNED_M for edge, after in pairwise(edges)):
        return None
    return tuple(edge - edges[0] for edge in edges[: last + 1])


def _gaps(edges: tuple[float, ...], side: float) -> tuple[float, float]:
    """The usual (least) gap and the mean one."""
    gaps = [max(0.0, after - edge - side) for edge, after in pairwise(edges)]
    return (min(gaps), sum(gaps) / len(gaps)) if gaps else (0.0, 0.0)
