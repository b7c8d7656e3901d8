"""Layouts drawn at random without regard to neighbours: labels, whole blocks, plots in each block."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from search.field.numbering import Place
from search.trial.records import Contents, Trial
from search.trial.roles import Classes, block_roles, treatment_roles

Standing = NDArray[np.int64]
"""The treatment on each plot, in the order of plot numbers."""


@dataclass(frozen=True, slots=True)
class Urn:
    """Everything that a draw of a layout needs.

    Parameters
    ----------
    contents : block contents of the plan
    t : number of treatments
    parts : treatments that play the same part
    alike : blocks equal in size, rules and replicate
    plots : for each block its plots, by place in the order of plot numbers
    """

    contents: Contents
    t: int
    parts: Classes
    alike: Classes
    plots: tuple[tuple[int, ...], ...]

    @classmethod
    def of(cls, trial: Trial, contents: Contents, sites: Sequence[Place]) -> Urn:
        """The urn of a plan on its plots."""
        plots: list[list[int]] = [[] for _ in trial.blocks]
        for number, site in enumerate(sites):
            plots[site.block].append(number)
        return cls(contents, trial.t, treatment_roles(trial), block_roles(trial), tuple(map(tuple, plots)))

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
        renamed = np.array(_shuffled(range(self.t), self.parts, random))
        moved = _shuffled(range(len(self.contents)), self.alike, random)
        standing = np.empty(self.n, dtype=np.int64)
        for plots, source in zip(self.plots, moved, strict=True):
            standing[list(plots)] = random.permutation(np.sort(renamed[list(self.contents[source])]))
        return standing

    def contents_of(self, standing: Standing) -> Contents:
        """Block contents of a layout."""
        return tuple(tuple(sorted(standing[list(plots)].tolist())) for plots in self.plots)


def _shuffled(items: Sequence[int], classes: Classes, random: np.random.Generator) -> list[int]:
    """The items with each class permuted within itself, uniformly."""
    moved = list(items)
    for members in classes:
        for at, to in zip(members, random.permutation(members).tolist(), strict=True):
            moved[at] = to
    return moved
