"""How tight are the bounds for equal blocks and replications? 804 sets, plans from a stored file.

    nice python -m tests.measure.grid_bounds results/bounds_grid.csv [first every] [--better FILE] [--exhaust]
        [--from TABLE]

The plans are the best of those that come with the program (`search/runs/shipped.zip`) and of searches by an
earlier prototype (`grid_reached.csv` among the tests of bounds), so that the bound is measured and not the
search; for k = r = 2 only the cycle is connected. A CSV file with the columns t, b, k, best_A gives better
values. With `--exhaust` what the bound leaves unproven is tried by
exhaustion; a better plan that it finds counts. `--from` takes bounds and
proofs by exhaustion from a table that was written before.
"""

from __future__ import annotations

import argparse
import csv
import time
from collections.abc import Iterator
from dataclasses import dataclass
from fractions import Fraction
from pathlib import Path

from search.efficiency.bounds import all_bounds
from search.efficiency.bounds.problem import problem
from search.efficiency.evaluator import score
from search.efficiency.exhaustion.proving import case_of, exhausted
from search.efficiency.records import Bound
from search.proof.certificates import KINDS
from search.proof.certificates.case import Case
from search.proof.parts import Part
from search.runs.shipped import all_shipped
from search.trial.limits import limits
from search.trial.records import AimKind, Trial
from search.trial.tables import tables
from tests.efficiency.plans import equal_trial

REACHED = Path(__file__).parents[1] / "efficiency" / "bounds" / "grid_reached.csv"
PROVEN = 1e-6
MOST, WORK = 100_000, 12.0


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


@dataclass(frozen=True, slots=True)
class Proved:
    """What exhaustion shows: the best A, the bound, graphs listed, better ones refuted, seconds."""

    reached: float
    bound: Bound
    seconds: float

    @property
    def row(self) -> list[str]:
        """As columns of the table."""
        found = self.bound.certificate["multipliers"]
        refuted = found["refuted"]
        counts = (found["graphs"], refuted["counting"], refuted["solver"], refuted["literature"])
        value = f"{self.bound.value:.9f}"
        return [f"{self.reached:.9f}", value, *map(str, counts), f"{self.seconds:.2f}"]


def tried_all(trial: Trial, reached: float) -> Proved | float:
    """The proof by exhaustion, or the best A where there is none.

    A stored A has nine digits, so that what is to be beaten is a little above it.
    """
    given = problem(trial, limits(trial))
    assert given is not None
    case = case_of(given, MOST)
    if case is None:
        return reached
    start = time.process_time()
    beaten = -Fraction(trial.t - 1) / (Fraction(reached) * (1 + Fraction(2, 10**9)))
    found = exhausted(given, case, beaten, work=WORK, most=MOST)
    if found is None:
        return reached
    if found.contents is not None:
        reached = score(trial, found.contents).A
    if found.bound is None:
        return reached
    return Proved(reached, found.bound, time.process_time() - start)


def better_values(path: str) -> dict[tuple[int, int, int], float]:
    """(t, b, k) to a better A."""
    with open(path, encoding="utf-8") as file:
        return {
            (int(row["t"]), int(row["b"]), int(row["k"])): float(row["best_A"])
            for row in csv.DictReader(file)
        }


def shipped_values() -> dict[tuple[int, int, int], float]:
    """(t, b, k) to the A of the plan that comes with the program."""
    values = {}
    for result in all_shipped():
        sizes = set(result["sizes"])
        if (
            result["aim"] == AimKind.ALL_PAIRS
            and len(sizes) == 1
            and result["plots"] % result["treatments"] == 0
        ):
            values[result["treatments"], result["blocks"], sizes.pop()] = result["plan"]["score"]
    return values


COLUMNS = (
    *("treatments", "blocks", "block_size", "reached", "bound", "gap_percent", "argument", "seconds"),
    *("check_seconds", "reached_by_exhaustion", "bound_by_exhaustion", "graphs", "refuted_by_counting"),
    *("refuted_by_solver", "refuted_by_literature", "exhaustion_seconds"),
)


def rows_of(path: str) -> dict[tuple[int, int, int], dict[str, str]]:
    """A table that was written before, by set."""
    with open(path, encoding="utf-8") as file:
        rows = list(csv.DictReader(file))
    return {(int(row["treatments"]), int(row["blocks"]), int(row["block_size"])): row for row in rows}


def main() -> None:
    """Write one row for each set, or for every so-manieth from the first on."""
    words = argparse.ArgumentParser()
    words.add_argument("out")
    words.add_argument("first", nargs="?", type=int, default=0)
    words.add_argument("every", nargs="?", type=int, default=1)
    words.add_argument("--better")
    words.add_argument("--exhaust", action="store_true")
    words.add_argument("--from", dest="before")
    asked = words.parse_args()
    better = shipped_values()
    if asked.better:
        for key, value in better_values(asked.better).items():
            better[key] = max(value, better.get(key, 0.0))
    before = rows_of(asked.before) if asked.before else {}
    with open(asked.out, "w", encoding="utf-8", newline="") as file:
        table = csv.writer(file, lineterminator="\n")
        table.writerow(COLUMNS)
        for t, b, k, stored in list(sets())[asked.first :: asked.every]:
            reached = max(stored, better.get((t, b, k), 0.0))
            trial = equal_trial(t, b, k)
            if known := before.get((t, b, k)):
                value, tail = float(known["bound"]), [known[key] for key in COLUMNS[6:9]]
            else:
                bound, seconds, check = measured(trial, reached)
                value, tail = bound.value, [bound.argument, f"{seconds:.2f}", f"{check:.2f}"]
            gap = 100 * (1 - reached / value)
            row = [str(t), str(b), str(k), f"{reached:.9f}", f"{value:.9f}", f"{gap:.6f}", *tail]
            if asked.exhaust and gap > 100 * PROVEN:
                shown = tried_all(trial, reached)
                row += shown.row if isinstance(shown, Proved) else [f"{shown:.9f}", *[""] * 6]
            elif known and known["bound_by_exhaustion"] and gap > 100 * PROVEN:
                row += [
                    f"{max(reached, float(known[COLUMNS[9]])):.9f}",
                    *(known[key] for key in COLUMNS[10:]),
                ]
            table.writerow(row + [""] * (len(COLUMNS) - len(row)))
            file.flush()


if __name__ == "__main__":
    main()
