"""How far apart do searches end that differ in their seed alone? Trials with rules, several seeds each.

    nice python -m tests.measure.constrained_search results/search_constrained.csv [moves] [seeds]

The trials are the 30 of `constrained_bounds` and as many of `ruled`, which draws the rules that those lack;
two more numbers, `first every`, choose some of them. The search is alone, without designs to start from and
without a bound that ends it. The limit is one in moves, so that other work on the machine changes nothing:
ten seconds on two workers are about 200 million. Rows that are in the file already are kept.
"""

from __future__ import annotations

import sys
from collections import defaultdict
from collections.abc import Iterator
from dataclasses import replace
from itertools import count, islice

from search.efficiency.reference import reference_variance
from search.foundation.errors import Impossible
from search.solvers.start import feasible_start
from search.trial.limits import limits
from search.trial.records import Trial
from search.trial.tables import tables
from tests.measure.constrained_bounds import NUMBER, drawn
from tests.measure.rows import Rows
from tests.measure.tiny_search import solved
from tests.ruled import ruled

MOVES, SEEDS = 200_000_000, 10
COLUMNS = ["trial", "seed", "treatments", "blocks", "reached", "moves", "run", "start"]


def trials() -> Iterator[Trial]:
    """The 30 fixed trials and 30 with the rules that they lack."""
    yield from islice(filter(possible, map(drawn, count())), NUMBER)
    yield from map(ruled, range(NUMBER))


def possible(trial: Trial) -> bool:
    """Whether the trial has plans."""
    try:
        implied = limits(trial)
        rules = replace(tables(trial), least=implied.least, most=implied.most)
        feasible_start(trial, rules, implied, seed=1, seconds=60)
    except Impossible:
        return False
    return True


def main(
    out: str, moves: str = str(MOVES), seeds: str = str(SEEDS), first: str = "0", every: str = "1"
) -> None:
    """Write one row for each trial and seed; then say how far the worst seed of each trial is behind."""
    rows = Rows(out, COLUMNS, 2)
    for trial in list(trials())[int(first) :: int(every)]:
        for seed in range(1, int(seeds) + 1):
            if (trial.name, seed) in rows:
                continue
            _, outcome = solved(trial, int(moves), seed)
            reached = float(reference_variance(trial)) / outcome.objective
            how = [outcome.moves, outcome.run, outcome.start]
            rows.add([trial.name, seed, trial.t, trial.b, f"{reached:.9f}", *how])
    rows.sort()
    by_trial: dict[str, list[float]] = defaultdict(list)
    for row in rows.all():
        by_trial[row["trial"]].append(float(row["reached"]))
    behind = {name: 100 * (1 - min(reached) / max(reached)) for name, reached in by_trial.items()}
    worst = max(behind, key=lambda name: behind[name])
    print(
        f"{len(behind)} trials: {sum(x > 0.2 for x in behind.values())} with a seed more than 0.2% behind "
        f"the best of all, {sum(x < 1e-6 for x in behind.values())} where all end alike; "
        f"worst {behind[worst]:.4f}% ({worst})"
    )


if __name__ == "__main__":
    main(*sys.argv[1:])
