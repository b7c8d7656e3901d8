"""Plan files made by a plain route of their own, floating point, to be verified or to be spoiled."""

from __future__ import annotations

import hashlib
import json
from fractions import Fraction
from itertools import combinations, product
from typing import Any

import numpy as np

from search.trial.reading import trial_from_document
from search.trial.records import AimKind, Contents, Trial
from search.trial.writing import trial_document

FANO = [[0, 1, 3], [1, 2, 4], [2, 3, 5], [3, 4, 6], [4, 5, 0], [5, 6, 1], [6, 0, 2]]
"""The seven lines of seven points, every two points on one line."""


def fano_trial(**more: Any) -> Trial:
    """Seven treatments in seven blocks of three."""
    return trial_from_document(
        {"trial": "seven", "treatments": 7, "blocks": {"count": 7, "plots": 3}, **more}
    )


def fano_contents() -> Contents:
    """The balanced plan of `fano_trial`."""
    return tuple(tuple(sorted(line)) for line in FANO)


def information(contents: Contents, t: int) -> np.ndarray:
    """C = R − N K⁻¹ N' in floating point."""
    counts = np.zeros((t, len(contents)))
    for j, block in enumerate(contents):
        for i in block:
            counts[i, j] += 1
    return np.diag(counts.sum(axis=1)) - counts / counts.sum(axis=0) @ counts.T


def replications(trial: Trial) -> list[tuple[int, ...]]:
    """All replications within the stated ranges that use every plot."""
    ranges = [range(x.least, x.most + 1) for x in trial.treatments]
    return [r for r in product(*ranges) if sum(r) == trial.n]


def weight_matrix(trial: Trial) -> np.ndarray:
    """W of the aim's mean variance tr(W C⁺)."""
    t = trial.t
    found = np.zeros((t, t))

    def add(weight: float, coefficients: dict[int, float]) -> None:
        c = np.zeros(t)
        for i, x in coefficients.items():
            c[i] = x
        found[:] += weight * np.outer(c, c)

    if trial.aim.kind is AimKind.AGAINST_CONTROL:
        for c in trial.controls:
            for j in set(range(t)) - {c}:
                add(1 / len(trial.controls) / (t - 1), {c: 1, j: -1})
    elif trial.aim.kind is AimKind.CONTRASTS:
        total = float(sum(x.weight for x in trial.aim.contrasts))
        for contrast in trial.aim.contrasts:
            add(float(contrast.weight) / total, {i: float(x) for i, x in contrast.of})
    else:
        for i, j in combinations(range(t), 2):
            add(2 / (t * (t - 1)), {i: 1, j: -1})
    return found


def squared_meetings(contents: Contents, t: int) -> int:
    """Σ λ² over pairs, counted plot by plot."""
    total = 0
    for i, j in combinations(range(t), 2):
        total += sum(block.count(i) * block.count(j) for block in contents) ** 2
    return total


def efficiency(trial: Trial, contents: Contents) -> float:
    """Efficiency for the trial's aim, the reference found by trying every replication."""
    t, C = trial.t, information(contents, trial.t)
    x = np.linalg.eigvalsh(C)[1:]
    if x[0] < 1e-9:
        return 0.0
    if trial.aim.kind is AimKind.OVERALL:
        best = max(np.prod(np.array(r, dtype=float)) for r in replications(trial)) * t / trial.n
        return float((np.prod(x) / best) ** (1 / (t - 1)))
    if trial.aim.kind is AimKind.WORST_PAIR:
        inverse = np.linalg.pinv(C)
        largest = max(inverse[i, i] + inverse[j, j] - 2 * inverse[i, j] for i, j in combinations(range(t), 2))
        return float(min(sum(1 / x for x in sorted(r)[:2]) for r in replications(trial)) / largest)
    W = weight_matrix(trial)
    best = min(float(np.sum(W.diagonal() / np.array(r))) for r in replications(trial))
    return best / float(np.trace(W @ np.linalg.pinv(C)))


def score(trial: Trial, contents: Contents, near_balanced: str = "unknown") -> dict[str, Any]:
    """The score of a connected plan by the plain route."""
    t, n, C = trial.t, trial.n, information(contents, trial.t)
    own = np.bincount([i for block in contents for i in block], minlength=t).astype(float)
    inverse = np.linalg.pinv(C)
    pairs = [inverse[i, i] + inverse[j, j] - 2 * inverse[i, j] for i, j in combinations(range(t), 2)]
    all_r = [np.array(r, dtype=float) for r in replications(trial)]
    x = np.linalg.eigvalsh(C)[1:]
    W = weight_matrix(trial).diagonal()
    D = float((np.prod(x) / max(np.prod(r) for r in all_r) * n / t) ** (1 / (t - 1)))
    aim = efficiency(trial, contents)
    if trial.aim.kind is AimKind.OVERALL:
        kept = float((np.prod(own) / max(np.prod(r) for r in all_r)) ** (1 / (t - 1)))
    elif trial.aim.kind is AimKind.WORST_PAIR:
        kept = min(sum(1 / x for x in sorted(r)[:2]) for r in all_r) / sum(1 / x for x in sorted(own)[:2])
    else:
        kept = float(min(np.sum(W / r) for r in all_r) / np.sum(W / own))
    present = [{j for j, block in enumerate(contents) if i in block} for i in range(t)]
    shared = [len(present[i] & present[j]) for i, j in combinations(range(t), 2)]
    worst = min(sum(1 / r for r in sorted(r)[:2]) for r in all_r)
    return {
        "aim": squared_meetings(contents, t) if trial.aim.kind.counts_meetings else aim,
        "A": float(min(np.sum(2 / t / r) for r in all_r) / np.mean(pairs)),
        "D": D,
        "worst_pair_efficiency": float(worst / max(pairs)),
        "average_pair_variance": float(np.mean(pairs)),
        "largest_pair_variance": float(max(pairs)),
        "loss_to_replication_percent": 100 * (1 - kept),
        "loss_to_blocks_percent": 100 * (1 - aim / kept),
        "residual_df": n - trial.b - t + 1,
        "connected": True,
        "meetings": {"least": min(shared), "most": max(shared), "near_balanced": near_balanced},
    }


def bound(trial: Trial, exact: Fraction, kind: str, multipliers: dict[str, Any]) -> dict[str, Any]:
    """A bound as the file tells it."""
    return {
        "aim": trial.aim.kind.value,
        "value": float(exact),
        "argument": kind,
        "exact": f"{exact.numerator}/{exact.denominator}",
        "certificate": {"kind": kind, "statement": "no plan is better", "multipliers": multipliers},
    }


def plan_file(
    trial: Trial,
    contents: Contents,
    bounded: dict[str, Any] | None = None,
    standing: str = "feasible",
    near_balanced: str = "unknown",
) -> dict[str, Any]:
    """A whole plan file of a trial without ground."""
    names = [treatment.name for treatment in trial.treatments]
    told = score(trial, contents, near_balanced)
    document = {
        "format": "evenfield plan 1",
        "mark": "K7-QX",
        "issued": "2027-03-02T09:10:00Z",
        "trial": trial_document(trial),
        "blocks": {
            block.name: [names[i] for i in content]
            for block, content in zip(trial.blocks, contents, strict=True)
        },
        "plots": [
            {
                "plot": 100 * line + place,
                "block": trial.blocks[line - 1].name,
                "line": line,
                "place": place,
                "treatment": names[i],
            }
            for line, block in enumerate(contents, start=1)
            for place, i in enumerate(block, start=1)
        ],
        "layout": {"seed": 8123, "scheme": "not randomised"},
        "score": told,
        "bound": bounded,
        "gap_percent": None if bounded is None else gap_percent(trial, told["aim"], bounded["value"]),
        "standing": standing,
        "ended_by": "bound met",
        "provenance": {
            "seed": 7,
            "digest": "made by hand",
            "versions": {},
            "moves": 0,
            "seconds": 0.0,
            "start": "made by hand",
        },
    }
    return sealed(document)


def gap_percent(trial: Trial, reached: float, limit: float) -> float:
    """How far a score is from a bound, in percent of the bound."""
    if trial.aim.kind.counts_meetings:
        return 100 * (reached / limit - 1)
    return 100 * (1 - reached / limit)


def balanced_file() -> dict[str, Any]:
    """The balanced plan with seven treatments and its bound, A = λt/(rk) = 7/9."""
    trial = fano_trial()
    return plan_file(
        trial,
        fano_contents(),
        bound(trial, Fraction(7, 9), "first order", {}),
        standing="balanced",
        near_balanced="yes",
    )


def sealed(document: dict[str, Any]) -> dict[str, Any]:
    """The document with a seal that fits its content."""
    rest = {key: value for key, value in document.items() if key != "seal"}
    text = json.dumps(rest, sort_keys=True, separators=(",", ":"), ensure_ascii=False)
    return {**rest, "seal": hashlib.sha256(text.encode("utf-8", "surrogatepass")).hexdigest()}
