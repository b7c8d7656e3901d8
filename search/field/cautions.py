"""What the crew must know to come home well, and what the office must know to trust the plan."""

from __future__ import annotations

from collections import Counter
from collections.abc import Iterator
from typing import Any

from search.field.wording import clean, counted, listed
from search.runs.cautions import ENOUGH_DF, MANY_PLOTS
from search.trial.limits import limits
from search.trial.records import AimKind, Trial

FIRST = (
    "Labels, local rules and licensed advisers come first",
    "Where this paper says otherwise, follow them.",
)
USUAL = (
    (
        "Treated seed",
        "Wear the gloves and mask that its label asks for. Wash before you eat, drink or smoke. Cover "
        "every seed with soil, and keep it from people, stock and birds.",
    ),
    (
        "Plant protection products",
        "Only those allowed for this crop and use, at the dose on the label, by trained people with the "
        "protection it asks for. Mind wind, water and neighbours. Keep everybody out until the re-entry "
        "interval has passed.",
    ),
    (
        "Machinery",
        "Guards on, nobody between drill and tractor, nobody riding along. Stop the engine and take the "
        "key before you reach into anything that turns.",
    ),
)

WIDE_GAP_PERCENT = 1.0


def office_notes(trial: Trial, document: dict[str, Any]) -> tuple[str, ...]:
    """Warnings about the statistics of a plan, for those who will analyse it.

    Parameters
    ----------
    trial : the trial
    document : its plan as in plan.json
    """
    return tuple(_notes(trial, document))


def _notes(trial: Trial, document: dict[str, Any]) -> Iterator[str]:
    plots = Counter(plot["treatment"] for plot in document["plots"])
    df, gap = document["score"]["residual_df"], document["gap_percent"]
    if not document["score"]["connected"]:
        yield "The plan is disconnected: " + (
            "not every difference between treatments can be estimated."
            if trial.blocks_random is None
            else "some differences are told by block totals alone, and an analysis with fixed blocks "
            "cannot estimate them."
        )
    if df < ENOUGH_DF:
        yield (
            f"{counted(df, 'residual degree')} of freedom: fewer than {ENOUGH_DF}, which EPPO standard "
            "PP 1/152 asks of efficacy trials and which is a good habit elsewhere."
        )
    alone = [clean(x.name) for x in trial.treatments if plots[x.name] == 1]
    if alone:
        yield f"On one plot only: {listed(alone)}. One lost plot loses the treatment."
    if trial.aim.kind is AimKind.AGAINST_CONTROL:
        yield from _weak_controls(trial, plots)
    large = [clean(block.name) for block in trial.blocks if block.plots > MANY_PLOTS]
    if large:
        yield (
            f"Over {MANY_PLOTS} plots in {listed(large)}: soil is seldom even over so wide a block; "
            "smaller blocks may be worth their cost."
        )
    pinned = _pinned(trial)
    if pinned:
        yield f"The rules leave no choice in the number of plots of {listed(pinned)}."
    yield from _restricted(document["layout"].get("restriction"))
    if gap is not None and gap > WIDE_GAP_PERCENT:
        yield (
            f"The gap between plan and bound is {gap:.2f} %: a longer search may find a better plan, "
            "or the bound may be loose."
        )


def _restricted(restriction: dict[str, Any] | None) -> Iterator[str]:
    """What a rule about neighbours does to the randomisation."""
    if restriction is None:
        return
    yield (
        "The layout was drawn under the rule not_beside, so the tests of the analysis are only approximately "
        f"valid. It was {clean(restriction['told'])}."
    )
    plots: dict[str, list[str]] = {}
    for pair in restriction["never"]:
        plots.setdefault(clean(pair["treatment"]), []).append(str(pair["plot"]))
    if plots:
        told = [f"{name} (plot {listed(numbers)})" for name, numbers in plots.items()]
        yield f"With the blocks as drawn these can never stand on a plot of their block: {listed(told)}."
    if not restriction["never_complete"]:
        yield "Not every plot was searched for treatments that the rule keeps off it for good."


def _weak_controls(trial: Trial, plots: Counter[str]) -> Iterator[str]:
    rest = [plots[x.name] for x in trial.treatments if not x.control]
    usual = sum(rest) / max(1, len(rest))
    for control in (x.name for x in trial.treatments if x.control):
        if plots[control] < usual:
            yield (
                f"The control {clean(control)} has {counted(plots[control], 'plot')}, the others "
                f"{usual:.1f} on average: every comparison of this aim leans on the control."
            )


def _pinned(trial: Trial) -> list[str]:
    """Treatments whose number of plots the rules fix where the stated range would leave a choice."""
    implied = limits(trial)
    return [
        f"{clean(treatment.name)} ({least})"
        for treatment, least, most in zip(
            trial.treatments, implied.least.tolist(), implied.most.tolist(), strict=True
        )
        if treatment.least < treatment.most and least == most
    ]
