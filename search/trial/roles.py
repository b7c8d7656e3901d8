"""Who plays the same part as whom.

Two treatments play the same part when exchanging their names changes nothing that the trial says:
stated ranges, blocks, meetings, replicates, and what its aim asks of them. The same for two blocks,
and for two replicates. Exchanges that change nothing chain up (if a may stand for b and b for c, then a
for c), so the parts are classes, and every permutation within them leaves the trial as it is.
"""

from __future__ import annotations

from collections import defaultdict
from collections.abc import Hashable, Iterable, Sequence

import numpy as np

from search.trial.records import Trial
from search.trial.relations import Relations, relations
from search.trial.tables import Ints

Classes = tuple[tuple[int, ...], ...]
"""Classes of numbers: each in rising order, ordered by their first members."""


def treatment_roles(trial: Trial) -> Classes:
    """Treatments in classes of those that play the same part.

    Parameters
    ----------
    trial : the trial; its controls or contrasts count only where its aim asks for them

    Returns
    -------
    classes : every treatment in exactly one of them
    """
    return treatment_classes(relations(trial))


def block_roles(trial: Trial) -> Classes:
    """Blocks in classes of those alike in size, rules and replicate.

    Returns
    -------
    classes : every block in exactly one of them
    """
    return block_classes(relations(trial))


def replicate_roles(trial: Trial) -> Classes:
    """Replicates in classes of those whose blocks match one by one.

    Returns
    -------
    classes : every replicate in exactly one of them
    """
    rel = relations(trial)
    kinds = _block_kinds(rel)
    return _classes(tuple(sorted(kinds[j] for j in replicate.blocks)) for replicate in trial.rules.replicates)


def treatment_classes(rel: Relations) -> Classes:
    """Classes of treatments that the relations do not tell apart."""
    columns = list(zip(*rel.coefficients, strict=True)) or [()] * rel.t
    marks = [(rel.ranges[i], rel.controls[i], columns[i], rel.cells[i].tobytes()) for i in range(rel.t)]
    return _interchangeable(marks, rel.pairs)


def block_classes(rel: Relations) -> Classes:
    """Classes of blocks that the relations do not tell apart."""
    return _classes(zip(rel.group.tolist(), _block_kinds(rel), strict=True))


def _block_kinds(rel: Relations) -> list[tuple[int, bool, bytes]]:
    columns = np.ascontiguousarray(rel.cells.T)
    return [
        (int(size), bool(emptier), column.tobytes())
        for size, emptier, column in zip(rel.sizes, rel.emptier, columns, strict=True)
    ]


def _classes(marks: Iterable[Hashable]) -> Classes:
    members: dict[Hashable, list[int]] = defaultdict(list)
    for number, mark in enumerate(marks):
        members[mark].append(number)
    return tuple(tuple(group) for group in members.values())


def _interchangeable(marks: Sequence[Hashable], pairs: Ints) -> Classes:
    """Classes of equal marks whose rows of a symmetric table agree but for the two places themselves.

    Rows i and j of interchangeable numbers become equal once both diagonals hold `pairs[i, j]`. So every
    value v of the table is put on the diagonal in turn, and equal rows are gathered. A sum of random
    weights (one for each place and value) sifts out the rows with no partner, so that few are compared.
    """
    size = len(marks)
    class_of = list(range(size))
    sums, weight_of, places = _row_sums(pairs)
    for value, weight in weight_of.items():
        sifted: dict[tuple[Hashable, int], list[int]] = defaultdict(list)
        for i, key in enumerate((sums + weight * places).tolist()):
            sifted[marks[i], key].append(i)
        for candidates in sifted.values():
            if len(candidates) > 1:
                _gather(candidates, value, pairs, class_of)
    return _classes(class_of)


def _gather(candidates: Sequence[int], value: int, pairs: Ints, class_of: list[int]) -> None:
    first: dict[bytes, int] = {}
    for i in candidates:
        row = pairs[i].copy()
        row[i] = value
        leader = first.setdefault(row.tobytes(), i)
        if leader != i:
            class_of[i] = leader


def _row_sums(pairs: Ints) -> tuple[np.ndarray, dict[int, np.uint64], np.ndarray]:
    """Random-weight sums of the rows without their diagonals; the weights of values and of places."""
    size = len(pairs)
    draw = np.random.default_rng(1)
    usual = int(pairs[0, -1])
    rows, columns = np.nonzero((pairs != usual) & ~np.eye(size, dtype=bool))
    values, which = np.unique(pairs[rows, columns], return_inverse=True)
    weights = draw.integers(1, 2**63, size=len(values) + 1).astype(np.uint64)
    places = draw.integers(1, 2**63, size=size).astype(np.uint64)
    # The usual value weighs nothing off the diagonal: all rows lack it alike.
    sums = np.zeros(size, dtype=np.uint64)
    np.add.at(sums, rows, weights[which] * places[columns])
    weight_of = dict(zip(values.tolist(), weights[:-1], strict=True))
    return sums, {usual: np.uint64(0)} | weight_of, places
