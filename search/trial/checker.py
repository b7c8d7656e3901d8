"""Does a plan obey the trial's rules? Told rule by rule, in the words of the file."""

from __future__ import annotations

from collections.abc import Iterator

import numpy as np

from search.trial.records import Contents, Trial
from search.trial.tables import Bools, Tables, incidence, tables


def broken_rules(trial: Trial, contents: Contents) -> tuple[str, ...]:
    """Every way in which block contents break the trial's rules; empty for a plan that obeys them all.

    Parameters
    ----------
    trial : the trial
    contents : for each block of the trial the numbers of its treatments, one entry a plot
    """
    if len(contents) != trial.b:
        return (f"the plan has {len(contents)} blocks, the trial {trial.b}",)
    if any(not 0 <= i < trial.t for block in contents for i in block):
        return ("the plan names a treatment that the trial does not have",)
    return tuple(_breaches(trial, contents))


def _breaches(trial: Trial, contents: Contents) -> Iterator[str]:
    rules = tables(trial)
    names = [treatment.name for treatment in trial.treatments]
    blocks = [block.name for block in trial.blocks]
    counts = incidence(contents, trial.t)

    held = counts.sum(axis=0)
    for j in np.flatnonzero((held < rules.fewest) | (held > rules.sizes)):
        wanted = _range(int(rules.fewest[j]), int(rules.sizes[j]))
        yield f"{blocks[j]} has {held[j]} plots planted, not {wanted}"
    plots = counts.sum(axis=1)
    for i in np.flatnonzero((plots < rules.least) | (plots > rules.most)):
        wanted = _range(int(rules.least[i]), int(rules.most[i]))
        yield f"{names[i]} stands on {plots[i]} plots, not {wanted}"
    for i, j in zip(*np.nonzero(counts > rules.high), strict=True):
        if rules.high[i, j] == 0:
            yield f"{names[i]} stands in {blocks[j]}, where it is kept out"
        else:
            yield f"{names[i]} stands {counts[i, j]} times in {blocks[j]}, at most {rules.high[i, j]} allowed"
    for i, j in zip(*np.nonzero(counts < rules.low), strict=True):
        yield f"{blocks[j]} holds {names[i]} {counts[i, j]} times, at least {rules.low[i, j]} required"

    if rules.apart.any() or rules.limits_meetings:
        yield from _breaches_of_meetings(rules, names, counts > 0)

    for g, replicate in enumerate(trial.rules.replicates):
        held = counts[:, list(replicate.blocks)].sum(axis=1)
        for i in np.flatnonzero(held != rules.share[:, g]):
            yield f"{names[i]} stands {held[i]} times in replicate {replicate.name}, not {rules.share[i, g]}"


def _breaches_of_meetings(rules: Tables, names: list[str], present: Bools) -> Iterator[str]:
    wide = present.astype(np.float64)  # whole numbers, multiplied fast
    shared = (wide @ wide.T).astype(np.int64)
    for i, j in zip(*np.nonzero(np.triu(shared > rules.meet_most, 1)), strict=True):
        if rules.apart[i, j]:
            yield f"{names[i]} and {names[j]} share a block, which they never may"
        else:
            most = rules.meet_most[i, j]
            yield f"{names[i]} and {names[j]} share {shared[i, j]} blocks, at most {most} allowed"
    for i, j in zip(*np.nonzero(np.triu(shared < rules.meet_least, 1)), strict=True):
        least = rules.meet_least[i, j]
        yield f"{names[i]} and {names[j]} share {shared[i, j]} blocks, at least {least} required"


def _range(least: int, most: int) -> str:
    return str(least) if least == most else f"{least} to {most}"
