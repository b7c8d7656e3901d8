"""The orbit engine and its parts."""

from __future__ import annotations

from itertools import combinations

import pytest

from search.designs.checking import block_faults
from search.designs.conditions import conditions
from search.designs.constructions.action import Action, stabilisers
from search.designs.constructions.columns import Budget, Packing, columns
from search.designs.constructions.covering import cover, cover_by_solver
from search.designs.constructions.groups import Factor, Group
from search.designs.constructions.orbits import LIGHT, base_blocks, developed

SEVEN = Group((Factor(7),), 1, 0, (1,))


def test_columns_are_all_orbits_that_fit() -> None:
    """Under the cyclic group of order 7 triples that cover no pair twice are two orbits (all tried)."""
    action = Action.of(SEVEN.permutations())
    packing = Packing(len(action.lengths), 1)
    trivial = list(stabilisers(action))[-1]
    found = list(columns(action, trivial, 3, packing, Budget(10_000)))
    by_hand = {
        min(tuple(sorted((x + c) % 7 for x in block)) for c in range(7))
        for block in combinations(range(7), 3)
        if len({min((x - y) % 7, (y - x) % 7) for x, y in combinations(block, 2)}) == 3
    }
    canonical = {min(tuple(sorted((x + c) % 7 for x in column.block)) for c in range(7)) for column in found}
    assert canonical == by_hand
    assert len(by_hand) == 2


def test_a_cover_sums_to_the_target_by_both_ways() -> None:
    """Depth-first search and solver each find columns that cover every orbit of pairs exactly twice."""
    action = Action.of(SEVEN.permutations())
    packing = Packing(len(action.lengths), 2)
    trivial = list(stabilisers(action))[-1]
    found = list(columns(action, trivial, 3, packing, Budget(10_000)))
    for chosen in (
        cover(found, packing, Budget(10_000)),
        cover_by_solver(found, packing, effort=1, seconds=20),
    ):
        assert chosen is not None
        assert sum(column.counts for column in chosen) == packing.target


def test_a_cover_that_cannot_be_is_not_found() -> None:
    """Columns that cover a pair an even number of times never sum to an odd λ; the search ends by itself."""
    action = Action.of(SEVEN.permutations())
    packing = Packing(len(action.lengths), 3)
    trivial = list(stabilisers(action))[-1]
    even = [
        c for c in columns(action, trivial, 3, packing, Budget(10_000)) if packing.count(c.counts, 0) == 2
    ]
    budget = Budget(100_000)
    assert cover(even, packing, budget) is None
    assert not budget.spent


@pytest.mark.parametrize(
    ("t", "k", "b", "group"),
    [
        (13, 4, 13, Group((Factor(13),), 1, 0, (3,))),
        (9, 4, 18, Group((Factor(9, True),), 1, 0, (1,))),
        (6, 3, 10, Group((Factor(5),), 1, 1, (1,))),
        (28, 4, 63, Group((Factor(9, True),), 3, 1, (2,))),
    ],
)
def test_the_engine_builds_known_designs(t: int, k: int, b: int, group: Group) -> None:
    """Difference sets, cyclotomy, a point at infinity, mixed differences: all are the same few lines."""
    sizes = conditions(t, b, k).allowed
    assert sizes is not None
    base = base_blocks(sizes, group, LIGHT)
    assert base is not None
    assert block_faults(developed(group, base), sizes) == ()


def test_a_group_without_a_design_gives_none() -> None:
    """No cyclic (16, 6, 2): its difference sets lie in other groups (common knowledge; all columns tried)."""
    sizes = conditions(16, 16, 6).allowed
    assert sizes is not None
    assert base_blocks(sizes, Group((Factor(16),), 1, 0, (1,)), LIGHT) is None
