"""The best plan of a small trial by trying every plan, and multipliers for certificates about it."""

from __future__ import annotations

import random
from collections.abc import Callable
from dataclasses import replace
from fractions import Fraction
from typing import Any

import numpy as np

from search.proof.certificates import KINDS
from search.proof.certificates.case import Case
from search.proof.certificates.claims import Claim, LeastSum
from search.proof.parts import Part
from search.proof.records import Refuted
from search.trial.records import Aim, AimKind, Trial
from tests.drawn import all_plans
from tests.proof.plans import information, replications, squared_meetings, weight_matrix


def best_score(trial: Trial, most: int = 1500) -> float | None:
    """The best score of all plans for the aim; None where no plan exists or too many do."""
    try:
        plans = list(all_plans(trial, most))
    except OverflowError:
        return None
    references = replications(trial)
    if not plans or not references:
        return None
    t = trial.t
    if trial.aim.kind.counts_meetings:
        return min(squared_meetings(contents, t) for contents in plans)
    stack = np.array([information(contents, t) for contents in plans])
    x = np.linalg.eigvalsh(stack)[:, 1:]
    connected = x[:, 0] > 1e-9
    if not connected.any():
        return 0.0
    if trial.aim.kind is AimKind.OVERALL:
        best = max(np.prod(np.array(r, dtype=float)) for r in references) * t / trial.n
        return float(np.max(np.prod(x[connected], axis=1) / best) ** (1 / (t - 1)))
    inverse = np.linalg.inv(stack[connected] + 1 / t)
    if trial.aim.kind is AimKind.WORST_PAIR:
        own = inverse[:, range(t), range(t)]
        largest = (own[:, :, None] + own[:, None, :] - 2 * inverse).max(axis=(1, 2))
        return min(sum(1 / x for x in sorted(r)[:2]) for r in references) / float(largest.min())
    W = weight_matrix(trial)
    best = min(float(np.sum(W.diagonal() / np.array(r))) for r in references)
    return best / float(np.min(np.sum(inverse * W, axis=(1, 2))))


def derived(kind: str, case: Case, multipliers: dict[str, Any]) -> Any:
    """What a certificate of the kind proves with these multipliers."""
    return KINDS[kind].derive(case, Part("multipliers", multipliers))


def is_passed(claim: Claim | LeastSum, best: float) -> bool:
    """Whether a plan with this score makes the claim false."""
    if isinstance(claim, LeastSum):
        return best < claim.least
    return efficiency_of(claim) < best * (1 - 1e-9)


def efficiency_of(claim: Claim) -> float:
    """The efficiency that the claim lets no plan pass."""
    return float(claim.ratio) ** (1 / claim.power)


BELOW_THE_LOGARITHM = [["0", "9/10", "1/2"], ["0", "1", "1/2"], ["-1/50", "11/10", "1/2"], ["-1", "1", "1"]]
"""Coefficients of parabolas below −log(1 − x), from its series or near it."""


def any_multipliers(kind: str, case: Case, draw: random.Random) -> dict[str, Any]:
    """Multipliers of the right form and of any value, some missing."""

    def price(positive: bool = False) -> str:
        size = draw.choice((0, 1, 1, 1, 3, 30))
        x = Fraction(draw.randint(0 if positive else -60, 60), 60) * size
        return f"{x.numerator}/{x.denominator}"

    sizes = sorted({int(s) for s in case.rules.sizes})
    groups = sorted({int(g) for g in case.rules.group})
    kinds = sorted({(int(s), int(g)) for s, g in zip(case.rules.sizes, case.rules.group, strict=True)})
    sums = [
        {"treatments": list(limit.treatments), "price": price(positive=True)}
        for limit in case.implied.sums
        if draw.random() < 0.7
    ]
    match kind:
        case "replication" if case.aim is not AimKind.OVERALL:
            return {"price": price(), "sums": sums}
        case "trace root" if case.aim is AimKind.CONTRASTS:
            return contrast_root(case, draw)
        case "second moment by pairs":
            order = draw.sample(range(case.trial.t), case.trial.t)
            cut = draw.randint(0, case.trial.t)
            return {
                "rows": [
                    {"treatments": part, "partners": {str(s): price() for s in sizes}}
                    for part in (order[:cut], order[cut:])
                    if draw.random() < 0.9
                ],
                "plots": {str(s): price() for s in sizes if draw.random() < 0.9},
                "sums": sums,
            }
        case "even meetings by pairs":
            order = draw.sample(range(case.trial.t), case.trial.t)
            cut = draw.randint(0, case.trial.t)
            return {
                "partners": [
                    {"treatments": part, "price": price()}
                    for part in (order[:cut], order[cut:])
                    if draw.random() < 0.9
                ],
                "plots": {str(s): price() for s in sizes if draw.random() < 0.9},
                "sums": sums,
            }
        case "second moment by block meets" | "even meetings by block meets":
            return {
                "meets": [
                    {"size": s, "group": g, "with": other, "price": price()}
                    for s, g in kinds
                    for other in groups
                    if draw.random() < 0.9
                ],
                "plots": [{"size": s, "group": g, "price": price()} for s, g in kinds],
                "sums": sums,
            }
        case "normalised moment":
            place = Fraction(draw.randint(0, 12), 20)
            found = {"parts": _parts(case, draw, sizes, price), "sums": sums}
            if case.aim is AimKind.OVERALL:
                return found | {"polynomial": draw.choice(BELOW_THE_LOGARITHM)}
            return found | {"place": str(place)}
        case "averaged information":
            return _any_tangent(case, draw, price)
        case "second moment against controls":
            return {"cases": _any_cases(case, draw, sizes, sums, price)}
        case "all pairs and the control's own row":
            inner = replace(case, trial=replace(case.trial, aim=Aim(AimKind.ALL_PAIRS)))
            own = draw.choice(("first order", "second moment by pairs", "second moment by block meets"))
            return {"pairs": {"kind": own, "multipliers": any_multipliers(own, inner, draw)}}
    return {}


def _any_tangent(case: Case, draw: random.Random, price: Callable[..., str]) -> dict[str, Any]:
    """A matrix alike on each part, near that of treatments without blocks or anywhere."""
    parts: dict[Any, list[int]] = {}
    for i in range(case.trial.t):
        key: Any = i in case.trial.controls
        if case.aim is AimKind.CONTRASTS:
            key = tuple(dict(contrast.of).get(i, 0) for contrast in case.trial.aim.contrasts)
        parts.setdefault(key, []).append(i)
    size = range(len(parts))
    scale = draw.choice((0, 0, 1, 20))
    entries = [[f"{scale * draw.randint(-9, 9)}/100" for _ in size] for _ in size]
    return {
        "parts": [{"treatments": part} for part in parts.values()],
        "entries": [[entries[max(p, q)][min(p, q)] for q in size] for p in size],
        "more": [f"{draw.randint(10, 120)}/100" for _ in size],
        "plots": [
            {"group": g, "prices": [price() for _ in size]}
            for g in sorted({int(g) for g in case.rules.group})
        ],
        "sums": [
            {"treatments": list(limit.treatments), "price": price(positive=True)}
            for limit in case.implied.sums
        ],
    }


def _any_cases(
    case: Case, draw: random.Random, sizes: list[int], sums: list[Any], price: Callable[..., str]
) -> list[dict[str, Any]]:
    """One case for all plots of controls, or for a single control one for each number."""
    controls = case.trial.controls
    low, high = min(case.least[c] for c in controls), max(case.most[c] for c in controls)
    each = len(controls) == 1 and draw.random() < 0.5
    ranges = [[r, r] for r in range(low, high + 1)] if each else [[low, high]]
    order = draw.sample(range(case.trial.t), case.trial.t)
    cut = draw.randint(0, case.trial.t)
    return [
        {
            "control_plots": ends,
            "control": f"{draw.randint(8, 40)}/10",
            "other": f"{draw.randint(8, 40)}/10",
            "places": [f"{draw.randint(0, 30)}/10", f"{draw.randint(0, 30)}/10"],
            "rows": [
                {"treatments": part, "partners": {str(s): price() for s in sizes}}
                for part in (order[:cut], order[cut:])
            ],
            "plots": {str(s): price() for s in sizes},
            "sums": sums,
        }
        for ends in ranges
    ]


def _parts(
    case: Case, draw: random.Random, sizes: list[int], price: Callable[[], str]
) -> list[dict[str, Any]]:
    """All treatments in one part, or some pairs that never meet in one of their own."""
    pairs: list[list[int]] = []
    for i, j in zip(*np.nonzero(np.triu(case.rules.apart, 1)), strict=True):
        if not any({int(i), int(j)} & set(pair) for pair in pairs) and draw.random() < 0.7:
            pairs.append([int(i), int(j)])
    parts = []
    for apart in ([], pairs) if pairs else ([],):
        own = {i for pair in apart for i in pair} if apart else {*range(case.trial.t)} - set().union(*pairs)
        plots = {str(r) for i in own for r in range(max(1, case.least[i]), case.most[i] + 1)}
        parts.append(
            {
                "apart": [{"treatments": pair} for pair in apart],
                "plots": {r: price() for r in plots},
                "meets": {str(size): {r: price() for r in plots} for size in sizes},
            }
        )
    return parts


def contrast_root(case: Case, draw: random.Random) -> dict[str, Any]:
    """A rational matrix not far below the root of the Gram matrix of the contrasts."""
    contrasts = case.trial.aim.contrasts
    total = sum(c.weight for c in contrasts)
    roots = [Fraction(int(1000 * float(c.weight / total) ** 0.5), 1000) for c in contrasts]
    vectors = np.zeros((len(contrasts), case.trial.t))
    for row, contrast in enumerate(contrasts):
        for i, x in contrast.of:
            vectors[row, i] = float(roots[row] * x)
    x, v = np.linalg.eigh(vectors @ vectors.T)
    root = (v * np.sqrt(np.maximum(x, 0)) * draw.choice((1, 1, 0.9))) @ v.T
    texts = [
        [str(Fraction(round(root[max(a, b), min(a, b)] * 10**9), 10**9)) for b in range(len(root))]
        for a in range(len(root))
    ]
    return {"roots": [str(d) for d in roots], "matrix": texts, "epsilon": draw.choice(("1/10000000", "1/50"))}


def changed(multipliers: Any, draw: random.Random) -> Any:
    """The multipliers with some prices moved a little; prices of sums stay from 0 on."""
    if isinstance(multipliers, dict):
        return {
            key: value if key in ("treatments", "sums", "control_plots", "kind") else changed(value, draw)
            for key, value in multipliers.items()
        }
    if _is_symmetric(multipliers):
        moved = [[changed(item, draw) for item in row] for row in multipliers]
        size = range(len(moved))
        return [[moved[max(p, q)][min(p, q)] for q in size] for p in size]
    if isinstance(multipliers, list):
        return [changed(item, draw) for item in multipliers]
    if isinstance(multipliers, str) and draw.random() < 0.5:
        step = draw.choice((Fraction(1, 1000), Fraction(1, 50), Fraction(1, 4), Fraction(2)))
        return str(Fraction(multipliers) + draw.choice((-1, 1)) * step)
    return multipliers


def _is_symmetric(value: Any) -> bool:
    return (
        isinstance(value, list)
        and bool(value)
        and all(isinstance(row, list) and len(row) == len(value) for row in value)
        and all(value[p][q] == value[q][p] for p in range(len(value)) for q in range(p))
    )


def sharpened(kind: str, case: Case, draw: random.Random, steps: int) -> Claim | LeastSum:
    """The strongest claim met on a random climb: certificates err where they are sharp, if anywhere."""
    multipliers = any_multipliers(kind, case, draw)
    best = _tried(kind, case, multipliers)
    for _ in range(steps):
        other = changed(multipliers, draw) if draw.random() < 0.9 else any_multipliers(kind, case, draw)
        claim = _tried(kind, case, other)
        if _weakness(claim) <= _weakness(best):
            multipliers, best = other, claim
    return best


def _weakness(claim: Claim | LeastSum) -> Fraction:
    return Fraction(-claim.least) if isinstance(claim, LeastSum) else claim.ratio


def _tried(kind: str, case: Case, multipliers: dict[str, Any]) -> Claim | LeastSum:
    try:
        found: Claim | LeastSum = derived(kind, case, multipliers)
    except Refuted:
        return LeastSum(0) if case.aim.counts_meetings else Claim(Fraction(10**9))
    return found
