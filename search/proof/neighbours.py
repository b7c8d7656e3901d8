"""Do treatments that may not stand beside one another stand apart on the map?"""

from __future__ import annotations

from collections.abc import Iterator
from fractions import Fraction
from itertools import combinations, product

from search.proof.reading import Plot
from search.proof.records import Finding, Refuted
from search.trial.records import Ground, NotBeside, Trial

SLACK_M = Fraction(1, 10**6)
"""A distance that is met but for a thousandth of a millimetre is met."""


def kept_apart(trial: Trial, plots: tuple[Plot, ...]) -> Finding | None:
    """Every two plots whose treatments the rule keeps apart lie far enough from one another.

    Measured from plot to plot, treatment by treatment, not by looking for neighbours.
    """
    rule, ground = trial.rules.not_beside, trial.ground
    if rule is None:
        return None
    if ground is None:
        raise Refuted("the trial has a rule about neighbours and no map to keep it on")
    lie = {plot.number: _place(rule, ground, plot) for plot in plots}
    looked_at = 0
    for one, other in _pairs(rule, trial.t, plots):
        looked_at += 1
        if _too_near(rule, ground, lie[one.number], lie[other.number]):
            names = [trial.treatments[plot.treatment or 0].name for plot in (one, other)]
            raise Refuted(f"{names[0]} on plot {one.number} stands beside {names[1]} on plot {other.number}")
    return Finding("neighbours", True, f"{looked_at:,} pairs of plots that must lie apart do")


def _pairs(rule: NotBeside, t: int, plots: tuple[Plot, ...]) -> Iterator[tuple[Plot, Plot]]:
    of: list[list[Plot]] = [[] for _ in range(t)]
    for plot in plots:
        if plot.treatment is not None:
            of[plot.treatment].append(plot)
    if rule.itself:
        for own in of:
            yield from combinations(own, 2)
    for i, j in rule.pairs:
        yield from product(of[i], of[j])


def _place(rule: NotBeside, ground: Ground, plot: Plot) -> tuple[Fraction, Fraction]:
    """Where a plot lies, in plots or, for a rule in metres, in metres."""
    if rule.distance_m is not None:
        return _middle(ground, plot)
    return Fraction(_column(ground, plot)), Fraction(plot.line)


def _too_near(
    rule: NotBeside, ground: Ground, one: tuple[Fraction, Fraction], other: tuple[Fraction, Fraction]
) -> bool:
    across, along = abs(one[0] - other[0]), abs(one[1] - other[1])
    if rule.distance_m is None:
        return across + along <= rule.plots_apart
    if ground.plot_m is None:
        raise Refuted("the trial asks for a distance in metres and gives no size of plots")
    wide, long = map(Fraction, ground.plot_m)
    free = [max(Fraction(0), gap) for gap in (across - wide, along - long)]
    return free[0] ** 2 + free[1] ** 2 < (Fraction(rule.distance_m) - SLACK_M) ** 2


def _column(ground: Ground, plot: Plot) -> int:
    """Places from the left, whichever side the line is counted from; any fixed offset will do."""
    from_left = ground.numbering.start.endswith("left")
    if ground.numbering.way == "serpentine" and plot.line % 2 == 0:
        from_left = not from_left
    return plot.place if from_left else _longest_line(ground) + 1 - plot.place


def _longest_line(ground: Ground) -> int:
    if ground.spots:
        return max(spot.place for spot in ground.spots)
    return max(len(row) for row in ground.rows)


def _middle(ground: Ground, plot: Plot) -> tuple[Fraction, Fraction]:
    if ground.spots and ground.spots[0].x_m is not None:
        spot = next(s for s in ground.spots if (s.line, s.place) == (plot.line, plot.place))
        return Fraction(spot.x_m or 0), Fraction(spot.y_m or 0)
    wide, long = map(Fraction, ground.plot_m or (1, 1))
    across, along = map(Fraction, ground.gap_m)
    return _column(ground, plot) * (wide + across), plot.line * (long + along)
