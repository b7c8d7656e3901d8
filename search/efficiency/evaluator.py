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
from search.efficiency.balance import is_balanced, near_balance
from search.efficiency.one_thread import one_thread
from search.efficiency.records import Score
from search.efficiency.reference import (
    least_worst_pair,
    mean_variance,
    product,
    reference_product,
    reference_replication,
    reference_variance,
)
from search.trial.records import AimKind, Contents, Trial
from search.trial.tables import incidence

Matrix = NDArray[np.float64]


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
    value : the aim's mean variance `tr(W C⁺)`; for overall `−log pdet(C) / (t − 1)`
    """
    if not is_estimable(contents, trial.t, trial.blocks_random):
        return float("inf")
    information = information_matrix(contents, trial.t, trial.blocks_random)
    matrix = weights(trial)
    if matrix is None:
        return -log_pseudo_determinant(information) / (trial.t - 1)
    return float((matrix * pseudo_inverse(information)).sum())


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
    present = (counts > 0).astype(np.int64)
    meetings = (present @ present.T)[np.triu_indices(t, 1)]
    replication_alone = _efficiency_without_blocks(trial, counts.sum(axis=1).tolist())
    estimable = is_estimable(contents, t, trial.blocks_random)
    reached = _reached(trial, contents) if estimable else _Reached()
    blocks_alone = reached.aim / replication_alone if replication_alone else 0.0
    return Score(
        aim=reached.aim,
        A=reached.A,
        D=reached.D,
        worst_pair_efficiency=reached.worst_pair,
        average_pair_variance=reached.average_variance,
        largest_pair_variance=reached.largest_variance,
        aim_variance=reached.aim_variance,
        loss_to_replication_percent=100 * (1 - replication_alone),
        loss_to_blocks_percent=100 * (1 - _at_most_one(blocks_alone)),
        residual_df=trial.n - trial.b - t + parts,
        connected=parts == 1,
        least_meetings=int(meetings.min()),
        most_meetings=int(meetings.max()),
        near_balanced=near_balance(trial, contents),
        balanced=is_balanced(trial, contents),
    )


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
    information = information_matrix(contents, t, trial.blocks_random)
    inverse = pseudo_inverse(information)
    variances = _differences(inverse)[np.triu_indices(t, 1)]
    average, largest = float(variances.mean()), float(variances.max())
    pairs = [Fraction(2, t)] * t
    best_average = mean_variance(pairs, reference_replication(trial, AimKind.ALL_PAIRS))
    log_ratio = log_pseudo_determinant(information) - _log(reference_product(trial))

    a = _at_most_one(float(best_average) / average)
    d = _at_most_one(exp(log_ratio / (t - 1)))
    aim: float = a
    aim_variance: float | None = average
    if trial.aim.kind is not AimKind.ALL_PAIRS:
        aim, aim_variance = _for_other_aims(trial, inverse, d)
    return _Reached(
        aim=aim,
        A=a,
        D=d,
        worst_pair=_at_most_one(float(least_worst_pair(trial)) / largest),
        average_variance=average,
        largest_variance=largest,
        aim_variance=aim_variance,
    )


def _for_other_aims(trial: Trial, inverse: Matrix, d: float) -> tuple[float, float | None]:
    matrix = weights(trial)
    if matrix is None:
        return d, None
    variance = float((matrix * inverse).sum())
    return _at_most_one(float(reference_variance(trial)) / variance), variance


def _efficiency_without_blocks(trial: Trial, replication: list[int]) -> float:
    """Efficiency for the aim of a replication without blocks: what blocks have no part in."""
    if min(replication) == 0:
        return 0.0
    if is_trace(trial):
        own = mean_variance(exact_diagonal(trial), replication)
        return float(reference_variance(trial) / own)
    log_ratio = _log(product(replication)) - _log(reference_product(trial))
    return exp(log_ratio / (trial.t - 1))


def _log(x: Fraction) -> float:
    # of the parts, since a product over many treatments is beyond the range of a float
    return log(x.numerator) - log(x.denominator)


def _at_most_one(efficiency: float) -> float:
    """An efficiency with the rounding error cut off that would carry it above 1."""
    return min(1.0, efficiency)
