"""Layouts drawn at random without regard to neighbours: labels, whole blocks, plots in each block.

Filler is drawn like a treatment that nobody's rule knows; it has the number after the last treatment. What is
in the soil already stands where it stands, and the rest of its block is drawn about it.
"""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from search.trial.numbering import Place
from search.trial.records import Contents, Trial
from search.trial.roles import Classes, block_roles, treatment_roles

Standing = NDArray[np.int64]
"""The treatment on each plot, in the order of plot numbers."""


@dataclass(frozen=True, slots=True)
class Urn:
    """Everything that a draw of a layout needs.

    Parameters
    ----------
    contents : block contents of the plan, filler included
    t : number of treatments, and the number of filler
    parts : treatments that play the same part, and of which as much is in the soil in each block
    alike : blocks equal in size, rules and replicate, with the same in the soil
    plots : for each block its plots, by place in the order of plot numbers
    fixed : plots that are planted already, each with its treatment
    free : for each block its other plots
    """

    contents: Contents
    t: int
    parts: Classes
    alike: Classes
    plots: tuple[tuple[int, ...], ...]
    fixed: Mapping[int, int]
    free: tuple[tuple[int, ...], ...]

    @classmethod
    def of(cls, trial: Trial, contents: Contents, sites: Sequence[Place]) -> Urn:
        """The urn of a plan on its plots."""
        plots: list[list[int]] = [[] for _ in trial.blocks]
        for number, site in enumerate(sites):
            plots[site.block].append(number)
        full = tuple(
            (*block, *[trial.t] * (len(inside) - len(block)))
            for block, inside in zip(contents, plots, strict=True)
        )
        number_of = {site.plot: number for number, site in enumerate(sites)}
        fixed = {number_of[x.plot]: x.treatment for x in trial.rules.planted}
        in_soil = trial.rules.planted
        return cls(
            contents=full,
            t=trial.t,
            parts=_split(treatment_roles(trial), [(x.treatment, x.block) for x in in_soil]),
            alike=_split(block_roles(trial), [(x.block, x.treatment) for x in in_soil]),
            plots=tuple(map(tuple, plots)),
            fixed=fixed,
            free=tuple(tuple(p for p in inside if p not in fixed) for inside in plots),
        )

    @property
    def n(self) -> int:
        """Number of plots."""
        return sum(map(len, self.plots))

    @property
    def moves_labels_or_blocks(self) -> bool:
        """Whether anything but the order within blocks is drawn."""
        return any(len(members) > 1 for members in (*self.parts, *self.alike))

    def draw(self, random: np.random.Generator) -> Standing:
        """A layout; every one that the scheme allows has the same chance."""
        renamed = np.array([*_shuffled(range(self.t), self.parts, random), self.t])
        moved = _shuffled(range(len(self.contents)), self.alike, random)
        standing = np.empty(self.n, dtype=np.int64)
        for plots, free, source in zip(self.plots, self.free, moved, strict=True):
            held = np.sort(renamed[list(self.contents[source])])
            if len(free) < len(plots):
                held = self._planted(held, plots, standing)
            standing[list(free)] = random.permutation(held)
        return standing

    def _planted(self, held: Standing, plots: tuple[int, ...], standing: Standing) -> Standing:
        """What is left of the contents of a block when its fixed plots have what is in the soil there."""
        left = held.tolist()
        for p in plots:
            if p in self.fixed:
                standing[p] = self.fixed[p]
                left.remove(self.fixed[p])
        return np.array(left, dtype=np.int64)

    def contents_of(self, standing: Standing) -> Contents:
        """Block contents of a layout, without filler."""
        return tuple(
            tuple(sorted(i for i in standing[list(plots)].tolist() if i < self.t)) for plots in self.plots
        )


def _split(classes: Classes, marks: Sequence[tuple[int, int]]) -> Classes:
    """The classes parted into those whose members have the same marks, each as often."""
    own: dict[int, list[int]] = {}
    for member, mark in marks:
        own.setdefault(member, []).append(mark)
    parted: dict[tuple[int, tuple[int, ...]], list[int]] = {}
    for number, members in enumerate(classes):
        for member in members:
            parted.setdefault((number, tuple(sorted(own.get(member, ())))), []).append(member)
    return tuple(map(tuple, parted.values()))


def _shuffled(items: Sequence[int], classes: Classes, random: np.random.Generator) -> list[int]:
    """The items with each class permuted within itself, uniformly."""
    moved = list(items)
    for members in classes:
        for at, to in zip(members, random.permutation(members).tolist(), strict=True):
            moved[at] = to
    return moved
