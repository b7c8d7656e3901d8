"""Is there a plan with given meetings? Quick counts first, then the solver, whose plans are handed back.

Members stand for treatments and lines for blocks, or the other way round.
"""

from __future__ import annotations

from dataclasses import dataclass
from enum import Enum
from itertools import combinations
from math import comb, isqrt
from typing import TYPE_CHECKING

import numpy as np

from search.efficiency.bounds.spectral.side import Half
from search.efficiency.exhaustion.worth import Meetings, determinant
from search.foundation.cpsat import Answer, solve
from search.foundation.stopping import Stop

if TYPE_CHECKING:
    from ortools.sat.python.cp_model import IntVar

MOST_LINES = 13_000
"""So many different lines are offered to the solver."""
CLEARLY_BELOW = -1e-6
"""An eigenvalue of whole-number meetings in floats: far more than rounding can make."""

Lines = tuple[tuple[int, ...], ...]


class By(Enum):
    """What became of meetings that would be better than the plan."""

    COUNTING = "counting"
    SOLVER = "solver"
    LITERATURE = "literature"
    REALISED = "realised"
    OPEN = "open"


@dataclass(frozen=True, slots=True)
class Realised:
    """What became of them, and the lines of a plan where there is one."""

    by: By
    lines: Lines = ()


@dataclass(frozen=True, slots=True)
class Effort:
    """How hard the solver tries.

    Parameters
    ----------
    seconds : wall time of each of its two calls
    work : its own count of work in each of them
    """

    seconds: float
    work: float


def realised(
    meetings: Meetings, half: Half, other: Half, both_even: bool, effort: Effort, stop: Stop | None
) -> Realised:
    """Look for lines with given meetings.

    Parameters
    ----------
    meetings : lines through a member on the diagonal, lines that two members share beside it
    half, other : the side of the members, and that of the lines
    both_even : whether the overlaps of lines are as even as can be too
    effort, stop : limits of the solver
    """
    if refuted_by_counting(meetings, half, other, both_even):
        return Realised(By.COUNTING)
    return _solved(meetings, half, other, both_even, effort, stop)


def refuted_by_counting(meetings: Meetings, half: Half, other: Half, both_even: bool) -> bool:
    """Whether `NN'` cannot be these meetings for a reason that is seen at once.

    NN' has no eigenvalue below 0; `det NN'` is a square where N is; and where the overlaps of lines are even
    too, N'N shows a graph of which the traces of powers of NN' count the triangles and the squares: whole
    numbers from 0 on.
    """
    if float(np.linalg.eigvalsh(meetings.astype(float))[0]) < CLEARLY_BELOW:
        return True
    if half.size == other.size:
        product = determinant(meetings)
        if product < 0 or isqrt(product) ** 2 != product:
            return True
    if not both_even:
        return False
    powers = [meetings.astype(object)]
    for _ in range(3):
        powers.append(powers[-1].dot(powers[0]))
    # Σ μ^j over the eigenvalues of N'N but that of the ones, then of μ − a, those of its graph
    traces = [other.size - 1] + [
        int(power.trace()) - (half.own * half.line) ** j for j, power in enumerate(powers, 1)
    ]
    a, d = other.own - other.base, other.degree
    third, fourth = (
        d**j + sum(comb(j, i) * traces[i] * (-a) ** (j - i) for i in range(j + 1)) for j in (3, 4)
    )
    triangles, squares = divmod(third, 6), divmod(fourth - other.size * d * (2 * d - 1), 8)
    return any(count < 0 or rest for count, rest in (triangles, squares))


def _solved(
    meetings: Meetings, half: Half, other: Half, both_even: bool, effort: Effort, stop: Stop | None
) -> Realised:
    """Ask the solver how often each possible line stands.

    Lines with more than half of all members are replaced by the members that they leave out: two of these
    share `lines − 2 own + meetings` lines.
    """
    members, lines, own, size = half.size, other.size, half.own, half.line
    inverted = 2 * size > members
    wanted = meetings + (lines - 2 * own) if inverted else meetings
    if inverted:
        own, size = lines - own, members - size
    if comb(members, size) > MOST_LINES:
        return Realised(By.OPEN)
    from ortools.sat.python import cp_model

    model = cp_model.CpModel()
    choice: list[tuple[tuple[int, ...], IntVar]] = []
    shared: dict[tuple[int, ...], list[IntVar]] = {pair: [] for pair in combinations(range(members), 2)}
    through: list[list[IntVar]] = [[] for _ in range(members)]
    # where overlaps are even, no line stands twice unless it may be its own overlap
    once = both_even and other.own > other.base + 1
    for line in combinations(range(members), size):
        pairs = list(combinations(line, 2))
        most = min([own, *(int(wanted[pair]) for pair in pairs)])
        if most == 0:
            continue
        times = model.new_int_var(0, 1 if once else most, "")
        choice.append((line, times))
        for pair in pairs:
            shared[pair].append(times)
        for member in line:
            through[member].append(times)
    for two, found in shared.items():
        model.add(sum(found) == int(wanted[two]))
    for found in through:
        model.add(sum(found) == own)
    solved = solve(
        model, [times for _, times in choice], seconds=effort.seconds, effort=effort.work, stop=stop
    )
    if solved.answer is Answer.INFEASIBLE:
        return Realised(By.SOLVER)
    if solved.answer is Answer.UNKNOWN:
        return Realised(By.OPEN)
    standing = [line for (line, _), times in zip(choice, solved.values, strict=True) for _ in range(times)]
    everyone = set(range(members))
    return Realised(
        By.REALISED,
        tuple(tuple(sorted(everyone - set(line))) if inverted else line for line in standing),
    )
