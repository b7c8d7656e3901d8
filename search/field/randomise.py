"""From block contents to a field layout, drawn at random as the scheme says."""

from __future__ import annotations

import secrets
from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np

from search.field.numbering import Place, places
from search.foundation.errors import BadInput
from search.trial.checker import broken_rules
from search.trial.records import Contents, Trial
from search.trial.roles import block_roles, treatment_roles

MOST_SEED = 10**9
"""Seeds drawn here have at most nine digits, so that one can be copied from paper."""


@dataclass(frozen=True, slots=True)
class Planted:
    """A plot and the treatment that stands on it."""

    place: Place
    treatment: int


@dataclass(frozen=True, slots=True)
class PlotMap:
    """A layout: which treatment stands where, and how that was drawn.

    Parameters
    ----------
    plots : one entry a plot, in the order of plot numbers
    contents : block contents after randomisation
    seed : seed of the layout
    scheme : what was drawn at random among what, in words
    """

    plots: tuple[Planted, ...]
    contents: Contents
    seed: int
    scheme: str


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
    move whole blocks among those equal in size, rules and replicate, and to order plots in a block.

    Parameters
    ----------
    trial : the trial
    contents : block contents of the plan
    seed : seed of the layout; the same seed gives the same layout

    Raises
    ------
    BadInput : the plan breaks a rule of its trial
    """
    random = np.random.default_rng(seed)
    parts, alike = treatment_roles(trial), block_roles(trial)
    renamed = _shuffled(range(trial.t), parts, random)
    moved = _shuffled(range(trial.b), alike, random)
    drawn = tuple(tuple(sorted(renamed[i] for i in contents[moved[j]])) for j in range(trial.b))
    if broken := broken_rules(trial, drawn):
        if own := broken_rules(trial, contents):
            raise BadInput(f"the plan breaks a rule of its trial: {own[0]}; plan the trial again")
        raise RuntimeError(f"a layout broke a rule that its plan keeps: {broken[0]}")

    sites = places(trial)
    standing: dict[int, int] = {}
    for j, block in enumerate(drawn):
        plots = [site.plot for site in sites if site.block == j]
        standing.update(zip(plots, random.permutation(block).tolist(), strict=True))
    return PlotMap(
        plots=tuple(Planted(site, standing[site.plot]) for site in sites),
        contents=drawn,
        seed=seed,
        scheme=_scheme(trial, parts, alike),
    )


def _shuffled(
    items: Sequence[int], classes: tuple[tuple[int, ...], ...], random: np.random.Generator
) -> list[int]:
    """The items with each class permuted within itself, uniformly."""
    moved = list(items)
    for members in classes:
        for at, to in zip(members, random.permutation(members).tolist(), strict=True):
            moved[at] = to
    return moved


def _scheme(trial: Trial, parts: tuple[tuple[int, ...], ...], alike: tuple[tuple[int, ...], ...]) -> str:
    """What was drawn among what, in words that name treatments and blocks."""
    treatments = [treatment.name for treatment in trial.treatments]
    blocks = [block.name for block in trial.blocks]
    return "; ".join(
        (
            "treatments drawn among those that play the same part: " + _groups(parts, treatments),
            "whole blocks drawn among those equal in size, rules and replicate: " + _groups(alike, blocks),
            "plots drawn within each block",
        )
    )


def _groups(classes: tuple[tuple[int, ...], ...], names: Sequence[str]) -> str:
    """The classes in which there was something to draw; the rest could not move."""
    drawn = [members for members in classes if len(members) > 1]
    if not drawn:
        return "none"
    if len(drawn) == 1 and len(drawn[0]) == len(names):
        return "all of them"
    return " / ".join(", ".join(names[i] for i in members) for members in drawn)
