"""All parameters in a range with their verdicts."""

from __future__ import annotations

import csv
import io
import time
from collections.abc import Iterable, Iterator
from dataclasses import dataclass

from search.designs.conditions import Balanced, multiples
from search.designs.existence import decide
from search.designs.records import Existence, Verdict

COLUMNS = (
    "treatments",
    "block_size",
    "replication",
    "blocks",
    "meetings",
    "efficiency",
    "verdict",
    "built",
    "reason",
    "seconds",
)


@dataclass(frozen=True, slots=True)
class Entry:
    """One set of parameters, its verdict, and the wall time that it took."""

    sizes: Balanced
    verdict: Verdict
    seconds: float

    def row(self) -> tuple[str, ...]:
        """The entry as text, in the order of `COLUMNS`."""
        sizes, verdict = self.sizes, self.verdict
        numbers = sizes.t, sizes.k, sizes.r, sizes.b, sizes.meetings
        return (
            *map(str, numbers),
            f"{float(sizes.efficiency):.6f}",
            str(verdict.existence),
            "" if verdict.existence is not Existence.EXISTS else "no" if verdict.design is None else "yes",
            verdict.reason,
            f"{self.seconds:.2f}",
        )


def admissible(
    treatments: Iterable[int], replication: range, block_sizes: range | None = None
) -> Iterator[Balanced]:
    """Parameters that meet the counting conditions, by r, then k, then t.

    Parameters
    ----------
    treatments : numbers of treatments
    replication : plots of each treatment
    block_sizes : plots of a block; left out: from 3 to half the treatments, larger ones being complements
    """
    found = []
    for t in treatments:
        for k in block_sizes or range(3, t // 2 + 1):
            if not 2 <= k < t:
                continue
            for sizes in multiples(t, k):
                if sizes.r >= replication.stop:
                    break
                if sizes.r in replication:
                    found.append(sizes)
    return iter(sorted(found, key=lambda sizes: (sizes.r, sizes.k, sizes.t)))


def survey(sets: Iterable[Balanced], *, resolvable: bool = False) -> Iterator[Entry]:
    """The verdict for each set of parameters, one after another."""
    for sizes in sets:
        started = time.perf_counter()
        verdict = decide(sizes, resolvable=resolvable)
        yield Entry(sizes, verdict, time.perf_counter() - started)


def as_csv(entries: Iterable[Entry]) -> str:
    """The entries as a CSV file with a heading."""
    text = io.StringIO()
    writer = csv.writer(text, lineterminator="\n")
    writer.writerow(COLUMNS)
    writer.writerows(entry.row() for entry in entries)
    return text.getvalue()
