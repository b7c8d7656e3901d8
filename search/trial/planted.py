"""Plots that are planted already: from numbers on stakes to blocks."""

from __future__ import annotations

import re

from search.foundation.errors import BadInput, shown
from search.trial.kinds import Report, Section
from search.trial.names import Names
from search.trial.numbering import Place, places_on
from search.trial.records import Block, Ground, InSoil, Said

KEY = "rules.planted"


def read_planted(
    section: Section,
    treatments: Names,
    ground: Ground | None,
    blocks: tuple[Block, ...],
    sites: int,
    report: Report,
) -> tuple[tuple[InSoil, ...], tuple[Said, ...]]:
    """What is in the soil already, and where the file says so.

    Parameters
    ----------
    section : `rules.planted` as the grammar read it: numbers with names
    treatments : the names that it may use
    ground, blocks : of the trial; without a ground each block is a line
    sites : layouts that are to be drawn
    report : where faults go
    """
    if sites > 1:
        report.add(
            next(iter(section.key_at.values())),
            KEY,
            f"plots of one field, and {sites} sites to plan",
            "one site",
            "what is sown here is not sown at the other sites",
            "plan this site by itself: leave randomise.sites out, and the others from a second file",
        )
    try:
        place_of = {place.plot: place for place in places_on(ground, blocks)}
    except BadInput as error:
        report.add(next(iter(section.key_at.values())), KEY, str(error), "plots that can be numbered")
        return (), ()
    found: list[InSoil] = []
    said: list[Said] = []
    line_of: dict[int, int] = {}
    for text, name in section.items():
        node = section.key_at[text]
        plot = int(text) if re.fullmatch(r"[0-9]{1,9}", text) else 0
        treatment = treatments.find(name, section.where[text], f"{KEY}.{text}", report)
        if plot not in place_of:
            report.add(
                node,
                KEY,
                f"the plot {shown(text)}",
                f"the number of a plot of this trial: {min(place_of)} to {max(place_of)}",
                "a plot that is not there holds nothing, and what is really sown would be planned anew",
                _nearest(plot, place_of),
            )
            continue
        if plot in line_of:
            report.add(
                node,
                KEY,
                f"plot {plot} a second time",
                "each plot once",
                "two treatments cannot stand on one plot",
                f"delete one; the first stands in line {line_of[plot]}",
            )
        elif treatment is not None:
            said.append(Said("planted", (len(found),), f"{KEY}.{text}", node.line, node.column))
            found.append(InSoil(plot, treatment, place_of[plot].block))
        line_of.setdefault(plot, node.line)
    return tuple(found), tuple(said)


def _nearest(plot: int, place_of: dict[int, Place]) -> str:
    """The plot that was probably meant, or how to write one."""
    if not plot:
        return f"the number alone, such as  {min(place_of)}: name"
    nearest = place_of[min(place_of, key=lambda other: (abs(other - plot), other))]
    return f"the nearest is {nearest.plot}: line {nearest.line}, place {nearest.place}"
