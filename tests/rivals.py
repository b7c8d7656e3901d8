"""Large impossible trials, drawn: a hundred harmless rules and one clash among them.

Which lines clash is planted, so that a test knows them.
"""

from __future__ import annotations

from random import Random
from typing import Any, NamedTuple

TREATMENTS, BLOCKS, PLOTS = 60, 30, 8
SORTS = ("counts", "clique", "held and kept out", "replicate", "meetings")


class Impossible(NamedTuple):
    """An impossible trial file.

    Parameters
    ----------
    sort : what clashes
    document : the file as data
    keys : where its clashing lines stand, as far as they are planted
    """

    sort: str
    document: dict[str, Any]
    keys: frozenset[str]


def impossible(seed: int) -> Impossible:
    """60 treatments on 240 plots in 30 blocks under about 120 rules, five kinds of clash in turn."""
    rng = Random(seed)
    sort = SORTS[seed % len(SORTS)]
    names = [f"T{i:02d}" for i in range(1, TREATMENTS + 1)]
    blocks = [f"bay {j}" for j in range(1, BLOCKS + 1)]
    pairs = [rng.sample(names[20:], 2) for _ in range(45)]
    rules: dict[str, Any] = {
        "never_share_block": [list(pair) for pair in {tuple(sorted(pair)) for pair in pairs}],
        "keep_out": {name: rng.sample(blocks[:20], 2) for name in rng.sample(names[20:], 20)},
        "must_hold": {block: rng.sample(names[10:20], 1) for block in rng.sample(blocks[20:], 10)},
        "meet_at_most": [
            {"pair": list(pair), "blocks": 3}
            for pair in {tuple(sorted(rng.sample(names[10:20], 2))) for _ in range(25)}
        ],
    }
    document: dict[str, Any] = {
        "trial": f"rivals {seed}",
        "treatments": {name: {} for name in names},
        "blocks": dict.fromkeys(blocks, PLOTS),
        "plots_each": [3, 5],
        "rules": rules,
    }
    keys = _CLASHES[sort](rng, names, blocks, document)
    return Impossible(sort, document, frozenset(keys))


def _counts(rng: Random, names: list[str], _: list[str], document: dict[str, Any]) -> set[str]:
    for name in rng.sample(names, 50):
        document["treatments"][name] = {"plots": 5}
    return set()  # any 49 of them would do: which are told is open


def _clique(rng: Random, names: list[str], _: list[str], document: dict[str, Any]) -> set[str]:
    group = rng.sample(names[:10], 9)
    document["rules"]["never_share_block"].insert(7, group)
    document["plots_each"] = [4, 5]
    return {"plots_each", "rules.never_share_block[8]", "rules.twice_in_block"}


def _held(rng: Random, names: list[str], blocks: list[str], document: dict[str, Any]) -> set[str]:
    name, block = rng.choice(names[:10]), rng.choice(blocks[:20])
    document["rules"]["must_hold"][block] = [name]
    document["rules"]["keep_out"][name] = [block]
    return {f"rules.must_hold.{block}[1]", f"rules.keep_out.{name}[1]"}


def _replicate(rng: Random, names: list[str], blocks: list[str], document: dict[str, Any]) -> set[str]:
    document["rules"]["replicates"] = {"north": blocks[:8]}
    return {"rules.replicates.north"}


def _meetings(rng: Random, names: list[str], _: list[str], document: dict[str, Any]) -> set[str]:
    pair = rng.sample(names[:10], 2)
    document["rules"]["meet_at_least"] = [{"pair": pair, "blocks": 4}]
    document["treatments"][pair[0]] = {"plots": 3}
    return {f"treatments.{pair[0]}.plots", "rules.meet_at_least[1]"}


_CLASHES = {
    "counts": _counts,
    "clique": _clique,
    "held and kept out": _held,
    "replicate": _replicate,
    "meetings": _meetings,
}
