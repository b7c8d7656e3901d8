"""From block contents to a field layout, drawn at random as the scheme says."""

from __future__ import annotations

import secrets
from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np

from search.field.beside import restriction
from search.field.never import never_on
from search.field.restricted import draw_restricted
from search.field.urn import Urn
from search.foundation.errors import BadInput
from search.trial.checker import broken_rules
from search.trial.numbering import Place, places
from search.trial.records import Contents, Trial

MOST_SEED = 10**9
"""Seeds drawn here have at most nine digits, so that one can be copied from paper."""


@dataclass(frozen=True, slots=True)
class Planted:
    """A plot and the treatment that stands on it; None for filler.

    `in_soil` tells that it was planted before the plan was made.
    """

    place: Place
    treatment: int | None
    in_soil: bool = False


@dataclass(frozen=True, slots=True)
class Restricted:
    """A draw under `not_beside`, whose tests are only approximately valid.

    Parameters
    ----------
    method : rejection, chain or solver
    uniform : whether every layout that keeps the rule had the same chance
    told : the same in a sentence
    never : (plot, treatment): pairs that no layout of the blocks as drawn can have
    complete : whether every such pair was looked for
    """

    method: str
    uniform: bool
    told: str
    never: tuple[tuple[int, int], ...]
    complete: bool


@dataclass(frozen=True, slots=True)
class PlotMap:
    """A layout: which treatment stands where, and how that was drawn.

    Parameters
    ----------
    plots : one entry a plot, in the order of plot numbers
    contents : block contents after randomisation
    seed : seed of the layout
    scheme : what was drawn at random among what, in words
    restricted : how the rule about neighbours narrowed the draw; None without one
    """

    plots: tuple[Planted, ...]
    contents: Contents
    seed: int
    scheme: str
    restricted: Restricted | None = None


def fresh_seed() -> int:
    """A layout seed that nobody could have foreseen."""
    return secrets.randbelow(MOST_SEED)


def site_seeds(seed: int, sites: int) -> tuple[int, ...]:
    """Seeds for several sites: the layout's own for the first, others that follow from it."""
    draw = np.random.default_rng([seed, 1])  # a stream apart from that of the layout
    seeds = [seed]
    while len(seeds) < sites:
        other = int(draw.integers(MOST_SEED))
        if other not in seeds:
            seeds.append(other)
    return tuple(seeds)


def lay_out(trial: Trial, contents: Contents, seed: int) -> PlotMap:
    """Draw a layout of a plan.

    Every draw has the same chance among all ways to rename treatments that play the same part, to
    move whole blocks among those equal in size, rules and replicate, and to order plots in a block;
    under `not_beside` among those of them that keep it, as far as `restriction` says. Filler is drawn like
    a treatment; what is in the soil already stays where it is.

    Parameters
    ----------
    trial : the trial
    contents : block contents of the plan
    seed : seed of the layout; the same seed gives the same layout

    Raises
    ------
    BadInput : the plan breaks a rule of its trial
    Undecided : its treatments cannot be kept apart as `not_beside` asks, or no way was found
    """
    if own := broken_rules(trial, contents):
        raise BadInput(f"the plan breaks a rule of its trial: {own[0]}; plan the trial again")
    random = np.random.default_rng(seed)
    sites = places(trial)
    urn, limit = Urn.of(trial, contents, sites), restriction(trial, sites)
    restricted = None
    if limit is None:
        standing = urn.draw(random)
    else:
        drawn = draw_restricted(trial, urn, limit, random)
        standing = drawn.standing
        never = never_on(urn, limit, standing, random)
        restricted = Restricted(drawn.method, drawn.uniform, drawn.told, *never)
    held = urn.contents_of(standing)
    if broken := broken_rules(trial, held):
        raise RuntimeError(f"a layout broke a rule that its plan keeps: {broken[0]}")
    return PlotMap(
        plots=on_plots(trial, sites, standing.tolist()),
        contents=held,
        seed=seed,
        scheme=_scheme(trial, urn),
        restricted=restricted,
    )


def on_plots(trial: Trial, sites: Sequence[Place], standing: Sequence[int]) -> tuple[Planted, ...]:
    """A layout plot by plot; numbers beyond the treatments are filler."""
    in_soil = {x.plot for x in trial.rules.planted}
    return tuple(
        Planted(site, i if i < trial.t else None, site.plot in in_soil)
        for site, i in zip(sites, standing, strict=True)
    )


def _scheme(trial: Trial, urn: Urn) -> str:
    """What was drawn among what, in words that name treatments and blocks."""
    treatments = [treatment.name for treatment in trial.treatments]
    blocks = [block.name for block in trial.blocks]
    return "; ".join(
        (
            "treatments drawn among those that play the same part: " + _groups(urn.parts, treatments),
            "whole blocks drawn among those equal in size, rules and replicate: "
            + _groups(urn.alike, blocks),
            "plots drawn within each block" + _left_out(trial),
        )
    )


def _left_out(trial: Trial) -> str:
    """What the draw does with filler and with what is in the soil, where there is any."""
    filler = ", filler among them" if trial.may_be_emptier else ""
    plots = ", ".join(str(x.plot) for x in trial.rules.planted)
    return filler + (f", but for what is in the soil already (plot {plots})" if plots else "")


def _groups(classes: tuple[tuple[int, ...], ...], names: Sequence[str]) -> str:
    """The classes in which there was something to draw; the rest could not move."""
    drawn = [members for members in classes if len(members) > 1]
    if not drawn:
        return "none"
    if len(drawn) == 1 and len(drawn[0]) == len(names):
        return "all of them"
    return " / ".join(", ".join(names[i] for i in members) for members in drawn)
