"""Blocks that may stay partly empty, where the rules leave no choice after all."""

from __future__ import annotations

from dataclasses import replace

from search.trial.limits import Limits, limits
from search.trial.records import Block, Trial


def settled(trial: Trial, implied: Limits) -> tuple[Trial, Limits]:
    """The trial with exact block sizes, where counting alone settles how many plots of each are planted.

    The two trials admit the same plans, and efficiencies in both mean the same: so what is shown of one
    holds for the other. Else, and where every block is exact as it stands, it is the trial itself.

    Parameters
    ----------
    trial : the trial
    implied : what its rules leave, from `search.trial.limits`

    Returns
    -------
    the trial and what its rules leave
    """
    land = int(implied.fullest.sum())
    if not trial.may_be_emptier or (implied.fewest < implied.fullest).any() or land != trial.n:
        return trial, implied
    blocks = tuple(Block(x.name, k) for x, k in zip(trial.blocks, implied.fullest.tolist(), strict=True))
    # An exact block that holds every treatment must hold each; one that may be emptier need not.
    loose = tuple((i, j) for j, x in enumerate(trial.blocks) if x.may_be_emptier for i in range(trial.t))
    rules = replace(trial.rules, unforced=(*trial.rules.unforced, *loose))
    exact = replace(trial, blocks=blocks, rules=rules)
    return exact, limits(exact)


def settled_trial(trial: Trial) -> Trial:
    """The same trial as `settled`, for a trial whose rules can be met."""
    return settled(trial, limits(trial))[0] if trial.may_be_emptier else trial
