"""Every key that a trial file may have, in the order in which a planner meets them."""

from __future__ import annotations

from dataclasses import dataclass
from typing import Any

from search.trial.kinds import (
    Choice,
    Either,
    Fields,
    Flag,
    Kind,
    Lines,
    Listing,
    Number,
    Ratio,
    Report,
    Schema,
    Table,
    Text,
    Whole,
)
from search.trial.nodes import Mapping, Node, Scalar, describe
from search.trial.records import AimKind

MOST_TREATMENTS = 5_000
MOST_BLOCKS = 5_000
MOST_PLOTS = 100_000
MOST_APART = 20
"""Plots; who wants more apart wants them in other blocks."""
MOST_CELLS = 2_500_000
"""Treatments times blocks: tables of that size still fit into a small machine."""

COUNT = Whole(1, MOST_PLOTS)
PAIR = Listing(Text(), 2, 2)
RANGE = Either("a number of plots, or [least, most]", scalar=COUNT, sequence=Listing(COUNT, 2, 2))

TREATMENT = Fields(
    {
        "plots": RANGE,
        "control": Flag(),
        "caution": Text(500),
        "amount": Fields({"per_plot": Number(0, 1e9, above=True), "unit": Text(40)}, ("per_plot", "unit")),
    },
    slips={"reps": "plots", "replicates": "plots", "replication": "plots", "plot": "plots"},
)


SIZE = Either(
    "a number of plots, or {at_most: a number}",
    scalar=COUNT,
    mapping=Fields({"at_most": COUNT}, ("at_most",), slips={"up_to": "at_most", "most": "at_most"}),
)


@dataclass(frozen=True, slots=True)
class BlocksKind:
    """Names with sizes, or so many blocks of one size; the words of the second form are reserved."""

    named: Kind = Table(SIZE, 1, MOST_BLOCKS)
    alike: Kind = Fields({"count": Whole(1, MOST_BLOCKS), "plots": SIZE}, ("count", "plots"))
    cut: Kind = Fields(
        {"wanted": Fields({"plots": RANGE, "count": Whole(1, MOST_BLOCKS)}, one_of=("plots", "count"))},
        ("wanted",),
    )

    def read(self, node: Node, key: str, report: Report) -> Any:
        words = set()
        if isinstance(node, Mapping):
            words = {k.text.strip() for k, _ in node.pairs if isinstance(k, Scalar)}
        if "wanted" in words:
            return self.cut.read(node, key, report)
        return (self.alike if words & {"count", "plots"} else self.named).read(node, key, report)

    def schema(self) -> Schema:
        named = self.named.schema()
        named["propertyNames"]["not"] = {"enum": ["count", "plots", "wanted"]}
        return {"anyOf": [self.alike.schema(), self.cut.schema(), named]}


BLOCKS = BlocksKind()

MEETINGS = Either(
    "a list of {pair: [A, B], blocks: n}, or one number for every pair",
    scalar=Whole(0, MOST_BLOCKS),
    sequence=Listing(Fields({"pair": PAIR, "blocks": Whole(0, MOST_BLOCKS)}, ("pair", "blocks"))),
)


@dataclass(frozen=True, slots=True)
class ReplicatesKind:
    """Names with lists of blocks; a number here is a slip of its own."""

    table: Kind = Table(Listing(Text(), 1), reserved={"per_replicate": Table(COUNT)})

    def read(self, node: Node, key: str, report: Report) -> Any:
        if isinstance(node, Scalar) and not node.nothing:
            report.add(
                node,
                key,
                describe(node),
                "names with lists of blocks",
                remedy="plots_each says how many plots a treatment has; here: name: [blocks]",
            )
            return None
        return self.table.read(node, key, report)

    def schema(self) -> Schema:
        return self.table.schema()


RULES = Fields(
    {
        "never_share_block": Listing(Listing(Text(), 2)),
        "meet_at_least": MEETINGS,
        "meet_at_most": MEETINGS,
        "keep_out": Table(Listing(Text(), 1)),
        "must_hold": Table(Listing(Text(), 1)),
        "replicates": ReplicatesKind(),
        "per_replicate": Table(COUNT),
        "twice_in_block": Flag(),
        "not_beside": Fields(
            {
                "pairs": Listing(PAIR, 1),
                "itself": Flag(),
                "plots_apart": Whole(1, MOST_APART),
                "distance_m": Number(0, 1000, above=True),
            }
        ),
        "planted": Table(Text(), 1, MOST_PLOTS),
    },
    slips={
        "reps": "plots_each, at the top of the file",
        "replication": "plots_each, at the top of the file",
    },
)

GROUND = Fields(
    {
        "plot_m": Listing(Number(0, 1000, above=True), 2, 2),
        "gap_m": Listing(Number(0, 1000), 2, 2),
        "rows": Lines(4 * MOST_PLOTS),
        "file": Text(1000),
        "places": Lines(300 * MOST_PLOTS),
        "names": Table(Text()),
        "numbering": Fields(
            {
                "start": Choice(("bottom left", "bottom right", "top left", "top right")),
                "way": Choice(("serpentine", "same way")),
            }
        ),
        "north_deg": Number(-360, 360),
        "corner": Listing(Number(-180, 180), 2, 2),
    },
    one_of=("rows", "file", "places"),
)

AIM = Either(
    "an aim, or {contrasts: …}",
    scalar=Choice(tuple(kind.value for kind in AimKind if kind is not AimKind.CONTRASTS)),
    mapping=Fields(
        {
            "contrasts": Table(
                Fields({"weight": Ratio(positive=True), "of": Table(Ratio(), least=2)}, ("of",)),
                least=1,
                most=1000,
            )
        },
        ("contrasts",),
    ),
)

TRIAL_KEYS: dict[str, Kind] = {
    "trial": Text(),
    "about": Table(Text(500), most=100),
    "treatments": Either(
        "a list of names, a number, or name: settings",
        scalar=Whole(2, MOST_TREATMENTS),
        sequence=Listing(Text(), 2, MOST_TREATMENTS),
        mapping=Table(TREATMENT, 2, MOST_TREATMENTS, empty={}),
    ),
    "blocks": BLOCKS,
    "plots_each": RANGE,
    "rules": RULES,
    "ground": GROUND,
    "aim": AIM,
    "search": Fields(
        {
            "seconds": Number(0, 1e7, above=True),
            "moves": Whole(1, 10**15),
            "seed": Whole(0, 2**63 - 1),
            "workers": Whole(1, 1024),
        }
    ),
    "randomise": Fields({"seed": Whole(0, 2**63 - 1), "sites": Whole(1, 100)}),
    "precision": Fields(
        {
            "cv_percent": Number(0, 1000, above=True),
            "mean": Number(0, 1e9, above=True),
            "unit": Text(40),
            "difference": Number(0, 1e9, above=True),
            "level_percent": Number(0.01, 50),
            "power_percent": Number(5, 99.99),
        }
    ),
    "packet": Fields(
        {
            "paper": Choice(("A4", "letter")),
            "spare_bags": Whole(0, 1000),
            "labels": Choice(("sheet", "single")),
            "blind": Flag(),
        }
    ),
    "blocks_random": Ratio(positive=True),
}

TRIAL = Fields(
    TRIAL_KEYS,
    required=("trial", "treatments"),
    slips={
        **dict.fromkeys(RULES.kinds, "set it in under rules:"),
        "reps": "plots_each: the number of plots for each treatment",
        "replicates": "plots_each for a number of plots, rules.replicates for groups of blocks",
        "varieties": "treatments",
        "bays": "blocks",
        "name": "trial",
        "plots": "plots_each",
        "title": "trial",
        "lines": "treatments",
        "entries": "treatments",
        "genotypes": "treatments",
        "field": "ground",
        "map": "ground",
        "constraints": "rules",
        "criterion": "aim",
        "goal": "aim",
        "replication": "plots_each: the number of plots for each treatment",
        "replications": "plots_each: the number of plots for each treatment",
    },
    one_of=("blocks", "ground"),
)
