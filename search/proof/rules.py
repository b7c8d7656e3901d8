"""Does the plan keep every rule? Asked of the trial's checker, and counted again here by hand."""

from __future__ import annotations

from collections import Counter
from collections.abc import Iterator

from search.proof.records import Finding, Refuted
from search.trial.checker import broken_rules
from search.trial.records import Contents, Rules, Trial

TOLD = 3
"""At most so many broken rules are spelled out."""


def counted(trial: Trial, contents: Contents) -> Finding:
    """Block sizes and replication, counted from the contents alone."""
    faults = list(_miscounts(trial, contents))
    if faults:
        raise Refuted(_listing(faults))
    return Finding(
        "counts",
        True,
        f"{sum(map(len, contents))} plots in {trial.b} blocks, and all of {trial.t} treatments have "
        "the plots they may have",
    )


def obeyed(trial: Trial, contents: Contents) -> Finding:
    """Every rule of the trial, by the trial's own checker."""
    broken = broken_rules(trial, contents)
    if broken:
        raise Refuted(_listing(list(broken)))
    number = _number_of_rules(trial.rules)
    said = {0: "the trial has no rules beyond its counts", 1: "the one rule of the trial holds"}
    return Finding("rules", True, said.get(number, f"every one of {number} rules holds"))


def _miscounts(trial: Trial, contents: Contents) -> Iterator[str]:
    for block, planted in zip(trial.blocks, contents, strict=True):
        least = 1 if block.may_be_emptier else block.plots
        if not least <= len(planted) <= block.plots:
            wanted = f"{least} to {block.plots}" if block.may_be_emptier else f"{block.plots}"
            yield f"{block.name} has {len(planted)} plots planted, not {wanted}"
        twice = [i for i, times in Counter(planted).items() if times > 1]
        if twice and not trial.rules.twice_in_block:
            yield f"{trial.treatments[twice[0]].name} stands more than once in {block.name}"
    plots = Counter(i for planted in contents for i in planted)
    for i, treatment in enumerate(trial.treatments):
        if not treatment.least <= plots[i] <= treatment.most:
            yield (f"{treatment.name} stands on {plots[i]} plots, not {treatment.least} to {treatment.most}")


def _number_of_rules(rules: Rules) -> int:
    return (
        len(rules.never_share_block)
        + len(rules.meet_at_least)
        + len(rules.meet_at_most)
        + len(rules.keep_out)
        + len(rules.must_hold)
        + len(rules.replicates)
        + len(rules.planted)
    )


def _listing(faults: list[str]) -> str:
    more = len(faults) - TOLD
    return "; ".join(faults[:TOLD]) + (f"; and {more} more" if more > 0 else "")
