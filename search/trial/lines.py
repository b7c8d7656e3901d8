"""A trial line by line: what each line of its file asks for, and the trial with some of them left out."""

from __future__ import annotations

from collections.abc import Collection
from dataclasses import replace
from typing import Any, TypeVar

from search.trial.reading_rules import EVERY
from search.trial.records import Meeting, Rules, Said, Trial

_T = TypeVar("_T")
FRAME = ("treatments", "blocks", "ground")
"""What a trial cannot do without: never left out."""


def demands(trial: Trial) -> tuple[Said, ...]:
    """What the file says, or leaves to a default, that narrows the choice of plans."""
    return tuple(
        said
        for said in trial.said
        if said.sort not in FRAME and not (said.sort == "twice_in_block" and trial.rules.twice_in_block)
    )


def only(trial: Trial, kept: Collection[Said]) -> Trial:
    """The trial with no other demands than these.

    Parameters
    ----------
    trial : the trial
    kept : some of its demands; a treatment without any on its plots has one or more
    """
    items: dict[str, set[int]] = {}
    for said in kept:
        items.setdefault(said.sort, set()).update(said.items)
    bound = items.get("plots", set()) | items.get("plots_each", set())
    treatments = tuple(
        treatment if i in bound else replace(treatment, least=1, most=max(1, trial.land))
        for i, treatment in enumerate(trial.treatments)
    )
    named = {said.sort for said in trial.said} & set(Rules.__slots__) - {"twice_in_block"}
    picked: dict[str, Any] = {sort: _picked(getattr(trial.rules, sort), items.get(sort)) for sort in named}
    twice = trial.rules.twice_in_block or "twice_in_block" not in items
    left_out = set(trial.rules.keep_out) - set(picked.get("keep_out", trial.rules.keep_out))
    rules = replace(trial.rules, **picked, twice_in_block=twice, unforced=tuple(sorted(left_out)))
    return replace(trial, treatments=treatments, rules=rules)


def _picked(rules: tuple[_T, ...], positions: set[int] | None) -> tuple[_T, ...]:
    return tuple(rule for i, rule in enumerate(rules) if positions and i in positions)


def place(trial: Trial, said: Said) -> str:
    """Where it stands, for a sentence."""
    if said.line:
        return f"line {said.line}"
    return "not in the file" if _by_default(trial, said) else said.key


def _by_default(trial: Trial, said: Said) -> bool:
    return said.line == 0 and (
        (said.sort == "plots_each" and trial.plots_each is None) or said.sort == "twice_in_block"
    )


def quoted(trial: Trial, said: Said) -> str:
    """What a line asks for, in the words of the file."""
    names = [treatment.name for treatment in trial.treatments]
    blocks = [block.name for block in trial.blocks]
    rules = trial.rules
    at = said.items[0] if said.items else 0
    match said.sort:
        case "treatments":
            return f"treatments: {trial.t} of them"
        case "blocks" | "ground":
            return f"{said.sort}: {trial.land} plots in {trial.b} blocks"
        case "plots":
            return f"{names[at]}: {{plots: {_range(trial, at)}}}"
        case "plots_each":
            ranges = sorted({_range(trial, i) for i in said.items})
            if _by_default(trial, said):
                return f"plots_each: as even as the plots allow, {' or '.join(ranges)}"
            return f"plots_each: {' or '.join(ranges)}"
        case "never_share_block":
            return f"never_share_block: [{_listed([names[i] for i in rules.never_share_block[at]])}]"
        case "meet_at_least" | "meet_at_most":
            meeting: Meeting = getattr(rules, said.sort)[at]
            if meeting.pair is None:
                return f"{said.sort}: {meeting.blocks}"
            pair = _listed([names[i] for i in meeting.pair])
            return f"{said.sort}: {{pair: [{pair}], blocks: {meeting.blocks}}}"
        case "keep_out":
            i, j = rules.keep_out[at]
            return f"keep_out: {{{names[i]}: [{blocks[j]}]}}"
        case "must_hold":
            i, j = rules.must_hold[at]
            block = EVERY if len(said.items) > 1 else blocks[j]
            return f"must_hold: {{{block}: [{names[i]}]}}"
        case "planted":
            planted = rules.planted[at]
            return f"planted: {{{planted.plot}: {names[planted.treatment]}}}"
        case "replicates":
            replicate = rules.replicates[at]
            return f"replicates: {{{replicate.name}: [{_listed([blocks[j] for j in replicate.blocks])}]}}"
        case "twice_in_block":
            return "twice_in_block: false"
    return said.key


def _range(trial: Trial, i: int) -> str:
    treatment = trial.treatments[i]
    same = treatment.least == treatment.most
    return str(treatment.least) if same else f"[{treatment.least}, {treatment.most}]"


def _listed(names: list[str], most: int = 6) -> str:
    return ", ".join(names if len(names) <= most else [*names[: most - 1], f"… {len(names)} in all"])
