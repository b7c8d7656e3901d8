"""Small trials drawn at random with every rule mixed in, and all plans that one of them admits."""

from __future__ import annotations

from collections.abc import Iterator
from itertools import combinations, combinations_with_replacement, product
from typing import Any

import numpy as np
from hypothesis import strategies as st

from search.trial.checker import broken_rules
from search.trial.reading import trial_from_document
from search.trial.records import Contents, Trial
from search.trial.tables import Ints, tables

TINY = "a trial that can be checked by hand: three treatments, three blocks of two"


def tiny_trial(**more: Any) -> Trial:
    """Three treatments in three blocks of two: the triangle, balanced with λ = 1 and E = 3/4."""
    return trial_from_document(
        {"trial": "tiny", "treatments": ["A", "B", "C"], "blocks": {"count": 3, "plots": 2}, **more}
    )


@st.composite
def small_documents(draw: st.DrawFn, most_treatments: int = 5, most_plots: int = 12) -> dict[str, Any]:
    """A trial file as data: unequal blocks, some of which may stay partly empty, ranges, and any mixture of
    rules and aims.

    Many of them are impossible; that is wanted.
    """
    t = draw(st.integers(2, most_treatments))
    names = [chr(65 + i) for i in range(t)]
    twice = draw(st.sampled_from([False, False, False, True]))
    sizes: list[int] = []
    for _ in range(draw(st.integers(1, 5))):
        size = draw(st.integers(1 if draw(st.booleans()) else 2, t + (1 if twice else 0)))
        if sum(sizes) + size <= most_plots:
            sizes.append(size)
    sizes = sizes or [min(t, 2)]
    emptier = draw(st.lists(st.booleans(), min_size=len(sizes), max_size=len(sizes)))
    emptier = (
        [may and draw(st.booleans()) for may in emptier] if draw(st.booleans()) else [False] * len(sizes)
    )
    blocks: dict[str, Any] = {
        f"b{j}": {"at_most": size} if may else size
        for j, (size, may) in enumerate(zip(sizes, emptier, strict=True))
    }
    block_names, pairs = list(blocks), [list(pair) for pair in combinations(names, 2)]

    rules: dict[str, Any] = {"twice_in_block": True} if twice else {}

    def sometimes(weight: int) -> bool:
        return draw(st.integers(0, weight)) == 0

    if sometimes(2) and t > 2:
        rules["never_share_block"] = draw(st.lists(st.sampled_from(pairs), min_size=1, max_size=2))
    if sometimes(4):
        rules["meet_at_least"] = [{"pair": draw(st.sampled_from(pairs)), "blocks": 1}]
    if sometimes(4):
        rules["meet_at_most"] = draw(st.integers(1, 2))
    if sometimes(3):
        rules["keep_out"] = {draw(st.sampled_from(names)): [draw(st.sampled_from(block_names))]}
    if sometimes(3):
        rules["must_hold"] = {draw(st.sampled_from(block_names)): [draw(st.sampled_from(names))]}
    if sometimes(5):
        j = draw(st.integers(0, len(sizes) - 1))
        plots = draw(st.lists(st.integers(1, sizes[j]), min_size=1, max_size=2, unique=True))
        rules["planted"] = {str(100 * (j + 1) + place): draw(st.sampled_from(names)) for place in plots}
    replicate = _complete_set(sizes, t)
    if replicate and sometimes(1):
        rules["replicates"] = {"set": [block_names[j] for j in replicate]}

    treatments: dict[str, Any] = {name: {} for name in names}
    for name in draw(st.lists(st.sampled_from(names), max_size=2, unique=True)):
        least = draw(st.integers(1, 3))
        treatments[name] = {"plots": [least, least + draw(st.integers(0, 2))]}
    controls = draw(st.lists(st.sampled_from(names), min_size=1, max_size=2, unique=True))
    for name in controls:
        treatments[name]["control"] = True
    document: dict[str, Any] = {
        "trial": "drawn",
        "treatments": treatments,
        "blocks": blocks,
        "rules": rules,
        "aim": draw(_aims(names)),
    }
    if sometimes(5):
        document["blocks_random"] = draw(st.sampled_from(["1/2", 2, "7/3"]))
    if draw(st.booleans()):
        least = draw(st.integers(1, 2))
        document["plots_each"] = [least, least + draw(st.integers(0, 3))]
    return document


def small_trials(most_treatments: int = 5, most_plots: int = 12) -> st.SearchStrategy[Trial]:
    """Trials of `small_documents`."""
    return small_documents(most_treatments, most_plots).map(trial_from_document)


def _aims(names: list[str]) -> st.SearchStrategy[Any]:
    contrast = {"of": {names[0]: 1, names[1]: -1}}
    weighted = {"of": {names[0]: 2, names[1]: -1, names[-1]: -1}, "weight": 2}
    contrasts: dict[str, Any] = {"first": contrast}
    if len(names) > 2:
        contrasts["second"] = weighted
    words = ["all pairs", "all pairs", "overall", "against control", "even meetings", "worst pair"]
    return st.sampled_from([*words, {"contrasts": contrasts}])


def _complete_set(sizes: list[int], t: int) -> list[int]:
    for many in range(1, len(sizes) + 1):
        for blocks in combinations(range(len(sizes)), many):
            if sum(sizes[j] for j in blocks) == t:
                return list(blocks)
    return []


def all_plans(trial: Trial, most: int = 20_000) -> Iterator[Contents]:
    """Every plan that the trial admits; raises OverflowError where there are too many to look at."""
    rules = tables(trial)
    choose = combinations_with_replacement if trial.rules.twice_in_block else combinations
    columns = []
    total = 1
    for j, block in enumerate(trial.blocks):
        fitting = [
            column
            for plots in range(rules.fewest[j], block.plots + 1)
            for column in choose(range(trial.t), plots)
            if all(rules.low[i, j] <= column.count(i) <= rules.high[i, j] for i in range(trial.t))
        ]
        columns.append(fitting)
        total *= len(fitting)
        if total > most:
            raise OverflowError
    for contents in product(*columns):
        if not broken_rules(trial, contents):
            yield contents


def plans_within(trial: Trial, most: int) -> list[Contents] | None:
    """Every plan that the trial admits, or None where there are more than so many.

    Block after block, and no further where a rule is broken already: so trials of more blocks can be listed
    than by `all_plans`, which tries every combination and is the slow twin of this.
    """
    rules = tables(trial)
    choose = combinations_with_replacement if trial.rules.twice_in_block else combinations
    apart = ~np.eye(trial.t, dtype=bool)
    in_group = rules.group[:, None] == np.arange(rules.share.shape[1])
    columns: list[list[tuple[tuple[int, ...], Ints, Ints]]] = []
    for j, block in enumerate(trial.blocks):
        columns.append([])
        for column in choose(range(trial.t), block.plots):
            counts = np.bincount(column, minlength=trial.t)
            if (rules.low[:, j] <= counts).all() and (counts <= rules.high[:, j]).all():
                columns[j].append((column, counts, apart & np.outer(counts > 0, counts > 0)))
    found: list[Contents] = []

    def extend(contents: Contents, plots: Ints, shared: Ints, held: Ints) -> None:
        j = len(contents)
        if len(found) > most:
            return
        if j == trial.b:
            if (
                (plots >= rules.least).all()
                and (shared >= rules.meet_least).all()
                and (held == rules.share).all()
            ):
                found.append(contents)
            return
        for column, counts, meets in columns[j]:
            more, met, fuller = plots + counts, shared + meets, held + np.outer(counts, in_group[j])
            if (
                (more <= rules.most).all()
                and (met <= rules.meet_most).all()
                and (fuller <= rules.share).all()
            ):
                extend((*contents, column), more, met, fuller)

    nothing = np.zeros((trial.t, trial.t), dtype=np.int64)
    extend((), nothing[0], nothing, np.zeros_like(rules.share))
    return found if len(found) <= most else None
