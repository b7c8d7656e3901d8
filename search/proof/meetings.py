"""How often treatments meet, and how even their meetings could be at best."""

from __future__ import annotations

from math import ceil

import numpy as np

from search.proof.information import Information
from search.trial.limits import Limits
from search.trial.tables import Ints, Tables


def blocks_shared(plan: Information) -> tuple[int, int]:
    """The fewest and the most blocks that two treatments share."""
    present = (plan.counts > 0).astype(np.int64)
    shared = (present @ present.T)[np.triu_indices(plan.t, 1)]
    return int(shared.min()), int(shared.max())


def sum_of_squares(plan: Information) -> int:
    """Σ λ² over pairs, λ the concurrence Σ_B n_iB n_jB of a pair; two plots of one treatment do not meet."""
    concurrence = plan.counts @ plan.counts.T
    return int((np.triu(concurrence, 1) ** 2).sum())


def least_sum_of_squares(rules: Tables, implied: Limits) -> int:
    """A number that Σ λ² over pairs is not below in any plan that the trial admits.

    The meetings of all treatments are handed out one by one to ordered pairs, each to a pair that has fewest
    so far; a treatment takes no more and no fewer than its blocks bring it, a pair no more and no fewer
    than the rules allow. Costs are convex, so that gives the least sum under what is kept of the rules. Where
    it is not settled how many plots are planted, nothing but 0 is shown.
    """
    if not rules.exact:
        return 0
    fewest = np.where(rules.apart, 0, rules.meet_least)
    if (rules.high <= 1).all():
        most = np.minimum(rules.meet_most, np.minimum.outer(implied.most, implied.most))
        needed, room = _partners(rules, implied)
        left = int((rules.sizes * (rules.sizes - 1)).sum())
    else:
        most = np.where(rules.apart, 0, rules.high @ rules.high.T)
        needed, room = np.zeros(rules.t, dtype=np.int64), np.full(rules.t, rules.n**2)
        blocks = zip(rules.low.T, rules.high.T, rules.sizes, strict=True)
        left = sum(_least_meetings(low, high, int(size)) for low, high, size in blocks)
    np.fill_diagonal(most, 0)

    spent = fewest.sum(axis=1)
    needed, room = np.maximum(needed - spent, 0), np.maximum(room - spent, 0)
    cost, left = int((fewest**2).sum()), left - int(spent.sum() + needed.sum())
    level, open_ = 0, True
    while open_:
        # Partners that a treatment could meet for the (level + 1)th time, at a cost of 2 level + 1 each.
        steps = ((fewest <= level) & (level < most)).sum(axis=1)
        must = np.minimum(steps, needed)
        may = np.minimum(steps, room) - must
        needed, room = needed - must, room - must - may
        taken = min(max(left, 0), int(may.sum()))
        cost, left = cost + (int(must.sum()) + taken) * (2 * level + 1), left - taken
        level += 1
        open_ = (left > 0 or bool(needed.any())) and level < most.max()
    return ceil(cost / 2)


def _partners(rules: Tables, implied: Limits) -> tuple[Ints, Ints]:
    """The fewest and the most meetings that each treatment's blocks can bring it."""
    partners = np.sort(rules.sizes - 1)
    open_to = (rules.high > 0)[:, np.argsort(rules.sizes)]
    needed = [int(partners[o][:r].sum()) for o, r in zip(open_to, implied.least, strict=True)]
    room = [int(partners[o][::-1][:r].sum()) for o, r in zip(open_to, implied.most, strict=True)]
    return np.array(needed), np.array(room)


def _least_meetings(low: Ints, high: Ints, size: int) -> int:
    """A number that Σ_{i≠j} n_i n_j is not below in a block: size² less a bound on Σ n² by chords."""
    squares, left = int((low**2).sum()), int(size - low.sum())
    for slope, capacity in sorted(zip(low + high, high - low, strict=True), reverse=True):
        taken = min(left, int(capacity))
        squares, left = squares + taken * int(slope), left - taken
    return max(0, int(size) ** 2 - squares)
