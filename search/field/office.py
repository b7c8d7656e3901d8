"""The office sheet: what a biometrician asks of a plan before and after the season. Not for the crew."""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import dataclass
from math import floor
from typing import Any

import numpy as np
from numpy.typing import NDArray

from search.field.codes import treatment_codes
from search.field.pictures import Picture, picture
from search.field.standing import plots_planted, standing_in_words
from search.field.wording import clean
from search.runs.cautions import ENOUGH_DF
from search.trial.records import Contents, Trial
from search.trial.tables import incidence

MOST_LABELS = 40
"""Up to so many treatments their codes stand beside the pictures."""
MOST_PICTURED = 2_000
"""More treatments than these give pictures that nobody can read."""


@dataclass(frozen=True, slots=True)
class Figure:
    """A figure with its name and what it means in a sentence."""

    name: str
    value: str
    told: str = ""


@dataclass(frozen=True, slots=True)
class Group:
    """Figures that belong together."""

    title: str
    figures: tuple[Figure, ...]


@dataclass(frozen=True, slots=True)
class OfficeSheet:
    """The content of the office sheet.

    Parameters
    ----------
    standing : how good the plan is, in sentences
    groups : figures by subject
    notes : warnings about the statistics
    pictures : how often pairs meet, and the variance of their differences
    labels : codes beside the pictures; none where there are too many
    """

    standing: tuple[str, ...]
    groups: tuple[Group, ...]
    notes: tuple[str, ...]
    pictures: tuple[Picture, ...]
    labels: tuple[str, ...]


def office_sheet(trial: Trial, document: dict[str, Any], notes: tuple[str, ...]) -> OfficeSheet:
    """What the office reads of a plan.

    Parameters
    ----------
    trial : the trial
    document : its plan as in plan.json, checked against the trial already
    notes : warnings about the statistics
    """
    names = [clean(treatment.name) for treatment in trial.treatments]
    variances = _variances(trial, document)
    groups = (
        Group("Efficiency", tuple(_efficiency(trial, document))),
        Group("What the field will show", tuple(_precision(trial, document))),
        Group("How pairs compare", tuple(_pairs(document, names, variances))),
        Group("Where the plan comes from", tuple(_origin(document))),
    )
    return OfficeSheet(
        standing=standing_in_words(document, plots_planted(document)),
        groups=tuple(group for group in groups if group.figures),
        notes=notes,
        pictures=tuple(_pictures(trial, document, variances)),
        labels=treatment_codes(names) if trial.t <= MOST_LABELS else (),
    )


def _efficiency(trial: Trial, document: dict[str, Any]) -> Iterator[Figure]:
    score, bound, gap = document["score"], document["bound"], document["gap_percent"]
    aim = trial.aim.kind.value
    if trial.aim.kind.counts_meetings:
        yield from _evenness(document)
        yield from _losses(plots_planted(document) - trial.t, score)
        return
    yield Figure(
        f"Efficiency, {aim}",
        f"{100 * score['aim']:.2f} %",
        "Against the same plots without blocks in the best replication that the file allows.",
    )
    if trial.blocks_random is not None:
        yield Figure(
            "Blocks",
            "random",
            "Planned for the combined analysis, which counts what block totals tell, with "
            f"{float(trial.blocks_random):g} times the variance between blocks that there is between plots.",
        )
    if bound is not None and score["average_pair_variance"] is not None:
        argument = clean(str(bound.get("argument", "")))
        value = f"{100 * float(bound['value']):.2f} %" if isinstance(bound.get("value"), float) else ""
        yield Figure("Best possible, at most", value, f"Proved by: {argument}.")
    if gap is not None and score["average_pair_variance"] is not None:
        plots = plots_planted(document)
        worth = floor(10 * plots * (1 - gap / 100) + 1e-9) / 10
        yield Figure(
            "Gap",
            f"{gap:.2f} %",
            f"At most {plots - worth:.1f} of {plots} plots are wasted against the best possible plan.",
        )
    yield from _losses(plots_planted(document) - trial.t, score)


def _evenness(document: dict[str, Any]) -> Iterator[Figure]:
    """How even the meetings are: whole numbers, no efficiencies and nothing in plots."""
    score, bound, gap = document["score"], document["bound"], document["gap_percent"]
    yield Figure(
        "Sum of squared meetings",
        f"{score['aim']:.0f}",
        "For each pair the blocks that it shares (plot by plot where one stands twice), squared and summed: "
        "the lower, the more even.",
    )
    if bound is not None:
        argument = clean(str(bound.get("argument", "")))
        value = bound.get("value")
        told = f"{value:.0f}" if isinstance(value, int | float) else ""
        yield Figure("Best possible, at least", told, f"Proved by: {argument}.")
    if gap is not None:
        yield Figure("Gap", f"{gap:.2f} %", "By so much at most the sum is above the best possible one.")
    efficiency = score.get("A")
    if score["connected"] and isinstance(efficiency, int | float):
        yield Figure(
            "Efficiency, all pairs",
            f"{100 * efficiency:.2f} %",
            "It ranks plans with equal sums. Against the same plots without blocks in the best replication "
            "that the file allows.",
        )


def _losses(df_without_blocks: int, score: dict[str, Any]) -> Iterator[Figure]:
    replication, blocks = (score.get(f"loss_to_{word}_percent") for word in ("replication", "blocks"))
    if score["average_pair_variance"] is None or replication is None or blocks is None:
        return
    yield Figure("Lost to replication", f"{replication:.2f} %", "By plots shared out otherwise than is best.")
    yield Figure(
        "Lost to blocks",
        f"{blocks:.2f} %",
        f"Break-even: blocks pay when they cut the variance between plots by more than {blocks:.1f} %. "
        f"Residual degrees of freedom are then {score['residual_df']}, without blocks {df_without_blocks}.",
    )


def _precision(trial: Trial, document: dict[str, Any]) -> Iterator[Figure]:
    from search.efficiency.precision import expected_for_aim, expected_of

    score = document["score"]
    df = score["residual_df"]
    enough = "enough" if df >= ENOUGH_DF else "too few"
    yield Figure(
        "Residual degrees of freedom",
        str(df),
        f"For fixed blocks. {enough.capitalize()}: EPPO standard PP 1/152 asks {ENOUGH_DF} of efficacy "
        "trials, a good habit elsewhere.",
    )
    average, largest = score.get("average_pair_variance"), score.get("largest_pair_variance")
    if min(average or 0, largest or 0) <= 0:
        return
    found = expected_of(trial.precision, average, largest, df)
    if found is None:
        return
    asked, unit = trial.precision, clean(found.unit)
    mean, worst = found.average_pair, found.worst_pair
    aimed = expected_for_aim(trial, score["aim"], df)
    if aimed is not None:
        yield Figure(
            f"Standard error, {trial.aim.kind.value}",
            f"{aimed.standard_error:.3g} {unit}",
            f"On average over what the aim compares; a true difference of {aimed.detectable:.3g} {unit} "
            "can be detected. The figures below speak of any two treatments.",
        )
    yield Figure(
        "Standard error of a difference",
        f"{mean.standard_error:.3g} {unit}",
        f"On average; {worst.standard_error:.3g} for the worst pair. From a variation of "
        f"{asked.cv_percent:g} % between plots of one block.",
    )
    yield Figure(
        "Least significant difference",
        f"{mean.least_significant:.3g} {unit}",
        f"{worst.least_significant:.3g} for the worst pair; two-sided at {asked.level_percent:g} %, "
        "not corrected for many comparisons.",
    )
    yield Figure(
        "Detectable difference",
        f"{mean.detectable:.3g} {unit}",
        f"Found with a chance of {asked.power_percent:g} %; {worst.detectable:.3g} for the worst pair.",
    )
    if mean.power_percent is not None and worst.power_percent is not None:
        yield Figure(
            f"Chance to find {asked.difference:g} {unit}",
            f"{mean.power_percent:.0f} %",
            f"{worst.power_percent:.0f} % for the worst pair.",
        )


def _pairs(
    document: dict[str, Any], names: list[str], variances: NDArray[np.float64] | None
) -> Iterator[Figure]:
    meetings = document["score"].get("meetings") or {}
    least, most = meetings.get("least"), meetings.get("most")
    if isinstance(least, int) and isinstance(most, int):
        value = str(least) if least == most else f"{least} to {most}"
        yield Figure("Blocks that two treatments share", value)
    if variances is None:
        return
    upper = np.where(np.triu(np.ones_like(variances, dtype=np.bool_), 1), variances, -np.inf)
    i, j = divmod(int(np.argmax(upper)), len(names))
    average = float(variances[np.triu_indices(len(names), 1)].mean())
    yield Figure(
        "Variance of a difference",
        f"{average:.3f}",
        f"On average, in units of the plot variance; largest {variances[i, j]:.3f}, for {names[i]} and "
        f"{names[j]}.",
    )


def _origin(document: dict[str, Any]) -> Iterator[Figure]:
    layout, run = document["layout"], document.get("provenance", {})
    yield Figure("Layout", f"seed {layout['seed']}", _sentence(layout["scheme"]))
    if layout.get("restriction") is not None:
        value = "uniform" if layout["restriction"]["uniform"] else "not uniform"
        yield Figure("Under not_beside", value, _sentence(layout["restriction"]["told"]))
    if isinstance(run, dict) and isinstance(run.get("moves"), int) and isinstance(run.get("seed"), int):
        told = f"{run['moves']:,} moves; ended by: {clean(str(document.get('ended_by', '')))}."
        yield Figure("Search", f"seed {run['seed']}", told)


def _sentence(words: str) -> str:
    words = clean(words)
    return f"{words[:1].upper()}{words[1:]}."


def _variances(trial: Trial, document: dict[str, Any]) -> NDArray[np.float64] | None:
    from search.efficiency.evaluator import pair_variances

    if trial.t > MOST_PICTURED:
        return None
    return pair_variances(_contents(trial, document), trial.t, trial.blocks_random)


def _contents(trial: Trial, document: dict[str, Any]) -> Contents:
    number = {treatment.name: i for i, treatment in enumerate(trial.treatments)}
    blocks = document["blocks"]
    return tuple(tuple(sorted(number[name] for name in blocks[block.name])) for block in trial.blocks)


def _pictures(
    trial: Trial, document: dict[str, Any], variances: NDArray[np.float64] | None
) -> Iterator[Picture]:
    if trial.t > MOST_PICTURED:
        return
    present = (incidence(_contents(trial, document), trial.t) > 0).astype(np.float64)
    yield picture(
        "Who meets whom",
        "Blocks that each pair of treatments shares. An even field of colour is what balance looks like.",
        present @ present.T,
        0,
    )
    if variances is not None:
        yield picture(
            "How well pairs compare",
            "Variance of each estimated difference in units of the plot variance: darker is less precise.",
            variances,
            2,
        )
