"""The permutation groups of the orbit engine."""

from __future__ import annotations

import numpy as np
import pytest

from search.designs.constructions.action import Action, stabilisers
from search.designs.constructions.groups import Factor, Group, groups

GROUPS = [
    Group((Factor(7),), 1, 0, (2,)),
    Group((Factor(9, True),), 1, 1, (2,)),
    Group((Factor(9, True),), 2, 0, (8 + 1,)),  # a power of the primitive element after the Frobenius map
    Group((Factor(7),), 4, 3, (2,), (3,), (3,)),
    Group((Factor(4, True), Factor(3)), 1, 0, (1, 2)),
]


@pytest.mark.parametrize("group", GROUPS)
def test_the_elements_form_a_group(group: Group) -> None:
    """They are as many different permutations as the order says, and products stay among them."""
    elements = group.permutations()
    known = {row.tobytes() for row in elements}
    assert len(known) == len(elements) == group.order
    assert all(sorted(row) == list(range(group.points)) for row in elements.tolist())
    for first in elements[:: max(1, len(elements) // 7)]:
        for second in elements[-3:]:
            assert first[second].tobytes() in known


def test_groups_have_the_points_and_orders_asked_for() -> None:
    """Every group listed acts on v points and its order lies in the range."""
    listed = groups(13, least=10, most=60, most_fixed=1)
    assert listed
    assert all(group.points == 13 and 10 <= group.order <= 60 for group in listed)


def test_cyclic_subgroups_up_to_conjugacy() -> None:
    """The group of order 21 has one class of subgroups of order 7, 3 and 1 each; two generate it all."""
    action = Action.of(GROUPS[0].permutations())
    assert [one.order for one in stabilisers(action)] == [21, 7, 3, 1]
    assert action.lengths.tolist() == [21]


def test_pair_orbits_fill_all_pairs() -> None:
    """The lengths of the orbits on pairs sum to v(v − 1)/2, and every label agrees with every element."""
    action = Action.of(GROUPS[3].permutations())
    assert action.lengths.sum() == 31 * 30 // 2
    for row in action.elements[:5]:
        assert np.array_equal(action.labels[np.ix_(row, row)], action.labels)
