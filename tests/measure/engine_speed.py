"""How fast is the engine? The table of `results/engine_speed.md`, made in one run.

    python -m tests.measure.engine_speed FILE [FOLDER_OF_THE_FIRST_VERSION]

Ratios are those of times taken in turn, median of seven, on one thread of the processor. With the folder of a
checkout of the first version (commit ef3af9e) annealing is compared with it: both cool from the same
temperature to a tenth of it over the same number of scored moves.
"""

from __future__ import annotations

import os
import subprocess
import sys
import tempfile
import time
from collections.abc import Iterator
from contextlib import ExitStack
from pathlib import Path
from statistics import median

import numpy as np

REPEATS = 7
ANNEALED = {(12, 15, 4): 3.0e-4, (30, 30, 5): 8.7e-5, (24, 24, 6): 1.1e-4, (200, 100, 6): 1.2e-5}
"""Treatments, blocks, plots of a block; and a temperature at which one move in t + b climbs."""
GROWTH = (50, 100, 200, 500, 1000, 2000, 5000)
"""Treatments in blocks of ten, three plots each, on the side of the treatments."""

CHILD = """
import sys, time
from search.solvers.anneal import scrambled
from search.solvers.compiled import kernel
from search.solvers.streams import stream
from search.solvers.walk import NOTHING, Walk
from tests.solvers.problems import FOREVER, plain
try:
    from search.solvers.sides import other_side
    from search.trial.tables import turned
except ImportError:
    other_side = lambda problem: None
for line in sys.stdin:
    t, b, k, hot, seed = line.split()
    t, b, k, hot, seed = int(t), int(b), int(k), float(hot), int(seed)
    problem, start = plain(t, b, k)
    side = other_side(problem)
    if side is not None:
        problem, start = side.problem, turned(start, t)
    random = stream(seed, 0)
    walk = Walk(problem, scrambled(problem, start, random, FOREVER), random, FOREVER)
    moves, plain_board = 10 * (b * k) ** 2, walk.board.plain
    began = time.thread_time()
    scored, _, accepted, _ = kernel().anneal(
        plain_board, random, hot, 0.1 ** (1 / moves), moves, 50 * moves, moves, NOTHING
    )
    whole = time.thread_time() - began
    began = time.thread_time()
    refused, *_ = kernel().anneal(plain_board, random, -float("inf"), 1.0, moves, 50 * moves, 1, NOTHING)
    cold = time.thread_time() - began
    print(scored / whole, refused / cold, accepted / scored, flush=True)
"""


class Version:
    """A process that anneals with the source in one folder, when asked to."""

    def __init__(self, folder: Path, cache: str) -> None:
        environment = {**os.environ, "PYTHONPATH": str(folder), "NUMBA_CACHE_DIR": cache}
        self._process = subprocess.Popen(
            [sys.executable, "-c", CHILD],
            stdin=subprocess.PIPE,
            stdout=subprocess.PIPE,
            env=environment,
            cwd=folder,
            text=True,
        )

    def __enter__(self) -> Version:
        return self

    def __exit__(self, *_: object) -> None:
        self._process.communicate()

    def annealed(self, size: tuple[int, int, int], hot: float, seed: int) -> tuple[float, float, float]:
        """Scored moves a second of a whole cooling and where none is accepted, and the part accepted."""
        assert self._process.stdin is not None
        assert self._process.stdout is not None
        print(*size, hot, seed, file=self._process.stdin, flush=True)
        whole, cold, accepted = (float(x) for x in self._process.stdout.readline().split())
        return whole, cold, accepted


def annealing(first: Path | None) -> Iterator[str]:
    """Rows of the table of annealing."""
    with ExitStack() as stack:
        folders = [Path.cwd(), *([first] if first else [])]
        caches = [stack.enter_context(tempfile.TemporaryDirectory()) for _ in folders]
        versions = [
            stack.enter_context(Version(folder, cache)) for folder, cache in zip(folders, caches, strict=True)
        ]
        for size, hot in ANNEALED.items():
            runs = [[v.annealed(size, hot, seed) for v in versions] for seed in range(REPEATS)]
            speeds = [median(run[0][i] for run in runs) for i in range(3)]
            row = f"| {size} | {speeds[0] / 1e6:.1f} | {speeds[1] / 1e6:.1f} | {speeds[2]:.2%} |"
            if first:
                ratios = [median(run[0][i] / run[1][i] for run in runs) for i in range(2)]
                row += f" {ratios[0]:.1f} | {ratios[1]:.1f} |"
            yield row


def per_accepted_move(t: int) -> tuple[float, float]:
    """Microseconds of an accepted move: the least of three times, and gigabytes a second."""
    from search.solvers.board import board_of
    from search.solvers.compiled import kernel
    from search.solvers.records import Problem
    from search.solvers.streams import stream
    from tests.solvers.problems import in_turn, plain_tables

    sizes = [10] * (3 * t // 10)
    board = board_of(Problem(plain_tables(t, sizes), np.zeros((1, 1))), in_turn(t, sizes))
    # any tables will do where every move is accepted: those of a plan without blocks
    np.fill_diagonal(board.metrics.inverse, 1 / 3)
    np.fill_diagonal(board.metrics.worth, 1 / 9)
    random, many = stream(1, 0), max(2, min(400, 4_000_000 // t**2))
    best = np.inf
    for _ in range(3):
        began = time.thread_time()
        _, _, accepted, _ = kernel().anneal(board.plain, random, 1e9, 1.0, 10**9, 10**9, many, np.zeros(0))
        best = min(best, (time.thread_time() - began) / accepted)
    return 1e6 * best, 16e-3 * t * t / (1e6 * best)


def growth() -> Iterator[str]:
    """Rows of the table of accepted moves."""
    before: tuple[int, float] | None = None
    for t in GROWTH:
        cost, bandwidth = per_accepted_move(t)
        exponent = "" if before is None else f"{np.log(cost / before[1]) / np.log(t / before[0]):.2f}"
        yield f"| {t} | {cost:.2f} | {exponent} | {bandwidth:.1f} |"
        before = t, cost


def main() -> None:
    """Write the table."""
    file = Path(sys.argv[1])
    first = Path(sys.argv[2]).resolve() if len(sys.argv) > 2 else None
    head = "| t, b, k | whole cooling | none accepted | accepted |"
    rule = "|---|---|---|---|"
    if first:
        head, rule = head + " new/first, whole | new/first, none accepted |", rule + "---|---|"
    lines = [
        "# Speed of the engine",
        "",
        "Made by `python -m tests.measure.engine_speed FILE [FOLDER_OF_THE_FIRST_VERSION]`; one thread,",
        "medians of seven. Ratios are of runs taken in turn; other figures depend on the machine and on what",
        "else it does.",
        "",
        "Millions of scored moves a second, annealing from the same temperature to a tenth of it:",
        "",
        head,
        rule,
        *annealing(first),
        "",
        "An accepted move on the side of the treatments, blocks of ten, three plots each, its growth from",
        "the row above (2 is that of the tables), and how fast the two tables are gone through:",
        "",
        "| t | microseconds | exponent | GB/s |",
        "|---|---|---|---|",
        *growth(),
        "",
    ]
    file.write_text("\n".join(lines), encoding="utf-8")


if __name__ == "__main__":
    main()
