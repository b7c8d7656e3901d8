"""What a biometrician would want to know of a trial before anybody searches a plan for it."""

from __future__ import annotations

from collections.abc import Iterator

import numpy as np

from search.trial.limits import Limits
from search.trial.records import AimKind, Trial
from search.trial.tables import Bools, tables

ENOUGH_DF = 12
MANY_PLOTS = 20
LISTED = 6


def cautions(trial: Trial, implied: Limits | None) -> tuple[str, ...]:
    """Warnings that can be given before a search.

    Parameters
    ----------
    trial : the trial
    implied : what its rules leave of the replication; None where counts clash
    """
    found = [*_of_connection(trial), *_of_sizes(trial), *_of_meetings(trial)]
    if implied is not None:
        found += [*_of_replication(trial, implied), *_of_control(trial, implied)]
    return tuple(found)


def never_meeting(trial: Trial) -> tuple[tuple[int, int], ...]:
    """Pairs that can never stand in one block, though no `never_share_block` says so."""
    apart = tables(trial).apart
    pairs = np.argwhere(np.triu(~_can_meet(trial) & ~apart, 1))
    return tuple((int(i), int(j)) for i, j in pairs)


def _can_meet(trial: Trial) -> Bools:
    """(t, t) True for pairs that some block may hold together."""
    rules = tables(trial)
    open_ = ((rules.high > 0) & (rules.sizes > 1)).astype(np.float32)
    together: Bools = (open_ @ open_.T > 0) & ~rules.apart & (rules.meet_most > 0)
    return together


def _of_connection(trial: Trial) -> Iterator[str]:
    needed = trial.t + trial.b - 1
    if trial.n < needed:
        yield (
            f"{trial.n} plots cannot connect {trial.t} treatments in {trial.b} blocks: at least "
            f"{needed} are needed, so {_left_open(trial)}"
        )
    groups = _groups(_can_meet(trial))
    if len(groups) > 1:
        smallest = min(groups, key=len)
        yield (
            f"the rules keep {len(groups)} groups of treatments from ever meeting, "
            f"so {_not_compared(trial)}: {_named(trial, smallest)} never stand with any of the others"
        )


def _not_compared(trial: Trial) -> str:
    return "no plan can compare them" if trial.blocks_random is None else _left_open(trial)


def _left_open(trial: Trial) -> str:
    if trial.blocks_random is None:
        return "not every difference can be estimated"
    return (
        "some differences are told by block totals alone, and only if blocks are as random as the file says"
    )


def _groups(can_meet: Bools) -> list[list[int]]:
    from scipy.sparse.csgraph import connected_components

    many, group = connected_components(can_meet, directed=False)
    return [np.flatnonzero(group == g).tolist() for g in range(many)]


def _of_sizes(trial: Trial) -> Iterator[str]:
    df = trial.n - trial.b - trial.t + 1
    if df < ENOUGH_DF:
        yield (
            f"{max(0, df)} residual degrees of freedom: fewer than the {ENOUGH_DF} that EPPO standard "
            "PP 1/152 asks of efficacy trials, a good habit elsewhere"
        )
    large = [block.name for block in trial.blocks if block.plots > MANY_PLOTS]
    if large:
        yield f"blocks of over {MANY_PLOTS} plots are seldom even: {_listed(large)}"


def _of_meetings(trial: Trial) -> Iterator[str]:
    if trial.aim.kind.counts_meetings and trial.rules.twice_in_block:
        yield (
            "with twice_in_block plots of one treatment in a block do not meet, so even meetings favour "
            "repeats, and no bound is told; all pairs may be the aim that is meant"
        )


def _of_replication(trial: Trial, implied: Limits) -> Iterator[str]:
    pinned = [
        f"{x.name} ({least})"
        for x, least, most in zip(trial.treatments, implied.least, implied.most, strict=True)
        if least == most and x.least < x.most
    ]
    if pinned:
        yield f"the rules leave no choice in the number of plots of {_listed(pinned)}"
    alone = [x.name for x, most in zip(trial.treatments, implied.most, strict=True) if most == 1]
    perhaps = [
        x.name
        for x, least, most in zip(trial.treatments, implied.least, implied.most, strict=True)
        if least <= 1 < most
    ]
    if alone:
        yield f"one plot only: {_listed(alone)}; one lost plot loses the treatment"
    if perhaps:
        yield f"perhaps one plot only: {_listed(perhaps)}; plots_each or plots can ask for more"


def _of_control(trial: Trial, implied: Limits) -> Iterator[str]:
    if trial.aim.kind is not AimKind.AGAINST_CONTROL:
        return
    others = [int(implied.least[i]) for i in range(trial.t) if i not in trial.controls]
    rest = max(others, default=0)
    weak = [trial.treatments[c].name for c in trial.controls if implied.most[c] < rest]
    if weak:
        yield f"control with fewer plots than others, though all are compared with it: {_listed(weak)}"


def _named(trial: Trial, treatments: list[int]) -> str:
    return _listed([trial.treatments[i].name for i in treatments])


def _listed(names: list[str]) -> str:
    more = len(names) - LISTED
    return ", ".join(names[:LISTED]) + (f" and {more} more" if more > 0 else "")
