"""The evaluator against closed forms, a graph library and ordinary least squares."""

from __future__ import annotations

import random
from dataclasses import replace
from itertools import combinations

import networkx as nx
import numpy as np
import pandas as pd
import pytest
import statsmodels.formula.api as smf
from hypothesis import given, settings
from hypothesis import strategies as st

from search.efficiency.aims import weights
from search.efficiency.balance import squared_meetings
from search.efficiency.evaluator import (
    components,
    information_matrix,
    objective,
    pair_variances,
    score,
)
from search.trial.records import Aim, AimKind, Contents, Rules, Trial
from search.trial.tables import incidence
from tests.drawn import tiny_trial
from tests.efficiency.plans import (
    AGAINST_CONTROL,
    FANO,
    OVERALL,
    affine_plane,
    dual,
    equal_trial,
    planted,
    square_lattice,
    trial_of,
)

TRIANGLE: Contents = ((0, 1), (0, 2), (1, 2))


def test_a_tiny_plan_by_hand() -> None:
    """Three blocks of two: E = 3/4, and every difference has variance 2/(r E) = 4/3."""
    found = score(tiny_trial(), TRIANGLE)
    assert found.aim == found.A == pytest.approx(3 / 4)
    assert (found.D, found.worst_pair_efficiency) == pytest.approx((3 / 4, 3 / 4))
    assert found.average_pair_variance == pytest.approx(4 / 3)
    assert found.largest_pair_variance == pytest.approx(4 / 3)
    assert found.residual_df == 6 - 3 - 3 + 1
    assert (found.least_meetings, found.most_meetings) == (1, 1)
    assert found.loss_to_blocks_percent == pytest.approx(25)
    assert found.loss_to_replication_percent == 0
    assert found.balanced


@pytest.mark.parametrize(
    ("contents", "t"), [(FANO, 7), (affine_plane(3), 9), (affine_plane(5), 25), (TRIANGLE, 3)]
)
def test_balanced_plans_have_the_efficiency_of_the_closed_form(contents: Contents, t: int) -> None:
    """E = λ t / (r k) for A, D and the worst pair (Yates 1936)."""
    counts = incidence(contents, t)
    r, k, concurrence = counts[0].sum(), counts[:, 0].sum(), (counts @ counts.T)[0, 1]
    found = score(trial_of(contents, t), contents)
    for value in (found.A, found.D, found.worst_pair_efficiency):
        assert value == pytest.approx(concurrence * t / (r * k), rel=1e-12)
    assert found.balanced


@pytest.mark.parametrize(("k", "r"), [(3, 2), (3, 3), (5, 2), (5, 3), (5, 5), (7, 3)])
def test_square_lattices(k: int, r: int) -> None:
    """E = (k+1)/(k+1+r/(r−1)) for a square lattice of r replicates (Yates 1936; Cheng & Bailey 1991)."""
    trial, contents = square_lattice(k, r)
    found = score(trial, contents).aim
    assert found == pytest.approx((k + 1) / (k + 1 + r / (r - 1)), rel=1e-12)


@pytest.mark.parametrize(("plan", "points"), [(affine_plane(3), 9), (affine_plane(5), 25)])
def test_duals_of_balanced_plans(plan: Contents, points: int) -> None:
    """E = (t−1)/((t−b) + (b−1)/E_dual) for the dual of a balanced plan (linked blocks, Youden 1951)."""
    t, b = len(plan), points
    of_dual = score(trial_of(plan, points), plan).A
    found = score(trial_of(dual(plan, points), t), dual(plan, points)).A
    assert found == pytest.approx((t - 1) / ((t - b) + (b - 1) / of_dual), rel=1e-12)


@pytest.mark.parametrize("t", [3, 4, 7, 20])
def test_a_cycle_of_pairs(t: int) -> None:
    """Unit resistances in a cycle: Σ over pairs = (t³−t)/12 (Klein & Randić 1993); each edge is worth 1/2."""
    contents = tuple(tuple(sorted((i, (i + 1) % t))) for i in range(t))
    variances = pair_variances(contents, t)
    assert variances is not None
    assert np.triu(variances, 1).sum() == pytest.approx(2 * (t**3 - t) / 12)


def test_the_petersen_graph() -> None:
    """Blocks of two along the edges of the Petersen graph: E = 9/19.8 (closed form)."""
    contents = tuple(tuple(sorted(edge)) for edge in nx.petersen_graph().edges)
    found = score(trial_of(contents, 10), contents).aim
    assert found == pytest.approx(9 / 19.8, rel=1e-12)


def test_complete_blocks_lose_nothing() -> None:
    """With every treatment once in every block all efficiencies are 1, and not a hair above."""
    trial = equal_trial(5, 3, 5)
    contents = ((0, 1, 2, 3, 4),) * 3
    found = score(trial, contents)
    assert (found.A, found.D, found.worst_pair_efficiency) == pytest.approx((1, 1, 1), rel=1e-12)
    assert max(found.aim, found.A, found.D, found.worst_pair_efficiency) <= 1
    assert found.loss_to_blocks_percent == pytest.approx(0, abs=1e-10)
    assert found.loss_to_blocks_percent >= 0


@settings(max_examples=40, deadline=None)
@given(planted())
def test_pair_variances_are_resistance_distances(drawn: tuple[Trial, Contents]) -> None:
    """With conductances Σ_B n_iB n_jB / k_B between treatments (networkx, a general graph library)."""
    trial, contents = drawn
    variances = pair_variances(contents, trial.t)
    graph = nx.Graph()
    graph.add_nodes_from(range(trial.t))
    for block in contents:
        for i, j in combinations(block, 2):
            if i != j:
                worth = graph.get_edge_data(i, j, {"weight": 0})["weight"]
                graph.add_edge(i, j, weight=worth + 1 / len(block))
    assert nx.number_connected_components(graph) == components(contents, trial.t)
    if not nx.is_connected(graph):
        assert variances is None
        return
    assert variances is not None
    known = nx.resistance_distance(graph, weight="weight", invert_weight=False)
    for i, j in combinations(range(trial.t), 2):
        assert variances[i, j] == pytest.approx(known[i][j], rel=1e-8)


@settings(max_examples=15, deadline=None)
@given(planted(most_treatments=6), st.integers(0, 99))
def test_pair_variances_are_those_of_least_squares(drawn: tuple[Trial, Contents], seed: int) -> None:
    """The variance of a difference in a fit with treatments and blocks as factors (statsmodels OLS)."""
    trial, contents = drawn
    variances = pair_variances(contents, trial.t)
    if variances is None:
        return
    plots = [(f"b{j}", f"t{i}") for j, block in enumerate(contents) for i in block]
    frame = pd.DataFrame(plots, columns=["block", "treatment"])
    frame["y"] = np.random.default_rng(seed).normal(size=len(frame))
    fit = smf.ols("y ~ C(treatment) + C(block)", frame).fit()
    covariance = fit.normalized_cov_params
    names = [f"C(treatment)[T.t{i}]" for i in range(1, trial.t)]
    of_effects = np.zeros((trial.t, trial.t))
    of_effects[1:, 1:] = covariance.loc[names, names]
    own = np.diag(of_effects)
    assert variances == pytest.approx(own[:, None] + own - 2 * of_effects, rel=1e-8, abs=1e-9)
    assert score(trial, contents).residual_df == fit.df_resid


@settings(max_examples=150, deadline=None)
@given(planted())
def test_efficiencies_lie_between_0_and_1_and_losses_multiply(drawn: tuple[Trial, Contents]) -> None:
    """No efficiency is above 1; what replication and blocks leave multiplies to that for the aim."""
    trial, contents = drawn
    found = score(trial, contents)
    if trial.aim.kind.counts_meetings:  # no efficiency of its own: the losses are those of all pairs
        assert found.aim == squared_meetings(contents, trial.t)
        found = replace(found, aim=found.A)
    efficiencies = (found.aim, found.A, found.D, found.worst_pair_efficiency)
    if not found.connected:
        assert efficiencies == (0, 0, 0, 0)
        assert found.average_pair_variance is None
        assert found.loss_to_blocks_percent == 100
        return
    assert all(0 < efficiency <= 1 for efficiency in efficiencies)
    kept = (1 - found.loss_to_replication_percent / 100) * (1 - found.loss_to_blocks_percent / 100)
    assert kept == pytest.approx(found.aim, rel=1e-9)
    assert found.worst_pair_efficiency <= 1
    assert found.residual_df >= 0


@settings(max_examples=40, deadline=None)
@given(planted(), st.randoms(use_true_random=False))
def test_names_and_order_do_not_matter(drawn: tuple[Trial, Contents], rng: random.Random) -> None:
    """Relabelling treatments and reordering blocks changes no number of the score."""
    trial, contents = drawn
    new = list(range(trial.t))
    rng.shuffle(new)
    order = list(range(trial.b))
    rng.shuffle(order)
    treatments = sorted(range(trial.t), key=new.__getitem__)
    contrasts = tuple(replace(c, of=tuple((new[i], x) for i, x in c.of)) for c in trial.aim.contrasts)
    renamed = replace(
        trial,
        treatments=tuple(trial.treatments[i] for i in treatments),
        blocks=tuple(trial.blocks[j] for j in order),
        rules=Rules(twice_in_block=trial.rules.twice_in_block),
        aim=Aim(trial.aim.kind, contrasts),
    )
    same = replace(trial, rules=renamed.rules)
    moved = tuple(tuple(sorted(new[i] for i in contents[j])) for j in order)
    before, after = score(same, contents), score(renamed, moved)
    for field in before.__slots__:
        value = getattr(before, field)
        wanted = pytest.approx(value, rel=1e-9, abs=1e-9) if isinstance(value, float) else value
        assert getattr(after, field) == wanted


@settings(max_examples=60, deadline=None)
@given(planted())
def test_the_objective_is_the_aim(drawn: tuple[Trial, Contents]) -> None:
    """tr(W C⁺) by eigenvectors, or −log pdet by eigenvalues, is what the score speaks of."""
    trial, contents = drawn
    value = objective(contents, trial)
    if components(contents, trial.t) > 1:
        assert value == float("inf")
        return
    values, vectors = np.linalg.eigh(information_matrix(contents, trial.t))
    matrix = weights(trial)
    if trial.aim.kind is AimKind.OVERALL:
        assert value == pytest.approx(-np.log(values[1:]).sum() / (trial.t - 1), abs=1e-9)
        return
    inverse = (vectors[:, 1:] / values[1:]) @ vectors[:, 1:].T
    told = score(trial, contents).aim_variance
    if trial.aim.kind is AimKind.WORST_PAIR:
        own = np.diag(inverse)
        assert value == pytest.approx((own[:, None] + own - 2 * inverse).max(), rel=1e-9)
        assert told == pytest.approx(value, rel=1e-12)
        return
    mean = np.trace(matrix @ inverse)
    assert told == pytest.approx(mean, rel=1e-9)
    if trial.aim.kind is AimKind.EVEN_MEETINGS:  # whole meetings, and the average below one more
        assert value == pytest.approx(squared_meetings(contents, trial.t) + mean / (1 + mean), rel=1e-9)
    else:
        assert value == pytest.approx(mean, rel=1e-9)


def test_each_aim_has_its_own_efficiency() -> None:
    """`aim` follows the trial's aim, while A and D are always told."""
    contents = ((0, 1, 2), (0, 1, 3), (0, 2, 3), (0, 1, 2))
    trial = trial_of(contents, 4)
    control = replace(trial.treatments[0], control=True)
    trial = replace(trial, treatments=(control, *trial.treatments[1:]))
    pairs = score(trial, contents)
    overall = score(replace(trial, aim=OVERALL), contents)
    against = score(replace(trial, aim=AGAINST_CONTROL), contents)
    assert pairs.aim == pairs.A == overall.A == against.A
    assert overall.aim == overall.D == pairs.D
    assert overall.aim_variance is None
    variances = pair_variances(contents, 4)
    assert variances is not None
    assert against.aim_variance == pytest.approx(variances[0, 1:].mean())
    assert against.aim != pytest.approx(against.A)


def test_a_disconnected_plan_has_no_variances() -> None:
    """Two blocks that share nothing: efficiencies 0, one degree of freedom more for each part."""
    contents = ((0, 1), (2, 3), (0, 1), (2, 3))
    for kind in (AimKind.ALL_PAIRS, AimKind.OVERALL):
        found = score(trial_of(contents, 4, aim=Aim(kind)), contents)
        assert not found.connected
        assert (found.aim, found.A, found.D, found.worst_pair_efficiency) == (0, 0, 0, 0)
        assert found.largest_pair_variance is None
        assert found.residual_df == 8 - 4 - 4 + 2
        assert not found.balanced
        assert found.least_meetings == 0
