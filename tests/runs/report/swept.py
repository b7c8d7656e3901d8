"""Sweeps as if they had been run: plans by hand, no search."""

from __future__ import annotations

from functools import cache
from pathlib import Path
from tempfile import TemporaryDirectory

from search.foundation.errors import Clash
from search.runs.sweep_file import Sweep, read_sweep
from search.runs.sweep_records import RowResult, RowStatus, WhereFrom
from search.trial.records import Contents, Trial
from tests.runs.made import made_plan

SWEEP = """\
sweep: oats
base:
  trial: oats
  treatments: 6
  blocks: {count: 6, plots: 3}
  plots_each: [1, 40]
  precision: {cv_percent: 9, mean: 6, unit: t/ha}
vary:
  treatments: [5, 6]
  blocks.plots: [2, 3, 4]
cases:
  free:
  apart: {rules.never_share_block: [[T01, T02]]}
"""
CLASH = Clash(
    lines=(("rules.never_share_block", 12, "never_share_block: [T01, T02]"),),
    among=(("blocks", 5, "blocks: {count: 6, plots: 3}"),),
    is_smallest=True,
    cause="T01 and T02 need more blocks than there are",
    shown_by="count",
    changes=("leave the line out",),
)


def turned(trial: Trial) -> Contents:
    """Treatments laid round the blocks one after another."""
    ends = [sum(block.plots for block in trial.blocks[: j + 1]) for j in range(trial.b)]
    return tuple(
        tuple(sorted(x % trial.t for x in range(end - block.plots, end)))
        for end, block in zip(ends, trial.blocks, strict=True)
    )


@cache
def swept(text: str = SWEEP) -> tuple[Sweep, tuple[RowResult, ...]]:
    """A sweep whose rows with a rule are impossible and all others are planned."""
    with TemporaryDirectory() as folder:
        path = Path(folder, "sweep.yaml")
        path.write_text(text)
        sweep = read_sweep(path)
    rows = []
    for row in sweep.rows:
        if row.trial is None:
            rows.append(RowResult(row, RowStatus.FAULTY, reason="found many"))
        elif row.trial.rules.never_share_block:
            rows.append(
                RowResult(row, RowStatus.IMPOSSIBLE, None, None, "cannot be kept: " + CLASH.cause, (CLASH,))
            )
        else:
            plan = made_plan(row.trial, turned(row.trial))
            rows.append(RowResult(row, RowStatus.PLANNED, plan, WhereFrom.SEARCHED))
    return sweep, tuple(rows)
