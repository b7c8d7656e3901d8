"""How tight are the bounds for equal blocks and replications? 804 sets, plans from a stored file.

    nice python -m tests.measure.grid_bounds results/bounds_grid.csv [first every]

The plans are the best of searches by an earlier prototype (`grid_reached.csv` among the tests of bounds), so
that the bound is measured and not the search; for k = r = 2 only the cycle is connected.
"""

from __future__ import annotations

import csv
import sys
import time
from collections.abc import Iterator
from pathlib import Path

from search.efficiency.bounds import all_bounds
from search.efficiency.records import Bound
from search.proof.certificates import KINDS
from search.proof.certificates.case import Case
from search.proof.parts import Part
from search.trial.limits import limits
from search.trial.records import Trial
from search.trial.tables import tables
from tests.efficiency.plans import equal_trial

REACHED = Path(__file__).parents[1] / "efficiency" / "bounds" / "grid_reached.csv"
PROVEN = 1e-6


def sets() -> Iterator[tuple[int, int, int, float]]:
    """(t, b, k, best A found) of all 804 sets."""
    with REACHED.open(encoding="utf-8") as file:
        for row in csv.DictReader(file):
            t, b, k = (int(row[key]) for key in ("treatments", "blocks", "block_size"))
            yield t, b, k, float(row["best_A_found"])
    for t in range(5, 31):
        # unit resistances around a cycle: Σ over pairs (t³ − t)/12; with r = k = 2 each is two units
        average = 2 * (t**3 - t) / 12 / (t * (t - 1) / 2)
        yield t, t, 2, 2 / 2 / average


def measured(trial: Trial, reached: float) -> tuple[Bound, float, float]:
    """The best bound, the seconds until it was found, and those of its check; ends where the plan meets it.

    Processor time, so that other work on the machine does not count.
    """
    implied = limits(trial)
    best: Bound | None = None
    start = time.process_time()
    for bound in all_bounds(trial, implied):
        if best is None or bound.exact < best.exact:
            best = bound
        if 1 - reached / best.value <= PROVEN:
            break
    assert best is not None
    seconds = time.process_time() - start
    start = time.process_time()
    certificate = best.certificate
    claim = KINDS[certificate["kind"]].derive(
        Case(trial, tables(trial), implied), Part("multipliers", certificate["multipliers"])
    )
    assert claim.supports(best.exact)
    return best, seconds, time.process_time() - start


def main(out: str, first: str = "0", every: str = "1") -> None:
    """Write one row for each set, or for every so-manieth from the first on."""
    with open(out, "w", encoding="utf-8", newline="") as file:
        table = csv.writer(file, lineterminator="\n")
        table.writerow(
            [
                "treatments",
                "blocks",
                "block_size",
                "reached",
                "bound",
                "gap_percent",
                "argument",
                "seconds",
                "check_seconds",
            ]
        )
        for t, b, k, reached in list(sets())[int(first) :: int(every)]:
            bound, seconds, check = measured(equal_trial(t, b, k), reached)
            gap = 100 * (1 - reached / bound.value)
            table.writerow(
                [
                    t,
                    b,
                    k,
                    f"{reached:.9f}",
                    f"{bound.value:.9f}",
                    f"{gap:.6f}",
                    bound.argument,
                    f"{seconds:.2f}",
                    f"{check:.2f}",
                ]
            )
            file.flush()


if __name__ == "__main__":
    main(*sys.argv[1:])
