"""The table of a sweep: a row for each combination, best found against bound."""

from __future__ import annotations

from collections.abc import Iterable, Sequence
from typing import TYPE_CHECKING, Any

from search.efficiency.precision import break_even
from search.foundation.spreadsheets import inert
from search.runs.row_figures import flags, plots_of, shows
from search.runs.sweep_records import RowResult

if TYPE_CHECKING:
    import pandas as pd

WHOLE = (
    *("row", "t", "b", "n", "block_least", "block_most", "plots_least", "plots_most"),
    *("residual_df", "residual_df_without_blocks", "seed", "moves"),
)
"""Columns of whole numbers, empty where a row has none."""
FIXED = (
    *("t", "b", "n", "block_least", "block_most", "plots_least", "plots_most"),
    *("aim", "status", "best_found", "bound", "gap_percent", "standing"),
    *("loss_to_replication_percent", "loss_to_blocks_percent", "break_even_percent"),
    *("compared", "unit", "standard_error", "detectable_difference"),
    *("standard_error_worst_pair", "detectable_difference_worst_pair"),
    *("residual_df", "residual_df_without_blocks", "flags", "reason", "argument"),
    *("seed", "moves", "seconds", "start", "where_from", "digest"),
)


def frame_of(columns: Sequence[str], rows: Iterable[RowResult]) -> pd.DataFrame:
    """Rows of a sweep as a table.

    Columns:
    row; what varies;
    t, b, n : treatments, blocks, plots
    block_least, block_most : plots of the smallest and largest block
    plots_least, plots_most : least and most plots of a treatment in the plan
    aim; status
    best_found, bound : efficiencies for the aim; for even meetings sums of squared meetings
    gap_percent; standing
    loss_to_replication_percent, loss_to_blocks_percent : empty for a disconnected plan
    break_even_percent : blocks pay when they cut the variance between plots by more
    compared, unit, standard_error, detectable_difference : expected, see `row_figures.Shows`; the same for
        the worst pair
    residual_df, residual_df_without_blocks; flags : warnings, with semicolons between them
    reason : why there is no plan; argument : behind the bound
    seed, moves, seconds, start : of the search that found the plan
    where_from : searched now, or kept; digest : of the problem

    Parameters
    ----------
    columns : what varies
    rows : the rows
    """
    import pandas as pd

    names = list(dict.fromkeys(("row", *columns, *FIXED)))
    table = pd.DataFrame([_line(row) for row in rows], columns=names, dtype=object)
    for column in WHOLE:
        table[column] = table[column].astype("Int64")
    return table


def csv_of(columns: Sequence[str], rows: Iterable[RowResult]) -> str:
    """The same as CSV; text that a spreadsheet might run as a formula gets an apostrophe in front.

    A byte-order mark tells spreadsheets that the text is UTF-8.
    """
    table = frame_of(columns, rows).map(lambda cell: inert(cell) if isinstance(cell, str) else cell)
    table.columns = [inert(column) for column in table.columns]
    return "\N{BYTE ORDER MARK}" + str(table.to_csv(index=False, lineterminator="\n"))


def _line(result: RowResult) -> dict[str, Any]:
    trial, plan = result.row.trial, result.plan
    line: dict[str, Any] = {"row": result.row.number, "status": str(result.status), "reason": result.reason}
    if result.where_from is not None:
        line["where_from"] = str(result.where_from)
    if trial is not None and trial.blocks:
        sizes = [block.plots for block in trial.blocks]
        line |= {"t": trial.t, "b": trial.b, "n": trial.n, "aim": str(trial.aim.kind)}
        line |= {"block_least": min(sizes), "block_most": max(sizes)}
    if plan is not None:
        found, even = plan.score, break_even(plan.trial, plan.score)
        plots = plots_of(plan)
        line |= {
            "plots_least": min(plots),
            "plots_most": max(plots),
            "best_found": found.aim,
            "bound": None if plan.bound is None else plan.bound.value,
            "gap_percent": plan.gap_percent,
            "standing": str(plan.standing),
            "residual_df": found.residual_df,
            "residual_df_without_blocks": even.residual_df_without_blocks,
            "flags": "; ".join(flag.short for flag in flags(plan)),
            "argument": "" if plan.bound is None else plan.bound.argument,
            "seed": plan.seed,
            "moves": plan.moves,
            "seconds": plan.seconds,
            "start": plan.start,
            "digest": plan.digest,
        }
        if found.connected:
            line |= {
                "loss_to_replication_percent": found.loss_to_replication_percent,
                "loss_to_blocks_percent": found.loss_to_blocks_percent,
                "break_even_percent": even.variance_cut_percent,
            }
        expected = shows(plan)
        if expected is not None:
            line |= {
                "compared": expected.compared,
                "unit": expected.unit,
                "standard_error": expected.standard_error,
                "detectable_difference": expected.detectable,
                "standard_error_worst_pair": expected.standard_error_worst_pair,
                "detectable_difference_worst_pair": expected.detectable_worst_pair,
            }
    return line | result.row.values
