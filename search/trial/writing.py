"""A trial as plain data in the form of a trial file, every default filled in."""

from __future__ import annotations

from collections.abc import Iterable
from fractions import Fraction
from typing import Any

from search.trial.listing import table_lines
from search.trial.reading_rules import EVERY
from search.trial.records import (
    Aim,
    AimKind,
    Block,
    Ground,
    Meeting,
    NotBeside,
    Rules,
    Treatment,
    Trial,
    Wanted,
)


def trial_document(trial: Trial) -> dict[str, Any]:
    """The trial as JSON data from which `trial_from_document` reads an equal one."""
    names = [treatment.name for treatment in trial.treatments]
    blocks = [block.name for block in trial.blocks]
    document: dict[str, Any] = {
        "trial": trial.name,
        "about": dict(trial.about),
        "treatments": {treatment.name: _treatment(treatment) for treatment in trial.treatments},
    }
    if trial.wanted is not None:
        document["blocks"] = {"wanted": _wanted(trial.wanted)}
    elif trial.ground is None or trial.may_be_emptier:
        # Beside a map only what it does not show: which blocks may stay partly empty.
        named = [block for block in trial.blocks if trial.ground is None or block.may_be_emptier]
        document["blocks"] = {block.name: _size(block) for block in named}
    if trial.plots_each is not None:
        document["plots_each"] = list(trial.plots_each)
    document["rules"] = _rules(trial.rules, names, blocks)
    if trial.wanted is not None and "must_hold" in document["rules"]:
        # Bays that are not cut yet have no rules of their own, whatever their number will be.
        document["rules"]["must_hold"] = {EVERY: next(iter(document["rules"]["must_hold"].values()))}
    if trial.ground is not None:
        document["ground"] = written_ground(trial.ground, blocks)
    document["aim"] = _aim(trial.aim, names)
    if trial.blocks_random is not None:
        document["blocks_random"] = _number(trial.blocks_random)
    for key, part in (
        ("search", trial.search),
        ("randomise", trial.randomise),
        ("precision", trial.precision),
        ("packet", trial.packet),
    ):
        document[key] = _settings(part)
    return document


def _settings(record: Any) -> dict[str, Any]:
    values = {name: getattr(record, name) for name in record.__slots__}
    return {name: value for name, value in values.items() if value not in (None, "")}


def _size(block: Block) -> int | dict[str, int]:
    return {"at_most": block.plots} if block.may_be_emptier else block.plots


def _treatment(treatment: Treatment) -> dict[str, Any]:
    settings: dict[str, Any] = {}
    if treatment.own_range:
        settings["plots"] = [treatment.least, treatment.most]
    if treatment.control:
        settings["control"] = True
    if treatment.caution:
        settings["caution"] = treatment.caution
    if treatment.amount is not None:
        settings["amount"] = {"per_plot": treatment.amount.per_plot, "unit": treatment.amount.unit}
    return settings


def _rules(rules: Rules, names: list[str], blocks: list[str]) -> dict[str, Any]:
    document: dict[str, Any] = {
        "never_share_block": [[names[i] for i in group] for group in rules.never_share_block],
        "meet_at_least": _meetings(rules.meet_at_least, names),
        "meet_at_most": _meetings(rules.meet_at_most, names),
        "keep_out": _lists((names[i], blocks[j]) for i, j in rules.keep_out),
        "must_hold": _lists((blocks[j], names[i]) for i, j in rules.must_hold),
        "replicates": {rep.name: [blocks[j] for j in rep.blocks] for rep in rules.replicates},
        "per_replicate": {names[i]: times for i, times in rules.per_replicate},
    }
    document = {word: value for word, value in document.items() if value not in ([], {})}
    document["twice_in_block"] = rules.twice_in_block
    if rules.not_beside is not None:
        document["not_beside"] = _not_beside(rules.not_beside, names)
    if rules.planted:
        document["planted"] = {str(x.plot): names[x.treatment] for x in rules.planted}
    return document


def _not_beside(rule: NotBeside, names: list[str]) -> dict[str, Any]:
    document: dict[str, Any] = {"itself": rule.itself}
    if rule.pairs:
        document["pairs"] = [[names[i], names[j]] for i, j in rule.pairs]
    if rule.distance_m is None:
        document["plots_apart"] = rule.plots_apart
    else:
        document["distance_m"] = rule.distance_m
    return document


def _wanted(wanted: Wanted) -> dict[str, Any]:
    document: dict[str, Any] = {}
    if wanted.count is not None:
        document["count"] = wanted.count
    if wanted.plots is not None:
        document["plots"] = list(wanted.plots)
    return document


def _meetings(meetings: tuple[Meeting, ...], names: list[str]) -> int | list[dict[str, Any]]:
    if len(meetings) == 1 and meetings[0].pair is None:
        return meetings[0].blocks
    return [
        {"pair": [names[i] for i in meeting.pair or ()], "blocks": meeting.blocks} for meeting in meetings
    ]


def _lists(pairs: Iterable[tuple[str, str]]) -> dict[str, list[str]]:
    lists: dict[str, list[str]] = {}
    for key, value in pairs:
        lists.setdefault(key, []).append(value)
    return lists


def written_ground(ground: Ground, blocks: list[str]) -> dict[str, Any]:
    """The ground as JSON data; its blocks have the names given."""
    document: dict[str, Any] = {
        "gap_m": list(ground.gap_m),
        "numbering": {"start": ground.numbering.start, "way": ground.numbering.way},
    }
    if ground.spots:
        document["places"] = "\n".join(table_lines(ground.spots, blocks))
    else:
        document["rows"] = "\n".join(ground.rows)
    if ground.letters:
        document["names"] = {letter: blocks[j] for letter, j in ground.letters}
    if ground.plot_m is not None:
        document["plot_m"] = list(ground.plot_m)
    if ground.north_deg is not None:
        document["north_deg"] = ground.north_deg
    if ground.corner is not None:
        document["corner"] = list(ground.corner)
    return document


def _aim(aim: Aim, names: list[str]) -> str | dict[str, Any]:
    if aim.kind is not AimKind.CONTRASTS:
        return aim.kind.value
    return {
        "contrasts": {
            contrast.label: {
                "weight": _number(contrast.weight),
                "of": {names[i]: _number(c) for i, c in contrast.of},
            }
            for contrast in aim.contrasts
        }
    }


def _number(x: Fraction) -> int | str:
    return int(x) if x.denominator == 1 else f"{x.numerator}/{x.denominator}"
