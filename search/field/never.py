"""Treatments that can never stand on a plot of their own block because of `not_beside`."""

from __future__ import annotations

from collections import Counter

import numpy as np

from search.field.beside import Restriction
from search.field.chain import Walk
from search.field.settling import model_of
from search.field.urn import Standing, Urn
from search.foundation.cpsat import Answer

SWEEPS, FEWER_SWEEPS = 30, 6
MOST_ASKED = 60
MOST_PLOTS = 400
"""Larger fields are looked at block by block alone."""
EFFORT = 0.5
"""Deterministic work of the solver for one question."""

Never = tuple[tuple[int, int], ...]


def never_on(
    urn: Urn, limit: Restriction, standing: Standing, random: np.random.Generator
) -> tuple[Never, bool]:
    """Pairs of plot and treatment that no layout of these blocks can have, and whether all were found.

    What a walk among layouts that keep the rule meets is possible; the solver is asked for the rest.

    Parameters
    ----------
    standing : a layout that keeps the rule; its block contents are taken as they are
    """
    unseen = _unseen(urn, limit, standing, random)
    small = urn.n <= MOST_PLOTS
    block_of = {p: j for j, plots in enumerate(urn.plots) for p in plots}
    never = []
    complete = small and len(unseen) <= MOST_ASKED
    for p, i in unseen[:MOST_ASKED]:
        asked = model_of(urn, limit, standing, range(len(urn.plots)) if small else (block_of[p],))
        asked.model.add(asked.stands[p, i] == 1)
        answer, _ = asked.settle(0, EFFORT)
        complete &= answer is not Answer.UNKNOWN
        if answer is Answer.INFEASIBLE:
            never.append((p, i))
    return tuple(never), complete


def _unseen(
    urn: Urn, limit: Restriction, standing: Standing, random: np.random.Generator
) -> list[tuple[int, int]]:
    walk = Walk(urn, limit, standing, random)
    walk.alike, walk.parts = [], []
    held = [Counter(standing[list(free)].tolist()) for free in urn.free]
    unseen = {
        (p, i) for free, inside in zip(urn.free, held, strict=True) for p in free for i in inside if i < urn.t
    }
    unseen -= set(enumerate(walk.standing))
    for _ in range(SWEEPS if urn.n <= MOST_PLOTS else FEWER_SWEEPS):
        walk.sweep()
        if not walk.clashes:
            unseen -= set(enumerate(walk.standing))
    return sorted(unseen)
