"""How tight are the bounds under rules? 30 seeded trials: odd blocks, 3 to 4 plots, pairs apart, replicates.

    nice python -m tests.measure.constrained_bounds results/bounds_constrained.csv [seconds [aim]]

Plans are searched for here, so that a gap is that of plan and bound together. The aim is "all pairs",
"overall", "against control" (the first treatment is the one) or "contrasts" (five among the first six).
"""

from __future__ import annotations

import csv
import random
import sys
import time
from itertools import count
from typing import Any

from search.api import plan
from search.efficiency.bounds import all_bounds
from search.foundation.errors import Impossible
from search.trial.limits import limits
from search.trial.reading import trial_from_document
from search.trial.records import Trial

NUMBER = 30


def drawn(seed: int, aim: str = "all pairs") -> Trial:
    """A trial with rules; every third one is resolvable."""
    draw = random.Random(seed)
    names = [f"V{i:02d}" for i in range(draw.randint(10, 30))]
    pairs = draw.sample([[a, b] for a in names for b in names if a < b], draw.randint(2, 10))
    document: dict[str, Any] = {"trial": f"drawn {seed}", "rules": {"never_share_block": pairs}}
    if seed % 3 == 0:
        size = draw.randint(4, 6)
        while len(names) % size:
            names.pop()
        pairs[:] = [pair for pair in pairs if set(pair) <= set(names)]
        sets = draw.randint(2, 4)
        each = len(names) // size
        document["blocks"] = {"count": sets * each, "plots": size}
        document["rules"]["replicates"] = {
            f"set {g}": [f"block {g * each + j + 1}" for j in range(each)] for g in range(sets)
        }
    else:
        usual = draw.randint(4, 9)
        count = round(len(names) * draw.uniform(3.2, 3.8) / usual)
        sizes = [usual + draw.choice((-1, 0, 0, 0, 1)) for _ in range(count)]
        document["blocks"] = {f"bay {j + 1}": size for j, size in enumerate(sizes)}
        document["plots_each"] = [3, 4]
    if not pairs:
        del document["rules"]["never_share_block"]
    document["treatments"] = {
        name: {"control": aim == "against control" and name == names[0]} for name in names
    }
    a, b, c, d, e, f = names[:6]
    contrasts: dict[str, Any] = {
        "one": {"of": {a: 1, b: -1}},
        "two": {"of": {c: 1, d: -1}, "weight": 2},
        "three": {"of": {a: 1, b: 1, c: -1, d: -1}},
        "four": {"of": {e: 2, a: -1, b: -1}},
        "five": {"of": {f: 1, e: -1}},
    }
    document["aim"] = {"contrasts": contrasts} if aim == "contrasts" else aim
    return trial_from_document(document)


def main(out: str, seconds: str = "5", aim: str = "all pairs") -> None:
    """Write one row for each trial."""
    with open(out, "w", encoding="utf-8", newline="") as file:
        table = csv.writer(file, lineterminator="\n")
        table.writerow(
            ["seed", "treatments", "blocks", "reached", "bound", "gap_percent", "argument", "seconds"]
        )
        seeds, written = count(), 0
        while written < NUMBER:
            seed = next(seeds)
            trial = drawn(seed, aim)
            try:
                reached = plan(trial, seconds=float(seconds), workers=1).score.aim
            except Impossible:
                continue
            written += 1
            start = time.process_time()
            best = min(all_bounds(trial, limits(trial)), key=lambda bound: bound.exact)
            spent = time.process_time() - start
            gap = 100 * (1 - reached / best.value)
            shape = [seed, trial.t, trial.b, f"{reached:.9f}", f"{best.value:.9f}", f"{gap:.6f}"]
            table.writerow([*shape, best.argument, f"{spent:.2f}"])
            file.flush()


if __name__ == "__main__":
    main(*sys.argv[1:])
