"""Layouts under `not_beside`: drawn again until the rule holds, else walked to, else solved for."""

from __future__ import annotations

from collections import Counter
from dataclasses import dataclass

import numpy as np

from search.field.beside import Restriction
from search.field.chain import Walk, forgets
from search.field.settling import settled, unsettled_block
from search.field.urn import Standing, Urn
from search.foundation.cpsat import Answer
from search.foundation.errors import Undecided
from search.trial.records import Trial

MOST_DRAWN_PLOTS = 1_500_000
"""Plots of all draws by rejection together, about two seconds of work."""
MOST_DRAWS = 20_000
SWEEPS = 24
LENGTHENED = 3
"""So often a walk that has not forgotten its start, or ends in a clash, goes on for as long again."""
TRIES = 5


@dataclass(frozen=True, slots=True, eq=False)
class Drawn:
    """A layout and how it came about.

    Parameters
    ----------
    standing : the treatment of each plot
    method : rejection, chain or solver
    uniform : whether every layout that keeps the rule had the same chance
    told : the same in a sentence
    """

    standing: Standing
    method: str
    uniform: bool
    told: str


def draw_restricted(trial: Trial, urn: Urn, limit: Restriction, random: np.random.Generator) -> Drawn:
    """A layout that keeps the rule about neighbours.

    Raises
    ------
    Undecided : no layout of these blocks keeps it, or none was found
    """
    return (
        _by_rejection(urn, limit, random)
        or _by_walking(urn, limit, random)
        or _by_solving(trial, urn, limit, random)
    )


def _by_rejection(urn: Urn, limit: Restriction, random: np.random.Generator) -> Drawn | None:
    most = min(MOST_DRAWS, max(20, MOST_DRAWN_PLOTS // urn.n))
    for number in range(1, most + 1):
        standing = urn.draw(random)
        if not limit.clashes(standing):
            told = (
                f"drawn again until no forbidden neighbours were left, {number:,} "
                f"{'draw' if number == 1 else 'draws'}: every layout that keeps the rule had the same chance"
            )
            return Drawn(standing, "rejection", True, told)
    return None


def _by_walking(urn: Urn, limit: Restriction, random: np.random.Generator) -> Drawn | None:
    walks = tuple(Walk(urn, limit, urn.draw(random), random) for _ in range(2))
    for length in range(1, LENGTHENED + 1):
        half = []
        for walk in walks:
            for sweep in range(SWEEPS):
                walk.sweep()
                if sweep == SWEEPS // 2:
                    half.append(walk.layout())
        if not walks[0].clashes and forgets((half[0], half[1]), (walks[0], walks[1])):
            told = (
                f"walked to by {length * SWEEPS} random exchanges a plot from a free draw; a second walk "
                "from another draw agreed with it as much as it agreed with its own past, so the start is "
                "forgotten and every layout that keeps the rule had nearly the same chance"
            )
            return Drawn(walks[0].layout(), "chain", True, told)
    return None


def _by_solving(trial: Trial, urn: Urn, limit: Restriction, random: np.random.Generator) -> Drawn:
    answers = []
    for _ in range(TRIES if urn.moves_labels_or_blocks else 1):
        standing = urn.draw(random)
        answer, layout = settled(urn, limit, standing, int(random.integers(2**31)))
        answers.append(answer)
        if answer is Answer.SOLUTION:
            walk = Walk(urn, limit, layout, random)
            walk.stiffness = np.inf
            for _ in range(SWEEPS):
                walk.sweep()
            told = (
                "not uniform: found by the rule solver and shuffled by exchanges that keep the rule; some "
                "layouts may have had a greater chance than others"
            )
            return Drawn(walk.layout(), "solver", False, told)
    raise Undecided(_clash(trial, urn, limit, standing, answers[-1]))


def _clash(trial: Trial, urn: Urn, limit: Restriction, standing: Standing, answer: Answer) -> str:
    """Who cannot be kept apart, and what to try."""
    words = "the treatments of this plan cannot be placed so that rules.not_beside holds"
    if answer is Answer.UNKNOWN:
        words = "no way was found in the time to place the treatments so that rules.not_beside holds"
    block = unsettled_block(urn, limit, standing)
    if block is not None:
        held = Counter(standing[list(urn.plots[block])].tolist())
        # Filler clashes with nobody, so it is never named.
        names = [trial.treatments[i].name for i in held if limit.clashing[i][list(held)].any()]
        words += (
            f": the {len(urn.plots[block])} plots of {trial.blocks[block].name} cannot keep "
            f"{', '.join(names)} apart"
        )
    return (
        f"{words}; search another plan with another --seed, put fewer plots between them (plots_apart, "
        "distance_m), or forbid the pair to share a block (never_share_block)"
    )
