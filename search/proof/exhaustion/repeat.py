"""Is a proof by exhaustion true? Every graph is listed again, and each that would be better refuted again."""

from __future__ import annotations

from collections import Counter
from fractions import Fraction
from itertools import combinations
from math import comb, isqrt

import numpy as np

from search.foundation.cpsat import Answer, solve
from search.foundation.errors import Undecided
from search.proof.certificates.case import Case
from search.proof.certificates.exhaustion import Listing
from search.proof.exhaustion.classes import Graph, classes
from search.proof.integers import Whole, adjugate, is_positive_semidefinite
from search.proof.records import Finding, Refuted
from search.trial.records import AimKind

SECONDS, MOST_LINES = 600.0, 20_000
"""For each question to the solver: wall time of each of its two calls, and lines that it is offered."""


def repeated(case: Case, listing: Listing) -> Finding:
    """List the graphs of the first level again, and refute again those with more worth than is claimed.

    The worth of a graph is `−Σ 1/(1 − x)`, for the overall aim `Π (1 − x)`, over the t − 1 eigenvalues rk·x
    of NN' that a plan decides.

    Raises
    ------
    Refuted : a count differs, or a plan exists that would be better
    Undecided : it takes too long to repeat
    """
    graphs = classes(listing.side.members, listing.side.d)
    if len(graphs) != listing.graphs:
        raise Refuted(f"{listing.graphs:,} graphs are claimed to be listed, but there are {len(graphs):,}")
    better = []
    for graph in graphs:
        meetings = _meetings(listing, graph)
        worth = _worth(case, listing, meetings)
        if worth is not None and worth > listing.worth:
            better.append(meetings)
    if len(better) != listing.better:
        raise Refuted(f"{listing.better:,} graphs are claimed to be better, but {len(better):,} are")
    if listing.by_literature:
        return Finding(
            "exhaustion",
            True,
            f"the listing is repeated; no plan is balanced by the literature alone ({listing.because})",
            on_trust=True,
        )
    fates = Counter(_fate(listing, meetings) for meetings in better)
    if fates["counting"] != listing.by_counting:
        raise Refuted(
            f"counting is claimed to refute {listing.by_counting:,} graphs, but refutes {fates['counting']:,}"
        )
    return Finding(
        "exhaustion",
        True,
        f"repeated: {len(graphs):,} graphs listed again, {len(better):,} better ones refuted again "
        f"({fates['counting']:,} by counting, {fates['solver']:,} by the solver)",
    )


def _meetings(listing: Listing, graph: Graph) -> Whole:
    """NN' or N'N: lines through a member on the diagonal, and how many lines two members share."""
    side = listing.side
    meetings = graph.astype(np.int64).astype(object) + side.base
    for i in range(side.members):
        meetings[i, i] = side.lines
    return meetings


def _worth(case: Case, listing: Listing, meetings: Whole) -> Fraction | None:
    """The worth of a plan with these meetings; None where it falls apart."""
    side = listing.side
    if not _is_connected(meetings):
        return None
    rk, v = side.lines * side.points, side.members
    information = rk * np.eye(v, dtype=int).astype(object) - meetings + 1
    inverse, determinant = adjugate(information)
    if case.aim is AimKind.OVERALL:
        return Fraction(determinant, v * rk ** (v - 1))
    total = Fraction(rk * int(inverse.trace()), determinant) - Fraction(rk, v)
    return -(total + listing.numbers.t - v)


def _is_connected(meetings: Whole) -> bool:
    reached, waiting = {0}, [0]
    while waiting:
        row = meetings[waiting.pop()]
        new = {j for j, shared in enumerate(row) if shared and j not in reached}
        reached |= new
        waiting += new
    return len(reached) == len(meetings)


def _fate(listing: Listing, meetings: Whole) -> str:
    """How meetings are refuted.

    Raises
    ------
    Refuted : a plan has them
    Undecided : the solver does not know
    """
    if _cannot_be(listing, meetings):
        return "counting"
    if _has_no_lines(listing, meetings):
        return "solver"
    raise Refuted("there is a plan that is better than what is claimed to be the best")


def _cannot_be(listing: Listing, meetings: Whole) -> bool:
    """Whether NN' has an eigenvalue below 0, or no square for a determinant where N is square, or N'N a part
    of a triangle or of a square of edges."""
    if not is_positive_semidefinite(meetings):
        return True
    side, other = listing.side, listing.other
    if side.members == other.members:
        determinant = _determinant(meetings)
        if isqrt(determinant) ** 2 != determinant:
            return True
    if not listing.both_even:
        return False
    # N'N = (other.lines − base) I + base J + M for a graph M of degree d: traces of M³ and M⁴
    shift, rk = other.lines - other.base, side.lines * side.points
    square = meetings.dot(meetings)
    traces = [
        int(meetings.trace()) - rk,
        int(square.trace()) - rk**2,
        int((square * meetings).sum()) - rk**3,
        int((square * square).sum()) - rk**4,
    ]
    one, two, three, four = traces
    rest = other.members - 1
    third = other.d**3 + three - 3 * shift * two + 3 * shift**2 * one - shift**3 * rest
    fourth = other.d**4 + four - 4 * shift * three + 6 * shift**2 * two - 4 * shift**3 * one + shift**4 * rest
    back_and_forth = other.members * other.d * (2 * other.d - 1)
    return third < 0 or third % 6 > 0 or fourth < back_and_forth or (fourth - back_and_forth) % 8 > 0


def _determinant(matrix: Whole) -> int:
    """Of a positive semidefinite matrix, by exact elimination; a pivot of 0 ends it."""
    rest, before = matrix.copy(), 1
    while len(rest) > 1:
        pivot, row = rest[0, 0], rest[0, 1:]
        if pivot == 0:
            return 0
        rest = (rest[1:, 1:] * pivot - np.multiply.outer(row, row)) // before
        before = pivot
    return int(rest[0, 0])


def _has_no_lines(listing: Listing, meetings: Whole) -> bool:
    """Whether the solver finds that no choice of lines gives these meetings."""
    from ortools.sat.python import cp_model

    side = listing.side
    if comb(side.members, side.points) > MOST_LINES:
        raise Undecided("there are too many possible lines to ask the solver again")
    model = cp_model.CpModel()
    lines = [
        (line, model.new_int_var(0, side.lines, ""))
        for line in combinations(range(side.members), side.points)
    ]
    for i in range(side.members):
        for j in range(i, side.members):
            model.add(sum(times for line, times in lines if i in line and j in line) == int(meetings[i, j]))
    answer = solve(model, [], seconds=SECONDS, seed=7).answer
    if answer is Answer.UNKNOWN:
        raise Undecided("the solver did not decide again about a graph that would be better than the plan")
    return answer is Answer.INFEASIBLE
