"""Do the plots on the map hold what the blocks say, each at a place that the field has?"""

from __future__ import annotations

from collections import Counter

from search.proof.reading import Plot
from search.proof.records import Finding, Refuted
from search.trial.records import Contents, Ground, Trial

Place = tuple[int, int]
"""Line and place in the line, both counted from 1 at the corner where numbering starts."""


def planted(trial: Trial, contents: Contents, plots: tuple[Plot, ...]) -> Finding:
    """Every block's plots hold the block's contents, and every plot has its number and place.

    Filler stands only where a block may stay partly empty, and what is in the soil already stands there.
    """
    _same_contents(trial, contents, plots)
    field = _field(trial.ground) if trial.ground else _blocks_as_lines(trial)
    step = 100 if _longest_line(trial) <= 99 else 1000
    seen: set[int] = set()
    for plot in plots:
        where = (plot.line, plot.place)
        if plot.number in seen:
            raise Refuted("a plot number stands twice")
        seen.add(plot.number)
        if where not in field:
            raise Refuted(f"{_named(plot, trial)} lies where the field has no plot")
        if field[where] != plot.block:
            owner = trial.blocks[field[where]].name
            raise Refuted(f"{_named(plot, trial)} lies on a place of {owner}")
        if plot.number != plot.line * step + plot.place:
            raise Refuted(f"line {plot.line}, place {plot.place} has another plot number")
    if len(seen) != len(field):
        raise Refuted(f"the field has {len(field)} plots, the file {len(seen)}")
    _in_soil(trial, plots)
    filler = sum(plot.treatment is None for plot in plots)
    told = f", {filler} of them filler" if filler else ""
    return Finding("plots", True, f"{len(plots)} plots at their places hold what the blocks say{told}")


def _in_soil(trial: Trial, plots: tuple[Plot, ...]) -> None:
    """What the trial says is planted already stands on just those plots."""
    stands = {plot.number: plot.treatment for plot in plots}
    for planted in trial.rules.planted:
        if stands.get(planted.plot) != planted.treatment:
            name = trial.treatments[planted.treatment].name
            raise Refuted(
                f"plot {planted.plot} is planted with {name} already, and the file has another there"
            )


def _same_contents(trial: Trial, contents: Contents, plots: tuple[Plot, ...]) -> None:
    on_plots = Counter((plot.block, plot.treatment) for plot in plots if plot.treatment is not None)
    for j, block in enumerate(trial.blocks):
        if not block.may_be_emptier and any(plot.block == j and plot.treatment is None for plot in plots):
            raise Refuted(f"a plot of {block.name} is filler, and all plots of that block are to be planted")
    in_blocks = Counter((j, i) for j, block in enumerate(contents) for i in block)
    for j, i in sorted(on_plots.keys() | in_blocks.keys()):
        if on_plots[j, i] != in_blocks[j, i]:
            raise Refuted(
                f"the plots of {trial.blocks[j].name} do not hold what its block says: "
                f"{trial.treatments[i].name} has {on_plots[j, i]} of them, not {in_blocks[j, i]}"
            )


def _field(ground: Ground) -> dict[Place, int]:
    """The block of every place of the map that has a plot."""
    if ground.spots:
        return {(spot.line, spot.place): spot.block for spot in ground.spots if spot.block is not None}
    block = dict(ground.letters)
    from_top = ground.numbering.start.startswith("top")
    rows = ground.rows if from_top else ground.rows[::-1]
    places = {}
    for line, row in enumerate(rows, start=1):
        from_left = ground.numbering.start.endswith("left")
        if ground.numbering.way == "serpentine" and line % 2 == 0:
            from_left = not from_left
        for place, letter in enumerate(row if from_left else row[::-1], start=1):
            if letter in block:
                places[line, place] = block[letter]
    return places


def _blocks_as_lines(trial: Trial) -> dict[Place, int]:
    return {(j + 1, place): j for j, block in enumerate(trial.blocks) for place in range(1, block.plots + 1)}


def _longest_line(trial: Trial) -> int:
    if trial.ground and trial.ground.spots:
        return max(spot.place for spot in trial.ground.spots)
    if trial.ground:
        return max(len(row) for row in trial.ground.rows)
    return max(block.plots for block in trial.blocks)


def _named(plot: Plot, trial: Trial) -> str:
    held = "filler" if plot.treatment is None else trial.treatments[plot.treatment].name
    return f"a plot of {trial.blocks[plot.block].name} with {held}"
