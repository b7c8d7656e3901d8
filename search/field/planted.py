"""What a plan file puts on each plot, believed only where it fits the trial."""

from __future__ import annotations

from search.field.beside import clash_in_words
from search.field.planshape import Document
from search.field.randomise import Planted, on_plots
from search.foundation.errors import BadInput, shown
from search.trial.checker import broken_rules
from search.trial.numbering import places
from search.trial.records import Trial


def planted_plots(trial: Trial, document: Document) -> tuple[Planted, ...]:
    """What a plan puts on each plot of its trial, in the order of plot numbers.

    Raises
    ------
    BadInput : the plan names other plots, blocks or treatments than the trial has, contradicts itself,
        or breaks a rule of the trial
    """
    number_of = {treatment.name: i for i, treatment in enumerate(trial.treatments)}
    listed = {plot["plot"]: plot for plot in document["plots"]}
    sites = places(trial)
    if len(document["plots"]) != len(sites) or listed.keys() != {site.plot for site in sites}:
        raise BadInput("the plan does not list the plots that its trial has; plan the trial again")
    held: list[list[str]] = [[] for _ in trial.blocks]
    for site in sites:
        plot = listed[site.plot]
        block = trial.blocks[site.block].name
        if (plot["block"], plot["line"], plot["place"]) != (block, site.line, site.place):
            raise BadInput(f"plot {site.plot} of the plan does not lie where its trial has it")
        if plot["treatment"] is None and plot.get("filler") and trial.blocks[site.block].may_be_emptier:
            continue
        if plot["treatment"] not in number_of or plot.get("filler"):
            what = shown(plot["treatment"] or "nothing")
            raise BadInput(f"plot {site.plot} has {what}, no treatment of the trial")
        held[site.block].append(plot["treatment"])
    for name, stood in zip((block.name for block in trial.blocks), held, strict=True):
        if sorted(document["blocks"].get(name, [])) != sorted(stood):
            raise BadInput(f"{shown(name)} holds other treatments than its plots; plan the trial again")
    contents = tuple(tuple(sorted(number_of[name] for name in stood)) for stood in held)
    if broken := broken_rules(trial, contents):
        raise BadInput(f"the plan breaks a rule of its trial: {broken[0]}; plan the trial again")
    standing = [number_of.get(listed[site.plot]["treatment"], trial.t) for site in sites]
    if clash := clash_in_words(trial, sites, standing):
        raise BadInput(f"the plan breaks a rule of its trial: {clash}; plan the trial again")
    for x in trial.rules.planted:
        if listed[x.plot]["treatment"] != trial.treatments[x.treatment].name:
            raise BadInput(f"plot {x.plot} of the plan is in the soil already with another treatment")
    return on_plots(trial, sites, standing)
