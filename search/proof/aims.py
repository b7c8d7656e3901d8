"""The mean variance that an aim speaks of, from exact variances; and its weights W."""

from __future__ import annotations

from fractions import Fraction

from search.proof.intervals import Interval
from search.proof.variances import Variances
from search.trial.records import AimKind, Trial


def mean_variance(trial: Trial, plan: Variances) -> Interval:
    """The mean variance tr(W C⁺) of the comparisons that the trial's aim weighs; not for `overall`."""
    match trial.aim.kind:
        case AimKind.AGAINST_CONTROL:
            return _against_controls(trial, plan)
        case AimKind.CONTRASTS:
            return _contrasts(trial, plan)
        case _:
            return average_pair_variance(plan)


def average_pair_variance(plan: Variances) -> Interval:
    """The mean over all pairs i, j of v_ij; Σ v_ij = t·tr G − Σ G over the pairs."""
    t = len(plan.matrix)
    pairs = t * int(plan.matrix.trace()) - int(plan.matrix.sum())
    return plan.enclosing(Fraction(2 * pairs, t * (t - 1)))


def largest_pair_variance(plan: Variances) -> Interval:
    """The greatest v_ij."""
    diagonal = plan.matrix.diagonal()
    pairs = diagonal[:, None] + diagonal[None, :] - 2 * plan.matrix
    return plan.enclosing(int(pairs.max()))


def weights(trial: Trial) -> list[Fraction]:
    """The diagonal of W, so that the aim's mean variance without blocks is Σ W_ii/r_i; not for `overall`."""
    t, controls = trial.t, trial.controls
    if trial.aim.kind is AimKind.AGAINST_CONTROL:
        # A control stands in t−1 comparisons of its own and in one of each other control.
        q = len(controls)
        alone = Fraction(1, t - 1)
        control = Fraction(t - 1 + q - 1, q * (t - 1))
        return [control if i in controls else alone for i in range(t)]
    if trial.aim.kind is AimKind.CONTRASTS:
        found = [Fraction(0)] * t
        total = sum((contrast.weight for contrast in trial.aim.contrasts), Fraction(0))
        for contrast in trial.aim.contrasts:
            for i, coefficient in contrast.of:
                found[i] += contrast.weight * coefficient**2 / total
        return found
    return pair_weights(t)


def pair_weights(t: int) -> list[Fraction]:
    """The diagonal of W where all pairs count alike, W = 2P/(t−1)."""
    return [Fraction(2, t)] * t


def _against_controls(trial: Trial, plan: Variances) -> Interval:
    t, controls, G = trial.t, trial.controls, plan.matrix
    trace = int(G.trace())
    # v_cc = 0, so the control itself may stay in the sum over all j.
    total = sum(t * int(G[c, c]) + trace - 2 * int(G[c].sum()) for c in controls)
    return plan.enclosing(Fraction(total, len(controls) * (t - 1)))


def _contrasts(trial: Trial, plan: Variances) -> Interval:
    value = weight = Fraction(0)
    for contrast in trial.aim.contrasts:
        weight += contrast.weight
        value += contrast.weight * sum(
            a * b * int(plan.matrix[i, j]) for i, a in contrast.of for j, b in contrast.of
        )
    return plan.enclosing(value / weight)
