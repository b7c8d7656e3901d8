"""A small search told in words, to be run with the compiler and without."""

from __future__ import annotations

from dataclasses import replace

import numpy as np

from search.solvers.board import board_of, contents_on
from search.solvers.compiled import kernel
from search.solvers.records import Problem
from search.solvers.streams import stream
from search.solvers.walk import Walk
from tests.solvers.problems import FOREVER, in_turn, pairs, plain_tables


def told() -> str:
    """Plans, moves and tables of a few calls of every entry point of the kernel."""
    sizes = [3, 3, 2, 2, 2]
    table = plain_tables(5, sizes, plots=(2, 3))
    table.apart[0, 1] = table.apart[1, 0] = True
    table = replace(table, meet_most=np.where(table.apart, 0, 2))
    start = ((0, 2, 3), (1, 2, 4), (0, 3), (1, 4), (2, 3))
    lines = []
    for weights in (pairs(5), None):
        problem = Problem(table, weights)
        board, random = board_of(problem, start), stream(7, 1)
        for tries, join in ((40, False), (200, True)):
            made, parts = kernel().wander(board.plain, random, tries, join)
            lines.append(f"{made} {parts} {contents_on(board)}")
        walk = Walk(problem, contents_on(board), random, FOREVER)
        accepted = walk.cool(0.2, 0.01, 300)
        walk.descend(200)
        lines.append(
            f"{accepted} {walk.moves} {walk.contents} {np.abs(walk.board.metrics.inverse).sum():.9f}"
        )
    problem = Problem(plain_tables(4, [3, 3, 2], plots=(1, 3)), pairs(4))
    walk = Walk(problem, in_turn(4, [3, 3, 2]), stream(1, 1), FOREVER)
    plot, partner = walk.best_move(np.inf) or (-1, -1)
    lines.append(f"{plot} {partner}")
    return "\n".join(lines)


if __name__ == "__main__":
    with np.errstate(over="ignore"):  # the random numbers wrap round on purpose
        print(told())
