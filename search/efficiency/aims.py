"""What each aim asks for: its sentence, its weights on the variances, and their exact diagonal.

Most aims are a trace: the mean variance that they speak of is `tr(W C⁺)` for one fixed positive
semidefinite W with `W 1 = 0`. Without blocks C⁺ may be replaced by `R⁻¹`, so there the mean variance is
`Σ W_ii / r_i` and the diagonal of W is all that a reference needs. Even meetings are ranked by a sum of
whole numbers first and by the trace of all pairs among equals, so that trace is theirs too. `overall` has
a determinant and `worst pair` a maximum instead.
"""

from __future__ import annotations

from fractions import Fraction

import numpy as np
from numpy.typing import NDArray

from search.trial.records import AimKind, Trial

SENTENCES: dict[AimKind, str] = {
    AimKind.ALL_PAIRS: (
        "Every difference between two treatments matters equally: the average variance of a "
        "difference is made as small as it can be."
    ),
    AimKind.OVERALL: (
        "All treatment differences taken together: the joint confidence region is made as small as it can be."
    ),
    AimKind.EVEN_MEETINGS: (
        "All pairs of treatments meet as equally often as they can: the sum over pairs of their squared "
        "meetings is made as small as it can be, and among equally even plans the average variance of a "
        "difference."
    ),
    AimKind.WORST_PAIR: (
        "The difference that is estimated worst: the largest variance of a difference between two "
        "treatments is made as small as it can be."
    ),
    AimKind.AGAINST_CONTROL: (
        "Every treatment against the controls: the average variance of a difference from a "
        "control is made as small as it can be."
    ),
    AimKind.CONTRASTS: (
        "The contrasts named in the file: the average of their variances, by their weights, is "
        "made as small as it can be."
    ),
}
"""One plain sentence for each aim."""


def is_trace(trial: Trial) -> bool:
    """Whether a mean variance belongs to the aim: not to `overall`, and not to `worst pair`."""
    return trial.aim.kind not in (AimKind.OVERALL, AimKind.WORST_PAIR)


def weights(trial: Trial) -> NDArray[np.float64] | None:
    """The matrix W of the aim's mean variance `tr(W C⁺)`, or None for an aim that has none.

    Parameters
    ----------
    trial : the trial

    Returns
    -------
    matrix : (t, t) symmetric, rows sum to 0: `2(I − J/t)/(t−1)` for all pairs; the average over
        controls c of the average over all other treatments j of `(e_c − e_j)(e_c − e_j)'` against
        controls, other controls among the j; `Σ w_l c_l c_l' / Σ w_l` for contrasts
    """
    if not is_trace(trial):
        return None
    t = trial.t
    if trial.aim.kind in (AimKind.ALL_PAIRS, AimKind.EVEN_MEETINGS):
        return pair_weights(t)
    if trial.aim.kind is AimKind.AGAINST_CONTROL:
        return _against_controls(t, trial.controls)
    matrix = np.zeros((t, t))
    for share, coefficients in zip(contrast_shares(trial), contrast_rows(trial), strict=True):
        row = np.array([float(c) for c in coefficients])
        matrix += float(share) * np.outer(row, row)
    return matrix


def pair_weights(t: int) -> NDArray[np.float64]:
    """W of all pairs, `2(I − J/t)/(t−1)`: the average pair variance."""
    return np.asarray(2 * (np.eye(t) - 1 / t) / (t - 1))


def _against_controls(t: int, controls: tuple[int, ...]) -> NDArray[np.float64]:
    """The Laplacian of the graph with an edge for every comparison, over their number."""
    edges = np.zeros((t, t))
    for c in controls:
        edges[c, :] += 1
        edges[:, c] += 1
    np.fill_diagonal(edges, 0)
    return np.asarray((np.diag(edges.sum(axis=1)) - edges) / (len(controls) * (t - 1)))


def exact_diagonal(trial: Trial) -> tuple[Fraction, ...]:
    """The diagonal of W, exactly; a treatment that no comparison of interest uses has 0.

    Raises
    ------
    ValueError : the aim has no W
    """
    t, kind = trial.t, trial.aim.kind
    if kind in (AimKind.ALL_PAIRS, AimKind.EVEN_MEETINGS):
        return (Fraction(2, t),) * t
    if kind is AimKind.AGAINST_CONTROL:
        q = len(trial.controls)
        control, other = Fraction(t + q - 2, q * (t - 1)), Fraction(1, t - 1)
        return tuple(control if x.control else other for x in trial.treatments)
    if kind is AimKind.CONTRASTS:
        pairs = list(zip(contrast_shares(trial), contrast_rows(trial), strict=True))
        return tuple(sum((share * row[i] ** 2 for share, row in pairs), Fraction(0)) for i in range(t))
    raise ValueError(f"the aim {kind} has no weights")


def exact_weights(trial: Trial) -> tuple[tuple[Fraction, ...], ...]:
    """W of the aim exactly, row by row.

    Raises
    ------
    ValueError : the aim has no W
    """
    t, diagonal = trial.t, exact_diagonal(trial)
    shares, coefficients = contrast_shares(trial), contrast_rows(trial)

    def between(i: int, j: int) -> Fraction:
        match trial.aim.kind:
            case AimKind.ALL_PAIRS | AimKind.EVEN_MEETINGS:
                return Fraction(-2, t * (t - 1))
            case AimKind.AGAINST_CONTROL:
                edges = (i in trial.controls) + (j in trial.controls)
                return Fraction(-edges, len(trial.controls) * (t - 1))
            case _:
                pairs = zip(shares, coefficients, strict=True)
                return sum((share * row[i] * row[j] for share, row in pairs), Fraction(0))

    return tuple(tuple(diagonal[i] if i == j else between(i, j) for j in range(t)) for i in range(t))


def contrast_shares(trial: Trial) -> tuple[Fraction, ...]:
    """The weight of each contrast over the sum of all weights."""
    total = sum((contrast.weight for contrast in trial.aim.contrasts), Fraction(0))
    return tuple(contrast.weight / total for contrast in trial.aim.contrasts)


def contrast_rows(trial: Trial) -> tuple[tuple[Fraction, ...], ...]:
    """The coefficients of each contrast, one for every treatment."""
    rows = []
    for contrast in trial.aim.contrasts:
        row = [Fraction(0)] * trial.t
        for i, coefficient in contrast.of:
            row[i] += coefficient
        rows.append(tuple(row))
    return tuple(rows)
