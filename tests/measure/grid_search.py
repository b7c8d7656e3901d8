"""Is the search as good as the best known plans, for equal blocks and replications? 778 sets.

    nice python -m tests.measure.grid_search results/search_grid.csv [moves] [first every]

Each set is searched with one seed and compared with the best A that an earlier prototype found
(`grid_reached.csv` among the tests of bounds). The search is alone: no design is there to start from, and
the bound that ends it is read from `results/bounds_grid.csv`. Only where it falls behind is the whole of
`plan` asked, which knows designs. The limit is one in moves, so that other work on the machine changes
nothing: two workers score 20 to 45 million moves in two seconds of a machine that is otherwise idle.
Rows that are in the file already are kept; several measurements may share the sets by `first every`.
"""

from __future__ import annotations

import csv
import sys
from pathlib import Path

from search.api import plan
from search.efficiency.reference import reference_variance
from search.foundation.stopping import Limits, Stop
from search.solvers.rounds import search
from search.solvers.start import feasible_start
from search.trial.limits import limits
from tests.efficiency.plans import equal_trial
from tests.measure.grid_bounds import REACHED
from tests.measure.rows import Rows
from tests.solvers.problems import problem_of

BOUNDS = Path(__file__).parents[2] / "results" / "bounds_grid.csv"
MOVES = 20_000_000
COLUMNS = ["treatments", "blocks", "block_size", "listed", "reached", "ahead", "bound", "moves", "by"]
NEAR = 1e-6


def searched(t: int, b: int, k: int, bound: float, moves: int) -> tuple[float, int]:
    """The A that the search alone reaches, and the moves that it scored."""
    trial = equal_trial(t, b, k)
    reference = float(reference_variance(trial))
    problem = problem_of(trial)
    start, _ = feasible_start(trial, problem.tables, limits(trial), seed=1, seconds=60)
    outcome = search(
        problem,
        start,
        kept=None,
        target=lambda _: reference / bound,
        stop=Stop(Limits(None, moves)),
        seed=1,
        workers=1,
        watch=lambda *_: None,
    )
    return reference / outcome.objective, outcome.moves


def main(out: str, moves: str = str(MOVES), first: str = "0", every: str = "1") -> None:
    """Write one row for each set, or for every so-manieth from the first on; then say what came out."""
    rows = Rows(out, COLUMNS, 3)
    with REACHED.open(encoding="utf-8") as file:
        sets = list(csv.DictReader(file))
    with BOUNDS.open(encoding="utf-8") as file:
        bounds = {
            tuple(int(row[key]) for key in COLUMNS[:3]): float(row["bound"]) for row in csv.DictReader(file)
        }
    for row in sets[int(first) :: int(every)]:
        t, b, k = (int(row[key]) for key in COLUMNS[:3])
        if (t, b, k) in rows:
            continue
        listed, bound = float(row["best_A_found"]), bounds[t, b, k]
        reached, scored = searched(t, b, k, bound, int(moves))
        by = "search"
        if reached < listed - NEAR:
            found = plan(equal_trial(t, b, k), moves=int(moves), workers=1)
            reached, scored, by = found.score.aim, found.moves, f"plan: {found.start}"
        rows.add(
            [
                t,
                b,
                k,
                f"{listed:.9f}",
                f"{reached:.9f}",
                f"{reached - listed:.9f}",
                f"{bound:.9f}",
                scored,
                by,
            ]
        )
    rows.sort()
    told = rows.all()
    ahead = [float(row["ahead"]) for row in told]
    met = [row for row in told if float(row["listed"]) > float(row["bound"]) - NEAR]
    missed = [row for row in met if float(row["reached"]) < float(row["bound"]) - NEAR]
    print(
        f"{len(told)} sets: {sum(x < -NEAR for x in ahead)} behind the list, {sum(x > NEAR for x in ahead)} "
        f"ahead; {len(met)} where the list meets the bound, {len(missed)} of them missed; "
        f"{sum(row['by'] != 'search' for row in told)} by a design"
    )


if __name__ == "__main__":
    main(*sys.argv[1:])
