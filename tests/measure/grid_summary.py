"""What a table of `grid_bounds` comes to: how many plans are proven optimal, and how near the others are.

python -m tests.measure.grid_summary results/bounds_grid.csv
"""

from __future__ import annotations

import csv
import sys
from pathlib import Path

import numpy as np

PROVEN_PERCENT = 1e-4


def main(path: Path) -> None:
    """Print shares of all sets, proofs by exhaustion counted apart, and the seconds of the bounds."""
    with path.open(encoding="utf-8") as file:
        rows = list(csv.DictReader(file))
    by_bound, by_exhaustion, gaps = 0, 0, []
    for row in rows:
        reached, bound = float(row["reached"]), float(row["bound"])
        gap = 100 * (1 - reached / bound)
        if gap <= PROVEN_PERCENT:
            by_bound += 1
        elif row["bound_by_exhaustion"]:
            reached = max(reached, float(row["reached_by_exhaustion"]))
            gap = 100 * (1 - reached / float(row["bound_by_exhaustion"]))
            by_exhaustion += gap <= PROVEN_PERCENT
        elif row["reached_by_exhaustion"]:
            gap = 100 * (1 - max(reached, float(row["reached_by_exhaustion"])) / bound)
        gaps.append(gap)
    share = 100 / len(rows)
    print(f"{len(rows)} sets: {by_bound * share:.1f}% proven by bounds, ", end="")
    print(f"{by_exhaustion * share:.1f}% by exhaustion")
    for within in (0.1, 0.5, 1.0):
        print(f"within {within}%: {np.mean(np.array(gaps) <= within) * 100:.1f}%")
    seconds = np.array([float(row["seconds"]) for row in rows])
    print(f"largest gap {max(gaps):.3f}%; bounds take {np.median(seconds):.2f} s in the median, ", end="")
    print(f"{np.percentile(seconds, 95):.2f} s or less in 95%")


if __name__ == "__main__":
    main(Path(sys.argv[1]))
