"""Information matrices and variances: closed forms, exact against enclosed, and a general library."""

from __future__ import annotations

from fractions import Fraction
from itertools import combinations, pairwise

import networkx as nx
import numpy as np
import pytest

from search.proof import aims, variances
from search.proof.information import information
from search.proof.records import Refuted
from search.trial.records import Contents
from tests.proof.plans import fano_contents
from tests.proof.plans import information as plain_information


def random_plan(t: int, replicates: int, seed: int, sizes: tuple[int, ...] = (5, 6, 7)) -> Contents:
    """Replicates cut at random into blocks of uneven sizes."""
    random = np.random.default_rng(seed)
    blocks = []
    for _ in range(replicates):
        order = random.permutation(t).tolist()
        while order:
            size = int(random.choice(sizes))
            blocks.append(tuple(sorted(order[:size])))
            order = order[size:]
    return tuple(blocks)


def test_information_of_unequal_blocks_by_hand() -> None:
    """Two blocks AB and ABC: C = R − N K⁻¹ N' times 6."""
    plan = information(((0, 1), (0, 1, 2)), 3)
    assert plan.scale == 6
    assert plan.scaled.tolist() == [[7, -5, -2], [-5, 7, -2], [-2, -2, 4]]
    assert plan.components == 1


def test_information_counts_what_stands_twice() -> None:
    """Block AAB: c_AA = 2 − 4/3, c_AB = −2/3."""
    plan = information(((0, 0, 1),), 2)
    assert [[Fraction(int(x), plan.scale) for x in row] for row in plan.scaled] == [
        [Fraction(2, 3), Fraction(-2, 3)],
        [Fraction(-2, 3), Fraction(2, 3)],
    ]


def test_components_are_counted() -> None:
    """Blocks AB, CD join A to B and C to D, and E stands alone."""
    assert information(((0, 1), (2, 3), (4,)), 5).components == 3


def test_balanced_design_by_closed_form() -> None:
    """With (t,k,r,λ) = (7,3,3,1) every pair has the variance 2k/(λt) = 6/7 (Yates 1936)."""
    plan = information(fano_contents(), 7)
    found = variances.exactly(plan)
    assert plan.completely_symmetric
    assert aims.average_pair_variance(found).low == Fraction(6, 7)
    assert aims.largest_pair_variance(found).high == Fraction(6, 7)
    assert found.determinant.low == Fraction(7, 3) ** 6


def test_cycle_by_closed_form() -> None:
    """For k = 2 a cycle of t: Σ of pair resistances is (t³−t)/12 (Klein & Randić 1993), here 2 per edge."""
    t = 9
    found = variances.exactly(information(tuple((i, (i + 1) % t) for i in range(t)), t))
    pairs = t * (t - 1) // 2
    assert aims.average_pair_variance(found).low * pairs == 2 * Fraction(t**3 - t, 12)


def test_variances_are_resistances() -> None:
    """Pair variances are the resistance distances of a general graph library."""
    t, contents = 8, random_plan(8, 3, 5, sizes=(3, 4))
    graph = nx.Graph()
    for i, j in combinations(range(t), 2):
        weight = sum(1 / len(block) for block in contents if i in block and j in block)
        if weight:
            graph.add_edge(i, j, weight=weight)
    found = variances.exactly(information(contents, t))
    for i, j in combinations(range(t), 2):
        G = found.matrix
        exact = found.enclosing(int(G[i, i] + G[j, j] - 2 * G[i, j])).low
        resistance = nx.resistance_distance(graph, i, j, weight="weight", invert_weight=False)
        assert float(exact) == pytest.approx(resistance, rel=1e-9)


@pytest.mark.parametrize("t", [8, 24, 40])
def test_enclosures_hold_the_exact_values(t: int) -> None:
    """An enclosure holds the exact value and is no wider than one part in 10^11."""
    plan = information(random_plan(t, 3, t), t)
    exact, enclosed = variances.exactly(plan), variances.enclosed(plan)
    pairs = [
        (aims.average_pair_variance(exact), aims.average_pair_variance(enclosed)),
        (aims.largest_pair_variance(exact), aims.largest_pair_variance(enclosed)),
        (exact.determinant, enclosed.determinant),
    ]
    for true, around in pairs:
        assert around.low <= true.low == true.high <= around.high
        assert around.high - around.low < true.low / 10**11


def test_enclosure_of_a_long_thin_plan() -> None:
    """A path of 300 blocks of two is enclosed too: the ends differ by 2 · 300 (resistances in series)."""
    t = 301
    around = aims.largest_pair_variance(variances.enclosed(information(tuple(pairwise(range(t))), t)))
    assert around.low <= 600 <= around.high
    assert around.high - around.low < Fraction(600, 10**10)


def test_enclosure_needs_no_luck_with_scales() -> None:
    """Blocks of 2 to 23 plots have a common multiple of ten digits; the enclosure is as narrow as ever."""
    t = 30
    random = np.random.default_rng(1)
    contents = tuple(tuple(sorted(random.permutation(t)[:k].tolist())) for k in range(2, 24))
    plan = information(contents, t)
    around = aims.average_pair_variance(variances.enclosed(plan))
    true = aims.average_pair_variance(variances.exactly(plan)).low
    assert around.low <= true <= around.high
    assert around.high - around.low < true / 10**11


def test_plain_route_agrees() -> None:
    """The exact average is that of a floating-point pseudo-inverse."""
    contents = random_plan(12, 4, 3, sizes=(4, 5))
    exact = aims.average_pair_variance(variances.exactly(information(contents, 12))).low
    plain = 2 * np.trace(np.linalg.pinv(plain_information(contents, 12))) / 11
    assert float(exact) == pytest.approx(plain, rel=1e-10)


def test_says_where_its_reach_ends() -> None:
    """More treatments than memory allows are refused in words."""
    path = information(tuple(pairwise(range(1502))), 1502)
    with pytest.raises(Refuted, match="beyond this proof"):
        variances.variances(path)


@pytest.mark.slow
@pytest.mark.parametrize("t", [200, 400])
def test_large_plans_are_enclosed(t: int) -> None:
    """Plans of 200 and 400 treatments are enclosed to 12 digits."""
    around = aims.average_pair_variance(variances.variances(information(random_plan(t, 4, t), t)))
    assert around.high - around.low < around.low / 10**12


@pytest.mark.slow
def test_exact_where_it_is_promised() -> None:
    """At the limit of exact arithmetic the enclosure still holds the exact value."""
    t = variances.EXACT_UP_TO
    plan = information(random_plan(t, 4, 1), t)
    exact, enclosed = variances.variances(plan), variances.enclosed(plan)
    assert exact.exact
    true, around = aims.average_pair_variance(exact), aims.average_pair_variance(enclosed)
    assert around.low <= true.low <= around.high
