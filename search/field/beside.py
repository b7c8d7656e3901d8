"""Who may stand beside whom: the plots that are near one another, and the treatments that clash there."""

from __future__ import annotations

from collections.abc import Iterator, Sequence
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from search.field.positions import positions
from search.foundation.errors import Impossible
from search.trial.numbering import Place, places
from search.trial.records import Ground, NotBeside, Trial

SLACK_M = 1e-6
"""A distance that is met but for rounding is met."""


@dataclass(frozen=True, slots=True, eq=False)
class Restriction:
    """`not_beside` on the plots of one field.

    Parameters
    ----------
    rule : as in the file
    first, second : (m,) numbers of plots that are near one another, each pair once
    clashing : (t + 1, t + 1) True for treatments that may not stand on such plots; the last is filler, which
        may stand beside anything
    near : for each plot the plots near it
    """

    rule: NotBeside
    first: NDArray[np.int64]
    second: NDArray[np.int64]
    clashing: NDArray[np.bool_]
    near: tuple[tuple[int, ...], ...]

    def clashes(self, standing: NDArray[np.int64]) -> int:
        """Pairs of near plots whose treatments clash; `standing` has the treatment of each plot."""
        return int(self.clashing[standing[self.first], standing[self.second]].sum())


def restriction(trial: Trial, sites: Sequence[Place]) -> Restriction | None:
    """The restriction of a trial on its plots, in the order given; None where there is none."""
    rule, ground = trial.rules.not_beside, trial.ground
    if rule is None or ground is None:
        return None
    pairs = sorted(_near(rule, ground, sites))
    near: list[list[int]] = [[] for _ in sites]
    for p, q in pairs:
        near[p].append(q)
        near[q].append(p)
    clashing = np.zeros((trial.t + 1, trial.t + 1), dtype=np.bool_)
    if rule.itself:
        np.fill_diagonal(clashing[: trial.t, : trial.t], True)
    for i, j in rule.pairs:
        clashing[i, j] = clashing[j, i] = True
    table = np.array(pairs, dtype=np.int64).reshape(-1, 2)
    return Restriction(rule, table[:, 0], table[:, 1], clashing, tuple(map(tuple, near)))


def refuse_clash_in_soil(trial: Trial) -> None:
    """Find out before a search whether plots that are planted already leave a layout at all.

    Raises
    ------
    Impossible : two of them stand near one another, and `not_beside` keeps their treatments apart
    """
    if not trial.rules.planted or trial.rules.not_beside is None:
        return
    sites = places(trial)
    held = {x.plot: x.treatment for x in trial.rules.planted}
    clash = clash_in_words(trial, sites, [held.get(site.plot, trial.t) for site in sites])
    if clash:
        raise Impossible(
            [f"{clash}, both in the soil already, and rules.not_beside keeps them apart: leave that out"],
            "the map",
        )


def clash_in_words(trial: Trial, sites: Sequence[Place], standing: Sequence[int]) -> str:
    """The first clash of a layout in words; empty where it keeps the rule."""
    found = restriction(trial, sites)
    if found is None:
        return ""
    for p, q in zip(found.first.tolist(), found.second.tolist(), strict=True):
        if found.clashing[standing[p], standing[q]]:
            one, other = (trial.treatments[standing[at]].name for at in (p, q))
            return f"{one} on plot {sites[p].plot} stands beside {other} on plot {sites[q].plot}"
    return ""


def _near(rule: NotBeside, ground: Ground, sites: Sequence[Place]) -> Iterator[tuple[int, int]]:
    if rule.distance_m is not None and ground.plot_m is not None:
        yield from _within(rule.distance_m, ground.plot_m, ground, sites)
        return
    at = {(site.row, site.column): number for number, site in enumerate(sites)}
    for (row, column), p in at.items():
        for down in range(rule.plots_apart + 1):
            reach = rule.plots_apart - down
            for across in range(-reach if down else 1, reach + 1):
                q = at.get((row + down, column + across))
                if q is not None:
                    yield min(p, q), max(p, q)


def _within(
    distance_m: float, plot_m: tuple[float, float], ground: Ground, sites: Sequence[Place]
) -> Iterator[tuple[int, int]]:
    """Pairs of plots whose nearest edges are less than so far apart, gathered in cells of that reach."""
    wide, long = plot_m
    reach = (wide + distance_m, long + distance_m)
    middles = positions(sites, ground)
    cells: dict[tuple[int, int], list[int]] = {}
    for p, middle in enumerate(middles):
        cell = (int(middle.x_m // reach[0]), int(middle.y_m // reach[1]))
        for beside in ((cell[0] + i, cell[1] + j) for i in (-1, 0, 1) for j in (-1, 0, 1)):
            for q in cells.get(beside, ()):
                across = max(0.0, abs(middle.x_m - middles[q].x_m) - wide)
                along = max(0.0, abs(middle.y_m - middles[q].y_m) - long)
                if across * across + along * along < (distance_m - SLACK_M) ** 2:
                    yield q, p
        cells.setdefault(cell, []).append(p)
