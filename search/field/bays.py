"""Bays cut from a bare map: two or three ways, compared by how good a plan they allow and by their shape."""

from __future__ import annotations

from collections.abc import Iterator, Sequence
from dataclasses import dataclass, replace
from itertools import combinations
from math import dist

from search.field.cutting import Cut, Field, compact, square_strips, walked
from search.field.positions import positions
from search.foundation.errors import FaultyTrial, Impossible, Undecided
from search.trial.limits import limits
from search.trial.numbering import NO_PLOT, Place, places
from search.trial.reading import trial_from_document
from search.trial.records import Aim, Ground, Spot, Trial
from search.trial.wanted import counts
from search.trial.writing import trial_document, written_ground

LETTERS = "abcdefghijklmnopqrstuvwxyzABCDEFGHIJKLMNOPQRSTUVWXYZ"
MOST_WAYS = 3
MOST_COUNTS = 2
"""So many numbers of bays are tried where the wanted sizes allow several."""


@dataclass(frozen=True, slots=True)
class Way:
    """One way to cut a map.

    Parameters
    ----------
    trial : the trial with its bays drawn
    how : how they were cut, in words
    bound : no plan in bays of these sizes has an efficiency above this, that of all pairs where the aim has
        none; None where it is not known
    spread_m : mean distance between two plots of one bay, in metres (in plots without a size of plots)
    """

    trial: Trial
    how: str
    bound: float | None
    spread_m: float

    @property
    def told(self) -> str:
        """The way in a sentence."""
        sizes = sorted({block.plots for block in self.trial.blocks}, reverse=True)
        plots = " and ".join(map(str, sizes))
        unit = "m" if self.trial.ground and self.trial.ground.plot_m else "plots"
        known = "" if self.bound is None else f", efficiency at most {self.bound:.4f}"
        return (
            f"{self.trial.b} bays of {plots} plots, {self.how}{known}, two plots of a bay "
            f"{self.spread_m:.1f} {unit} apart on average"
        )


def ways_to_cut(trial: Trial) -> tuple[Way, ...]:
    """Ways to cut the bays that a trial wants from its map, the best first.

    The number of bays is judged before their shape: sizes decide how much any plan can lose to blocks,
    and the file has said which sizes are welcome. The same trial is always cut the same way.

    Raises
    ------
    Impossible : no number of bays that fits leaves a trial whose counts can be met
    """
    if trial.wanted is None or trial.ground is None:
        raise ValueError("the trial has its blocks already")
    sites = places(replace(trial, wanted=None))
    middles = [(middle.x_m, middle.y_m) for middle in positions(sites, trial.ground)]
    field = Field.of(sites, middles)
    ways: list[Way] = []
    for number, count in enumerate(counts(trial.wanted, len(sites))[:MOST_COUNTS]):
        for cut in _cuts(field, count, starts=1 if number else MOST_WAYS):
            bays = _in_reading_order(cut, sites, trial.ground)
            drawn = _drawn(trial, sites, bays, count)
            if drawn is not None and (known := _bound(drawn)) is not False:
                ways.append(Way(drawn, cut.how, known, _spread(bays, middles)))
    if not ways:
        raise Impossible(("in no number of bays that fits the map can the counts be met",), "counting")
    ways.sort(key=lambda way: (-round(way.bound or 0.0, 3), way.spread_m, way.trial.b))
    return tuple(ways[:MOST_WAYS])


def _cuts(field: Field, count: int, starts: int) -> Iterator[Cut]:
    """Different cuts into so many bays, each made compact from another start."""
    seen = set()
    lines = 1 + max(site.row for site in field.sites)
    for strips in list(dict.fromkeys((square_strips(field, count), lines, 1)))[:starts]:
        start = walked(field, count, strips)
        for cut in (compact(field, start), start):
            if field.holds_together(cut):
                if cut.parts not in seen:
                    yield cut
                seen.add(cut.parts)
                break


def _in_reading_order(cut: Cut, sites: Sequence[Place], ground: Ground) -> tuple[int, ...]:
    """The bay of each plot, bays numbered as a reader of the map meets them."""
    if ground.rows:
        order = sorted(range(len(sites)), key=lambda p: (sites[p].row, sites[p].column))
    else:
        number = {(site.line, site.place): p for p, site in enumerate(sites)}
        order = [number[spot.line, spot.place] for spot in ground.spots]
    met = {bay: j for j, bay in enumerate(dict.fromkeys(cut.bay_of[p] for p in order))}
    return tuple(met[bay] for bay in cut.bay_of)


def _drawn(trial: Trial, sites: Sequence[Place], bays: tuple[int, ...], count: int) -> Trial | None:
    """The trial with its bays on the map; None where its rules cannot do with so many."""
    ground = trial.ground
    if ground is None:
        return None
    names = [f"bay {j}" for j in range(1, count + 1)]
    document = trial_document(trial)
    document["ground"] = written_ground(_with_bays(ground, sites, bays, count), names)
    del document["blocks"]
    try:
        return replace(trial_from_document(document), file=trial.file)
    except FaultyTrial:
        return None


def _with_bays(ground: Ground, sites: Sequence[Place], bays: tuple[int, ...], count: int) -> Ground:
    if ground.rows and count <= len(LETTERS):
        rows = [[NO_PLOT] * len(row) for row in ground.rows]
        for site, bay in zip(sites, bays, strict=True):
            rows[site.row][site.column] = LETTERS[bay]
        drawn = tuple("".join(row) for row in rows)
        return replace(ground, rows=drawn, letters=tuple((LETTERS[j], j) for j in range(count)))
    if ground.spots:
        bay_of = {(site.line, site.place): bay for site, bay in zip(sites, bays, strict=True)}
        spots = tuple(replace(spot, block=bay_of[spot.line, spot.place]) for spot in ground.spots)
        return replace(ground, spots=spots)
    order = sorted(range(len(sites)), key=lambda p: (sites[p].row, sites[p].column))
    spots = tuple(Spot(sites[p].line, sites[p].place, bays[p]) for p in order)
    return replace(ground, rows=(), spots=spots)


def _bound(trial: Trial) -> float | bool | None:
    """The first bound of a trial, None where there is none, False where its counts clash."""
    from search.efficiency.bounds import all_bounds

    try:
        if trial.aim.kind.counts_meetings:  # meetings in bays of other sizes do not compare
            trial = replace(trial, aim=Aim())
        first = next(iter(all_bounds(trial, limits(trial))), None)
    except (Impossible, Undecided):
        return False
    return None if first is None else first.value


def _spread(bays: tuple[int, ...], middles: Sequence[tuple[float, float]]) -> float:
    inside: dict[int, list[tuple[float, float]]] = {}
    for bay, middle in zip(bays, middles, strict=True):
        inside.setdefault(bay, []).append(middle)
    apart = [dist(one, other) for plots in inside.values() for one, other in combinations(plots, 2)]
    return sum(apart) / len(apart) if apart else 0.0
