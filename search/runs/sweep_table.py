"""The table of a sweep: a row for each combination, best found against bound."""

from __future__ import annotations

from pathlib import Path
from typing import TYPE_CHECKING, Any

from search.foundation.documents import write_whole
from search.runs.sweep import RowResult, SweepResult

if TYPE_CHECKING:
    import pandas as pd

WHOLE = ("row", "t", "b", "n", "residual_df", "seed", "moves")
"""Columns of whole numbers, empty where a row has none."""


def sweep_frame(result: SweepResult) -> pd.DataFrame:
    """A sweep as a table.

    Columns: row; what varies; t, b, n, aim; status; best_found and bound (efficiencies for the aim, for
    even meetings sums of squared meetings); gap_percent; standing; losses in percent; residual_df; reason
    where there is no plan; seed, moves, seconds and start of the search that found the plan; where_from;
    digest of the problem.
    """
    import pandas as pd

    rows = [_line(row) for row in result.rows]
    table = pd.DataFrame(rows, columns=_columns(result), dtype=object)
    for column in WHOLE:
        table[column] = table[column].astype("Int64")
    return table


def write_table(result: SweepResult, path: Path) -> None:
    """Write a sweep as CSV.

    Raises
    ------
    BadInput : the file cannot be written
    """
    write_whole(path, sweep_frame(result).to_csv(index=False, lineterminator="\n"))


FIXED = (
    *("t", "b", "n", "aim", "status", "best_found", "bound", "gap_percent", "standing"),
    *("loss_to_replication_percent", "loss_to_blocks_percent", "residual_df", "reason"),
    *("seed", "moves", "seconds", "start", "where_from", "digest"),
)


def _columns(result: SweepResult) -> list[str]:
    return list(dict.fromkeys(("row", *result.sweep.columns, *FIXED)))


def _line(result: RowResult) -> dict[str, Any]:
    trial, plan = result.row.trial, result.plan
    line: dict[str, Any] = {"row": result.row.number, "status": str(result.status), "reason": result.reason}
    if trial is not None:
        line |= {"t": trial.t, "b": trial.b, "n": trial.n, "aim": str(trial.aim.kind)}
    if plan is not None:
        score = plan.score
        line |= {
            "best_found": score.aim,
            "bound": None if plan.bound is None else plan.bound.value,
            "gap_percent": plan.gap_percent,
            "standing": str(plan.standing),
            "loss_to_replication_percent": score.loss_to_replication_percent,
            "loss_to_blocks_percent": score.loss_to_blocks_percent,
            "residual_df": score.residual_df,
            "seed": plan.seed,
            "moves": plan.moves,
            "seconds": plan.seconds,
            "start": plan.start,
            "where_from": str(result.where_from),
            "digest": plan.digest,
        }
    return line | result.row.values
