"""Make the archive of shipped results from the store of a sweep.

    evenfield sweep configs/sweeps/grid.yaml --store grid.sqlite --out grid
    python -m tests.measure.shipping grid.sqlite

The sweep takes hours; a second one with more moves goes on from the best of the first.
"""

from __future__ import annotations

import sys
from pathlib import Path

from search.runs.shipped import FILE, ship
from search.runs.store import Store


def main(path: Path) -> None:
    """Ship every result of a store that has a plan and a bound."""
    with Store(path, only_reading=True) as store:
        whole = (shown for shown in store.all_shown() if shown.kept.plan and shown.kept.bound)
        print(f"{ship(whole)} results in {FILE.stat().st_size:,} bytes")


if __name__ == "__main__":
    main(Path(sys.argv[1]))
