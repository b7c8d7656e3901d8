"""Trials with rules of every kind, drawn from a seed around a plan, so that none of them is impossible.

Four kinds take turns: unequal bays with ranges; replicates with unequal blocks; the same with treatments that
stand twice in each replicate and a block outside; treatments that may stand twice in a block. Each gets pairs
apart, barred and required blocks, and limits on meetings; every second one pins the replications. Small ones
have few enough plans to look at each of them.
"""

from __future__ import annotations

from itertools import combinations
from random import Random
from typing import Any

import numpy as np

from search.trial.reading import trial_from_document
from search.trial.records import Contents, Trial
from search.trial.tables import incidence

KINDS = ("bays", "replicates", "fuller replicates", "twice")


def ruled(seed: int, *, small: bool = False) -> Trial:
    """The trial of a seed: 10 to 40 treatments, or 4 to 6.

    Parameters
    ----------
    seed : its remainder by four tells the kind
    small : whether all its plans are to be looked at
    """
    draw, kind = Random(seed), KINDS[seed % len(KINDS)]
    t = draw.randint(4, 6) if small else draw.randint(10, 40)
    names = [f"V{i:02d}" for i in range(1, t + 1)]
    fuller = sorted(draw.sample(range(t), max(1, t // 6))) if kind == "fuller replicates" else []
    contents: Contents | None = None
    while contents is None or len({i for block in contents for i in block}) < t:
        contents, groups = _plan(draw, kind, t, fuller, small)
    blocks = [f"bay {j}" for j in range(1, len(contents) + 1)]
    rules: dict[str, Any] = {"twice_in_block": True} if kind == "twice" else {}
    if groups:
        rules["replicates"] = {
            f"set {g}": [blocks[j] for j in members] for g, members in enumerate(groups, 1)
        }
    if fuller:
        rules["per_replicate"] = {names[i]: 2 for i in fuller}
    rules |= _rules(draw, contents, names, blocks, small)
    plots = incidence(contents, t).sum(axis=1).tolist()
    loose = seed % 2
    return trial_from_document(
        {
            "trial": f"ruled {seed}",
            "treatments": {
                name: {"plots": [max(1, r - loose * draw.randint(0, 1)), r + loose * draw.randint(0, 1)]}
                for name, r in zip(names, plots, strict=True)
            },
            "blocks": {block: len(held) for block, held in zip(blocks, contents, strict=True)},
            "rules": rules,
        }
    )


def hundred(seed: int) -> Trial:
    """A hundred treatments in unequal bays or in replicates, under fifty rules of five sorts, ten of each."""
    draw, t = Random(seed), 100
    names = [f"V{i:03d}" for i in range(1, t + 1)]
    contents, groups = None, []
    while contents is None or len({i for block in contents for i in block}) < t:
        contents, groups = _plan(draw, KINDS[seed % 2], t, [], False)
    blocks = [f"bay {j}" for j in range(1, len(contents) + 1)]
    rules = _rules(draw, contents, names, blocks, exactly=10)
    if groups:
        rules["replicates"] = {
            f"set {g}": [blocks[j] for j in members] for g, members in enumerate(groups, 1)
        }
    plots = incidence(contents, t).sum(axis=1).tolist()
    return trial_from_document(
        {
            "trial": f"hundred {seed}",
            "treatments": {name: {"plots": r} for name, r in zip(names, plots, strict=True)},
            "blocks": {block: len(held) for block, held in zip(blocks, contents, strict=True)},
            "rules": rules,
        }
    )


def _plan(
    draw: Random, kind: str, t: int, fuller: list[int], small: bool
) -> tuple[Contents | None, list[list[int]]]:
    """Any plan of a kind and its replicates; None where the draw did not work out."""
    usual = draw.randint(2, 3) if small or draw.random() < 0.3 else draw.randint(4, 8)
    if kind in ("bays", "twice"):
        plots = round(t * draw.uniform(2.0, 2.6 if small else 4.0))
        sizes = [
            min(size, t - 1) for size in _sizes(draw, plots, usual)
        ]  # larger: every treatment must be in
        blocks = [draw.choices(range(t), k=k) if kind == "twice" else draw.sample(range(t), k) for k in sizes]
        return tuple(tuple(sorted(block)) for block in blocks), []
    held, groups = [], []
    for _ in range(2 if small else draw.randint(2, 4)):
        order = [*range(t), *fuller]
        draw.shuffle(order)
        first = len(held)
        for size in _sizes(draw, len(order), usual):
            held.append(tuple(sorted(order[:size])))
            del order[:size]
        groups.append(list(range(first, len(held))))
    if fuller:
        held.append(tuple(sorted(draw.sample(range(t), min(t, usual)))))
    if any(len(set(block)) < len(block) for block in held):
        return None, []
    return tuple(held), groups


def _sizes(draw: Random, plots: int, usual: int) -> list[int]:
    """Sizes of 2 or more around the usual one that add up."""
    sizes: list[int] = []
    while plots > usual + 2:
        sizes.append(max(2, usual + draw.choice((-1, 0, 0, 1))))
        plots -= sizes[-1]
    return [*sizes, plots] if plots > 1 or not sizes else [*sizes[:-1], sizes[-1] + plots]


def _rules(
    draw: Random,
    contents: Contents,
    names: list[str],
    blocks: list[str],
    small: bool = False,
    exactly: int = 0,
) -> dict[str, Any]:
    """Rules that the plan obeys, some of which it only just obeys."""
    present = incidence(contents, len(names)) > 0
    shared = present.astype(np.int64) @ present.T
    pairs = list(combinations(range(len(names)), 2))

    def some(things: list[Any], most: int) -> list[Any]:
        many = exactly or draw.randint(0, 3 if small else most)
        return draw.sample(things, min(len(things), many))

    apart = some([p for p in pairs if shared[p] == 0], 10)
    least = some([p for p in pairs if shared[p] > 0], 6)
    most = some([p for p in pairs if 0 < shared[p] < len(blocks)], 6)
    barred = some([(i, j) for i, j in zip(*np.nonzero(~present), strict=True)], 6)
    held = some([(i, j) for i, j in zip(*np.nonzero(present), strict=True)], 6)
    rules: dict[str, Any] = {
        "never_share_block": [[names[i], names[j]] for i, j in apart],
        "meet_at_least": [{"pair": [names[i], names[j]], "blocks": 1} for i, j in least],
        "meet_at_most": [{"pair": [names[i], names[j]], "blocks": int(shared[i, j])} for i, j in most],
        "keep_out": _listed((names[i], blocks[j]) for i, j in barred),
        "must_hold": _listed((blocks[j], names[i]) for i, j in held),
    }
    if not exactly and draw.random() < 0.25:
        rules["meet_at_most"] = int(max(shared[p] for p in pairs))
    return {key: value for key, value in rules.items() if value}


def _listed(entries: Any) -> dict[str, list[str]]:
    lists: dict[str, list[str]] = {}
    for key, value in entries:
        lists.setdefault(key, []).append(value)
    return lists
