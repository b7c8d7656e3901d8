"""A first plan that obeys the rules: built greedily, else mended, else found, or ruled out, by CP-SAT."""

from __future__ import annotations

from dataclasses import replace

import numpy as np

from search.foundation.errors import Undecided
from search.foundation.stopping import Limits as SearchLimits
from search.foundation.stopping import Stop
from search.solvers.crossing import mended
from search.solvers.feasibility import decide
from search.solvers.filler import emptied, least_spare, with_filler
from search.solvers.records import Problem
from search.solvers.streams import stream
from search.trial.checker import broken_rules
from search.trial.limits import Limits, cliques
from search.trial.records import Contents, Trial
from search.trial.tables import Ints, Tables, contents_of

ATTEMPTS = 12
MENDING = -5
"""Random stream of the mending of a first plan."""
FURTHER, FURTHER_PLOTS = 8, 2_000
"""Further starts that are tried, and the plots beyond which building them takes too long."""


def feasible_start(
    trial: Trial,
    tables: Tables,
    limits: Limits,
    *,
    seed: int,
    seconds: float,
    effort: float | None = None,
    stop: Stop | None = None,
    mending: bool = True,
) -> tuple[Contents, str]:
    """A plan that obeys every rule, and where it came from.

    Where plots may stay filler, as many as counting allows are planted, or as many as the solver finds.

    Parameters
    ----------
    trial : the trial
    tables : its tables, with the implied replication of `limits`
    limits : what the rules imply
    seed : of the greedy builder and of the solver
    seconds, effort : wall time and deterministic work that the solver may take
    stop : ends the solver from outside
    mending : whether a plan that breaks rules is mended before the solver is asked: half a second lost where
        no plan exists

    Raises
    ------
    Impossible : the solver proved, twice, that no plan obeys the rules
    Undecided : it ran out of time
    """
    rng = np.random.default_rng(seed)
    full = _with_least_filler(tables, limits)
    if full is not None:
        for _ in range(ATTEMPTS):
            built = _built(trial, full, limits, rng)
            if built is not None:
                return built, "greedy start"
        whole = _mended_start(full, full.t - tables.t, limits, rng, seed, stop) if mending else None
        if whole is not None and not broken_rules(trial, whole := emptied(whole, trial.t)):
            return whole, "greedy start, mended"
    contents = decide(tables, limits, seed=seed, seconds=seconds, effort=effort, stop=stop)
    broken = broken_rules(trial, contents)
    if broken:  # the model or the solver is at fault, not the trial
        raise Undecided(f"the solver's plan breaks a rule ({broken[0]}), so nothing is known")
    return contents, "start from the rule solver"


def _mended_start(
    tables: Tables, filler: int, limits: Limits, rng: np.random.Generator, seed: int, stop: Stop | None
) -> Contents | None:
    """A plan built without looking at rules about pairs and single blocks, then mended."""
    free = replace(
        tables,
        low=np.zeros_like(tables.low),
        high=np.broadcast_to(tables.high.max(axis=0), tables.high.shape),
        apart=np.zeros_like(tables.apart),
    )
    counts = build(free, limits, rng)
    if counts is None:
        return None
    # what is mended is a matter of rules alone, so no aim is needed
    problem, stop = Problem(tables, None, filler=filler), stop or Stop(SearchLimits())
    return mended(problem, contents_of(counts), stream(seed, MENDING), stop)


def further_starts(
    trial: Trial, tables: Tables, limits: Limits, *, seed: int, many: int = FURTHER
) -> tuple[Contents, ...]:
    """More plans within the rules, as far as the greedy builder finds any, all different.

    Rules can part the plans into islands that no exchange or replacement joins: so start on several.

    Parameters
    ----------
    trial, limits, seed : as in `feasible_start`
    tables : of exact blocks; those of a search with filler hold a treatment for each plot of it
    many : how many are tried
    """
    if tables.n > FURTHER_PLOTS:
        return ()
    rng = np.random.default_rng((seed, 1))
    found: dict[Contents, None] = {}
    for _ in range(many):
        contents = _built(trial, tables, limits, rng)
        if contents is not None:
            found[contents] = None
    return tuple(found)


def _with_least_filler(tables: Tables, limits: Limits) -> Tables | None:
    """The rules with as little filler as counting allows; None where the counts of its parts clash."""
    if tables.exact:
        return tables
    spare = least_spare(tables, limits.planted[1])
    return with_filler(tables, spare) if min(spare) >= 0 else None


def _built(trial: Trial, tables: Tables, limits: Limits, rng: np.random.Generator) -> Contents | None:
    """A greedy plan without its filler, if it obeys the rules."""
    counts = build(tables, limits, rng)
    if counts is None:
        return None
    contents = contents_of(counts[: trial.t])
    return None if broken_rules(trial, contents) else contents


def build(tables: Tables, limits: Limits, rng: np.random.Generator) -> Ints | None:
    """Fill block after block, exact ones, with the treatments that run out of blocks first.

    Returns
    -------
    (t, b) counts, or None where the builder got stuck; meetings are not looked at
    """
    plots = _draw_replication(tables, limits, rng)
    if plots is None:
        return None
    counts = tables.low.copy()
    groups = [np.flatnonzero(tables.group == g) for g in range(-1, tables.share.shape[1])]
    for g, blocks in enumerate(groups, start=-1):
        wanted = tables.share[:, g] if g >= 0 else plots - tables.share.sum(axis=1)
        if not _fill(counts, blocks, wanted, tables, rng):
            return None
    return counts


def _draw_replication(tables: Tables, limits: Limits, rng: np.random.Generator) -> Ints | None:
    """Plots for each treatment within all limits, the rest dealt out as evenly as they allow."""
    plots = tables.least.copy()
    room = [(np.array(s.treatments), s.most) for s in limits.sums]
    while (left := tables.n - int(plots.sum())) > 0:
        open_ = plots < tables.most
        for members, most in room:
            if plots[members].sum() >= most:
                open_[members] = False
        candidates = np.flatnonzero(open_)
        if not len(candidates):
            return None
        fewest = candidates[plots[candidates] == plots[candidates].min()]
        if room or left < len(fewest):
            plots[rng.choice(fewest)] += 1
        else:
            plots[fewest] += 1
    return plots


def _fill(counts: Ints, blocks: Ints, wanted: Ints, tables: Tables, rng: np.random.Generator) -> bool:
    need = wanted - counts[:, blocks].sum(axis=1)
    if (need < 0).any():
        return False
    remaining = (tables.high[:, blocks] - counts[:, blocks]).sum(axis=1).astype(float)
    rivals = [np.array(members) for members in cliques(tables.apart)]
    for j in blocks[np.lexsort((rng.random(len(blocks)), -tables.sizes[blocks]))]:
        remaining -= tables.high[:, j] - counts[:, j]
        barred = tables.apart[:, counts[:, j] > 0].any(axis=1)
        pressure = need / (remaining + 1.0)
        for members in rivals:  # they take turns: their needs add up, their blocks do not
            together = need[members].sum() / (remaining[members].max() + 1.0)
            pressure[members] = np.maximum(pressure[members], together)
        for _ in range(int(tables.sizes[j] - counts[:, j].sum())):
            can = (need > 0) & (counts[:, j] < tables.high[:, j]) & ~barred
            if not can.any():
                return False
            urgency = np.where(can, pressure + 1e-3 * rng.random(len(need)), -1.0)
            chosen = int(np.argmax(urgency))
            counts[chosen, j] += 1
            need[chosen] -= 1
            barred |= tables.apart[chosen]
    return not need.any()
