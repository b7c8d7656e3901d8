"""Even meetings and worst pair: values from outside the project, and bounds that are met by known plans."""

from __future__ import annotations

from dataclasses import replace
from fractions import Fraction
from itertools import combinations

import networkx
import numpy as np
import pytest
from hypothesis import given, settings

from search.efficiency.balance import squared_meetings
from search.efficiency.bounds import all_bounds, best_bound
from search.efficiency.bounds.worst_pair import shorted
from search.efficiency.comparing import beats, gap_percent, is_tighter, merit
from search.efficiency.evaluator import score
from search.trial.limits import limits
from search.trial.records import Aim, AimKind, Contents, Rules, Trial
from tests.efficiency.bounds.test_registry import BALANCED
from tests.efficiency.plans import affine_plane, dual, equal_trial, planted, square_lattice, trial_of

EVEN, WORST = Aim(AimKind.EVEN_MEETINGS), Aim(AimKind.WORST_PAIR)
PETERSEN: Contents = tuple(
    sorted(
        tuple(sorted(edge))
        for edge in networkx.convert_node_labels_to_integers(networkx.petersen_graph()).edges
    )
)
"""The fifteen edges of the Petersen graph as blocks of two; networkx (general library)."""


@pytest.mark.parametrize(("t", "k", "r", "b"), BALANCED)
def test_balanced_designs_meet_both_bounds(t: int, k: int, r: int, b: int) -> None:
    """λ = r(k−1)/(t−1) for every pair, so Σλ² = λ² t(t−1)/2; and the worst pair is like any (Yates 1936)."""
    meetings = Fraction(r * (k - 1), t - 1)
    even = best_bound(equal_trial(t, b, k, EVEN), limits(equal_trial(t, b, k)))
    assert even is not None
    assert even.exact == meetings**2 * t * (t - 1) / 2
    worst = best_bound(equal_trial(t, b, k, WORST), limits(equal_trial(t, b, k)))
    assert worst is not None
    assert worst.value == pytest.approx(float(meetings * t / (r * k)), rel=1e-12)


@pytest.mark.parametrize(
    ("t", "b", "k"), [(12, 15, 4), (9, 18, 2), (24, 18, 4), (30, 30, 5), (10, 10, 3), (17, 51, 3)]
)
def test_regular_graph_designs_are_as_even_as_can_be(t: int, b: int, k: int) -> None:
    """Pairs meet l or l + 1 times, d of them l + 1 times, r(k−1) = l(t−1) + d (John & Mitchell 1977)."""
    r = b * k // t
    low, degree = divmod(r * (k - 1), t - 1)
    expected = t * ((t - 1 - degree) * low**2 + degree * (low + 1) ** 2) // 2
    trial = equal_trial(t, b, k, EVEN)
    bounds = {bound.argument: bound for bound in all_bounds(trial, limits(trial))}
    assert bounds["even meetings by pairs"].exact == expected


@pytest.mark.parametrize(("plan", "points"), [(affine_plane(3), 9), (affine_plane(5), 25)])
def test_linked_blocks_are_as_even_as_can_be(plan: Contents, points: int) -> None:
    """In the dual of a balanced plan any two blocks share as many treatments (Youden 1951): it is best."""
    t = len(plan)
    contents = dual(plan, points)
    trial = trial_of(contents, t, aim=EVEN)
    bounds = {bound.argument: bound for bound in all_bounds(trial, limits(trial))}
    assert bounds["even meetings by block meets"].exact == squared_meetings(contents, t)


@pytest.mark.parametrize(("k", "r"), [(3, 2), (3, 3), (5, 2), (5, 4)])
def test_square_lattices_are_as_even_as_can_be(k: int, r: int) -> None:
    """Lines of two replicates meet once: pairs meet once or never, r k²(k−1)/2 of them once (Yates 1936)."""
    trial, contents = square_lattice(k, r)
    trial = replace(trial, aim=EVEN)
    bound = best_bound(trial, limits(trial))
    assert bound is not None
    assert bound.exact == squared_meetings(contents, trial.t) == r * k * k * (k - 1) // 2


def test_the_petersen_graph() -> None:
    """Its resistances are 3/5 along edges and 4/5 else (closed form; Klein & Randić 1993, from memory).

    A block of two is a conductance of a half, so the largest variance is 8/5 against 2/3 without blocks.
    """
    graph = networkx.petersen_graph()
    assert max(networkx.resistance_distance(graph, i, j) for i, j in combinations(graph, 2)) == pytest.approx(
        4 / 5
    )
    worst = score(equal_trial(10, 15, 2, WORST), PETERSEN)
    assert worst.largest_pair_variance == pytest.approx(8 / 5)
    assert worst.aim == pytest.approx((2 / 3) / (8 / 5))
    assert worst.aim_variance == worst.largest_pair_variance
    assert score(equal_trial(10, 15, 2, EVEN), PETERSEN).aim == 15


@settings(max_examples=40, deadline=None)
@given(planted())
def test_the_largest_variance_is_the_largest_resistance(drawn: tuple[Trial, Contents]) -> None:
    """With weights Σ_B n_iB n_jB / k_B, by networkx (general library)."""
    trial, contents = drawn
    found = score(replace(trial, aim=WORST), contents)
    graph = networkx.Graph()
    graph.add_nodes_from(range(trial.t))
    for block in contents:
        for i, j in combinations(block, 2):
            if i != j:
                held = graph.get_edge_data(i, j, {"weight": 0})["weight"]
                graph.add_edge(i, j, weight=held + 1 / len(block))
    if not networkx.is_connected(graph):
        assert (found.aim, found.aim_variance) == (0, None)
        return
    resistances = networkx.resistance_distance(graph, weight="weight", invert_weight=False)
    assert found.largest_pair_variance == pytest.approx(
        max(max(row.values()) for row in resistances.values())
    )
    assert found.aim == pytest.approx(found.worst_pair_efficiency)


@settings(max_examples=60, deadline=None)
@given(planted())
def test_meetings_are_counted_plot_by_plot(drawn: tuple[Trial, Contents]) -> None:
    """A block that holds i twice and j once is two meetings of the pair; i does not meet itself."""
    trial, contents = drawn
    total = 0
    for i, j in combinations(range(trial.t), 2):
        total += sum(block.count(i) * block.count(j) for block in contents) ** 2
    found = score(replace(trial, aim=EVEN), contents)
    assert found.aim == total
    assert isinstance(found.aim, int)


@settings(max_examples=40, deadline=None)
@given(planted())
def test_joining_all_others_never_raises_a_variance(drawn: tuple[Trial, Contents]) -> None:
    """The shorted pair is below the true variance of every pair of every plan, whatever its blocks."""
    trial, contents = drawn
    if trial.rules.twice_in_block or not score(trial, contents).connected:
        return
    t = trial.t
    held = np.zeros((t, t))
    for block in contents:
        for i, j in combinations(block, 2):
            held[i, j] += 1 / len(block)
            held[j, i] += 1 / len(block)
    own = held.sum(axis=1)
    inverse = np.linalg.pinv(np.diag(own) - held)
    for i, j in combinations(range(t), 2):
        least = shorted(*(Fraction(float(x)) for x in (own[i], own[j], held[i, j])))
        assert float(least) <= inverse[i, i] + inverse[j, j] - 2 * inverse[i, j] + 1e-9


def test_a_pair_kept_apart_bounds_the_worst_pair() -> None:
    """T0 and T1 have three plots each in blocks of four and never meet: 1/(9/4) + 1/(9/4) = 8/9 at least."""
    trial = replace(equal_trial(8, 6, 4, WORST), rules=Rules(never_share_block=((0, 1),)))
    bound = next(x for x in all_bounds(trial, limits(trial)) if x.argument == "shorted pair")
    assert bound.exact == pytest.approx(Fraction(2, 3) / Fraction(8, 9))


def test_fewer_meetings_connected_and_more_precise() -> None:
    """Connected plans come first, then the lower sum, then the smaller variance; others have one number."""
    aim = AimKind.EVEN_MEETINGS
    ranked = [merit(aim, 30, 0.5), merit(aim, 30, 0.6), merit(aim, 31, 0.4), merit(aim, 20, None)]
    for one, other in combinations(ranked, 2):
        assert beats(one, other)
        assert not beats(other, one)
    assert not beats(merit(aim, 30, 0.5), merit(aim, 30, 0.5 + 1e-14))
    assert beats(merit(AimKind.WORST_PAIR, 0.8, 1.0), merit(AimKind.WORST_PAIR, 0.7, 0.9))
    assert is_tighter(aim, 21, 20)
    assert is_tighter(AimKind.ALL_PAIRS, 0.7, 0.8)
    assert gap_percent(aim, 22, 20) == pytest.approx(10)
    assert gap_percent(AimKind.WORST_PAIR, 0.7, 0.8) == pytest.approx(12.5)
