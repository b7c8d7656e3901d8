"""How good is a plan: the slow, plain route, against which everything fast is held.

The information matrix of the treatments is `C = R − N K⁻¹ N'` with N the incidence of treatments in
blocks, R the replications and K the block sizes. It is the Laplacian of the graph with weights
`Σ_B n_iB n_jB / k_B`, so the variance of a difference is a resistance distance.

Where blocks are random with γ = block variance over plot variance, what the block totals tell is counted
too: `C(γ) = R − N diag(γ/(1+γk)) N' − s s'/Σs` with `s_i = Σ_B n_iB/(1+γk_B)`. It lies between C (γ → ∞) and
the information without blocks, and differences have a variance even where no chain of blocks joins them.
"""

from __future__ import annotations

from dataclasses import dataclass
from fractions import Fraction
from math import exp, log

import numpy as np
from numpy.typing import NDArray

from search.efficiency.aims import exact_diagonal, is_trace, weights
from search.efficiency.balance import is_balanced, near_balance, squared_meetings
from search.efficiency.by_blocks import inverse_and_log
from search.efficiency.one_thread import one_thread
from search.efficiency.records import Score
from search.efficiency.reference import (
    least_worst_pair,
    mean_variance,
    product,
    reference_product,
    reference_replication,
    reference_variance,
    worst_pair,
)
from search.trial.records import AimKind, Contents, Trial
from search.trial.tables import incidence

Matrix = NDArray[np.float64]

LARGE = 500
"""Treatments from which on a plan is scored by way of its blocks, if these are fewer."""
ROWS = 256
"""Rows of large tables that are looked at together."""


def information_matrix(contents: Contents, t: int, blocks_random: Fraction | None = None) -> Matrix:
    """`C = R − N K⁻¹ N'`, or C(γ), shape (t, t), in units of one over the plot variance.

    Parameters
    ----------
    contents : a plan
    t : number of treatments
    blocks_random : γ, block variance over plot variance; None where blocks are fixed
    """
    counts = incidence(contents, t).astype(np.float64)
    sizes = counts.sum(axis=0)
    replication = np.diag(counts.sum(axis=1))
    if blocks_random is None:
        with one_thread():
            return np.asarray(replication - (counts / sizes) @ counts.T)
    ratio = float(blocks_random)
    kept = counts @ (1 / (1 + ratio * sizes))
    with one_thread():
        within = replication - (counts * (ratio / (1 + ratio * sizes))) @ counts.T
        return np.asarray(within - np.outer(kept, kept) / kept.sum())


def components(contents: Contents, t: int) -> int:
    """Parts into which the treatments fall when those that share a block are joined."""
    leader = list(range(t))

    def find(i: int) -> int:
        while leader[i] != i:
            leader[i] = leader[leader[i]]
            i = leader[i]
        return i

    for block in contents:
        for i in block[1:]:
            leader[find(i)] = find(block[0])
    return sum(find(i) == i for i in range(t))


def pseudo_inverse(information: Matrix) -> Matrix:
    """`C⁺ = (C + J/t)⁻¹ − J/t` of a connected plan, shape (t, t)."""
    level = 1 / len(information)
    with one_thread():
        return np.asarray(np.linalg.inv(information + level) - level)


def is_estimable(contents: Contents, t: int, blocks_random: Fraction | None = None) -> bool:
    """Whether all differences can be estimated: the plan is connected, or blocks are random."""
    if blocks_random is None:
        return components(contents, t) == 1
    return len({i for block in contents for i in block}) == t


def pair_variances(contents: Contents, t: int, blocks_random: Fraction | None = None) -> Matrix | None:
    """Variance of each estimated difference, in units of the plot variance; None where one has none.

    Returns
    -------
    variances : (t, t), `v_ij = C⁺_ii + C⁺_jj − 2 C⁺_ij`
    """
    if not is_estimable(contents, t, blocks_random):
        return None
    return _differences(pseudo_inverse(information_matrix(contents, t, blocks_random)))


def _differences(inverse: Matrix) -> Matrix:
    own = np.diag(inverse)
    return np.asarray(own[:, None] + own[None, :] - 2 * inverse)


def log_pseudo_determinant(information: Matrix) -> float:
    """`log Π x` over the t − 1 nonzero eigenvalues x of C of a connected plan."""
    with one_thread():
        return float(np.linalg.slogdet(information + 1 / len(information))[1])


def objective(contents: Contents, trial: Trial) -> float:
    """What the search makes small; infinite for a disconnected plan.

    Returns
    -------
    value : the aim's mean variance `tr(W C⁺)`; for overall `−log pdet(C) / (t − 1)`; for the worst pair the
        largest pair variance; for even meetings see `meetings_and_ties`
    """
    if not is_estimable(contents, trial.t, trial.blocks_random):
        return float("inf")
    information = information_matrix(contents, trial.t, trial.blocks_random)
    if trial.aim.kind is AimKind.OVERALL:
        return -log_pseudo_determinant(information) / (trial.t - 1)
    inverse = pseudo_inverse(information)
    matrix = weights(trial)
    if matrix is None:
        return float(_differences(inverse).max())
    mean = float((matrix * inverse).sum())
    if trial.aim.kind is AimKind.EVEN_MEETINGS:
        return meetings_and_ties(squared_meetings(contents, trial.t), mean)
    return mean


def meetings_and_ties(squares: int, average_variance: float) -> float:
    """`Σλ² + 1 − 1/(1 + v)`: a number that orders plans by their meetings, equally even ones by their v."""
    return squares + 1 - 1 / (1 + average_variance)


def score(trial: Trial, contents: Contents) -> Score:
    """Everything that is said about how good a plan is.

    Efficiencies compare with the same plots without blocks in the whole-number replication within
    the stated ranges that is best for the criterion, so that none is above 1.

    Parameters
    ----------
    trial : the trial
    contents : a plan that obeys its rules
    """
    t = trial.t
    parts = components(contents, t)
    counts = incidence(contents, t)
    least_meetings, most_meetings = _range_of_meetings(counts)
    replication_alone = _efficiency_without_blocks(trial, counts.sum(axis=1).tolist())
    estimable = is_estimable(contents, t, trial.blocks_random)
    reached = _reached(trial, contents) if estimable else _Reached()
    blocks_alone = reached.aim / replication_alone if replication_alone else 0.0
    return Score(
        aim=squared_meetings(contents, t) if trial.aim.kind.counts_meetings else reached.aim,
        A=reached.A,
        D=reached.D,
        worst_pair_efficiency=reached.worst_pair,
        average_pair_variance=reached.average_variance,
        largest_pair_variance=reached.largest_variance,
        aim_variance=reached.aim_variance,
        loss_to_replication_percent=100 * (1 - replication_alone),
        loss_to_blocks_percent=100 * (1 - _at_most_one(blocks_alone)),
        residual_df=int(counts.sum()) - trial.b - t + parts,
        connected=parts == 1,
        least_meetings=least_meetings,
        most_meetings=most_meetings,
        near_balanced=near_balance(trial, contents),
        balanced=is_balanced(trial, contents),
    )


def _range_of_meetings(counts: NDArray[np.int64]) -> tuple[int, int]:
    """Fewest and most blocks that two treatments share."""
    present = (counts > 0).astype(np.float64)  # whole numbers, multiplied fast
    t, b = counts.shape
    least, most = b, 0
    with one_thread():
        for first in range(0, t, ROWS):
            met = present[first : first + ROWS] @ present.T
            own = np.arange(len(met)), np.arange(first, first + len(met))
            met[own] = 0
            most = max(most, int(met.max()))
            met[own] = b
            least = min(least, int(met.min()))
    return least, most


def _mean_and_largest(inverse: Matrix) -> tuple[float, float]:
    """Average and largest variance of a difference, row by row: the matrix may be large."""
    own, total, largest = np.diag(inverse), 0.0, 0.0
    for i in range(1, len(inverse)):
        row = own[i] + own[:i] - 2 * inverse[i, :i]
        total += float(row.sum())
        largest = max(largest, float(row.max()))
    return 2 * total / (len(inverse) * (len(inverse) - 1)), largest


@dataclass(frozen=True, slots=True)
class _Reached:
    """What a plan reaches; the defaults are those of one that leaves a difference open."""

    aim: float = 0.0
    A: float = 0.0
    D: float = 0.0
    worst_pair: float = 0.0
    average_variance: float | None = None
    largest_variance: float | None = None
    aim_variance: float | None = None


def _reached(trial: Trial, contents: Contents) -> _Reached:
    t = trial.t
    if t > max(LARGE, trial.b) and trial.blocks_random is None:
        inverse, logarithm = inverse_and_log(incidence(contents, t))
    else:
        information = information_matrix(contents, t, trial.blocks_random)
        inverse, logarithm = pseudo_inverse(information), log_pseudo_determinant(information)
    average, largest = _mean_and_largest(inverse)
    pairs = [Fraction(2, t)] * t
    best_average = mean_variance(pairs, reference_replication(trial, AimKind.ALL_PAIRS))
    log_ratio = logarithm - _log(reference_product(trial))

    a = _at_most_one(float(best_average) / average)
    d = _at_most_one(exp(log_ratio / (t - 1)))
    worst = _at_most_one(float(least_worst_pair(trial)) / largest)
    aim: float = a
    aim_variance: float | None = average
    matrix = weights(trial)
    if trial.aim.kind is AimKind.OVERALL:
        aim, aim_variance = d, None
    elif matrix is None:
        aim, aim_variance = worst, largest
    elif not trial.aim.kind.treats_pairs_alike:
        aim_variance = float((matrix * inverse).sum())
        aim = _at_most_one(float(reference_variance(trial)) / aim_variance)
    return _Reached(
        aim=aim,
        A=a,
        D=d,
        worst_pair=worst,
        average_variance=average,
        largest_variance=largest,
        aim_variance=aim_variance,
    )


def _efficiency_without_blocks(trial: Trial, replication: list[int]) -> float:
    """Efficiency for the aim of a replication without blocks: what blocks have no part in.

    Even meetings, which mean nothing without blocks, are told the average of all pairs.
    """
    if min(replication) == 0:
        return 0.0
    if is_trace(trial):
        own = mean_variance(exact_diagonal(trial), replication)
        return float(reference_variance(trial) / own)
    if trial.aim.kind is AimKind.WORST_PAIR:
        return float(reference_variance(trial) / worst_pair(replication))
    log_ratio = _log(product(replication)) - _log(reference_product(trial))
    return exp(log_ratio / (trial.t - 1))


def _log(x: Fraction) -> float:
    # of the parts, since a product over many treatments is beyond the range of a float
    return log(x.numerator) - log(x.denominator)


def _at_most_one(efficiency: float) -> float:
    """An efficiency with the rounding error cut off that would carry it above 1."""
    return min(1.0, efficiency)
