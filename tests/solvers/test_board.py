"""The board: its tables give variances, and a plan is laid out and read back unchanged."""

from __future__ import annotations

import networkx as nx
import numpy as np
import pytest

from search.efficiency.evaluator import pair_variances
from search.solvers.board import board_of, contents_on, objective, refresh
from search.solvers.records import Problem
from search.trial.records import Contents
from tests.drawn import tiny_trial
from tests.solvers.problems import in_turn, pairs, plain, plain_tables, problem_of

UNEVEN = in_turn(5, [4, 3, 3, 2])


def uneven() -> Problem:
    """Five treatments in blocks of 4, 3, 3 and 2."""
    return Problem(plain_tables(5, [4, 3, 3, 2]), pairs(5))


def test_the_tiny_trial_by_hand() -> None:
    """The triangle has v = 2/(3 · ½) = 4/3 for every pair: E = 3/4 of r = 2 without blocks."""
    problem = problem_of(tiny_trial())
    assert objective(problem, ((0, 1), (0, 2), (1, 2))) == pytest.approx(4 / 3, abs=1e-12)


def test_the_inverse_gives_variances() -> None:
    """They agree with the evaluator, and with resistance distances of a general graph library."""
    board = board_of(uneven(), UNEVEN)
    refresh(uneven(), board)
    inverse = board.metrics.inverse[:, :5]
    own = np.diag(inverse)
    mine = own[:, None] + own[None, :] - 2 * inverse
    np.testing.assert_allclose(mine, pair_variances(UNEVEN, 5), atol=1e-12)
    graph = nx.Graph()
    for block in UNEVEN:
        for i in block:
            for j in block:
                if i < j:
                    weight = graph.get_edge_data(i, j, {"weight": 0})["weight"]
                    graph.add_edge(i, j, weight=weight + 1 / len(block))
    # resistances: networkx takes weights as conductances when told not to invert them
    resistance = nx.resistance_distance(graph, weight="weight", invert_weight=False)
    expected = [[resistance[i][j] for j in range(5)] for i in range(5)]
    np.testing.assert_allclose(mine, expected, atol=1e-9)


@pytest.mark.parametrize("contents", [UNEVEN, ((0, 0, 1, 4), (1, 2, 3), (0, 2, 4), (3, 3))])
def test_a_plan_is_read_back_as_it_was_laid_out(contents: Contents) -> None:
    """With repeats and without, contents survive the board."""
    problem = Problem(plain_tables(5, [4, 3, 3, 2], plots=(1, 4), twice=True), None)
    assert contents_on(board_of(problem, contents)) == contents


def test_blocks_of_a_replicate_lie_side_by_side() -> None:
    """Plots may be exchanged within a replicate or outside all of them, never across."""
    problem = problem_of(
        tiny_trial(
            treatments=["A", "B", "C", "D"],
            blocks={"a": 2, "x": 3, "b": 2, "y": 3},
            rules={"replicates": {"one": ["a", "b"]}},
        )
    )
    board = board_of(problem, ((0, 1), (0, 1, 2), (2, 3), (1, 2, 3)))
    assert board.beds.home.tolist() == [1, 1, 1, 3, 3, 3, 0, 0, 2, 2]
    pools = [(int(b[2]), int(b[3])) for b in board.beds.blocks]
    assert pools == [(6, 4), (0, 6), (6, 4), (0, 6)]


def test_a_disconnected_plan_has_no_finite_objective() -> None:
    """Two parts that never meet leave differences that cannot be estimated."""
    problem, _ = plain(4, 2, 2)
    assert objective(problem, ((0, 1), (2, 3))) == np.inf
    assert objective(Problem(problem.tables, None), ((0, 1), (2, 3))) == np.inf
