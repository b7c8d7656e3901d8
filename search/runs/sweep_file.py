"""The sweep file: one trial, and the values to try in it.

    sweep: how many varieties, in which blocks
    base: ../first_trial.yaml                  # a file, seen from this one, or the trial itself
    vary:                                      # every combination is tried
      treatments: [8, 10, 12]                  # a dotted key of the trial: values to try
      blocks.plots: [4, 5]
      [treatments, St. Ives, plots]: [3, 4]    # a list of keys where a name holds a dot
    cases:                                     # named changes, each with every combination
      free:
      apart: {rules.never_share_block: [[T01, T02]]}

The last key of `vary` changes fastest; a list of such mappings is gone through one after another. A value
of nothing, or `~`, leaves its key out of the trial.
"""

from __future__ import annotations

from dataclasses import dataclass, replace
from itertools import product
from math import prod
from pathlib import Path

from search.foundation.errors import Fault, FaultyTrial, did_you_mean, shown
from search.runs.changes import Change, changed, dotted, in_short, is_nothing
from search.trial.catalogue import TRIAL_KEYS
from search.trial.kinds import MOST_NAME, Fields, Report, Schema, Text
from search.trial.nodes import Mapping, Node, Scalar, Sequence, describe, read_nodes
from search.trial.reading import trial_from_nodes
from search.trial.records import Trial

MOST_ROWS = 20_000
CASE = "case"


@dataclass(frozen=True, slots=True)
class SweepRow:
    """One combination: the trial it makes, or the faults that keep it from being one.

    Parameters
    ----------
    number : from 1, in the order of the file
    values : by column, each as it could be typed
    trial : None where the combination makes no trial
    faults : what is wrong with it
    """

    number: int
    values: dict[str, str]
    trial: Trial | None
    faults: tuple[Fault, ...] = ()


@dataclass(frozen=True, slots=True)
class Sweep:
    """A sweep as read.

    Parameters
    ----------
    name : of the sweep
    columns : what varies, in the order of the file; `case` first where there are cases
    rows : every combination
    """

    name: str
    columns: tuple[str, ...]
    rows: tuple[SweepRow, ...]


def read_sweep(path: str | Path) -> Sweep:
    """The sweep of a YAML file; combinations that make no trial are rows with their faults.

    Raises
    ------
    FaultyTrial : the sweep file or its base cannot be read, or something is wrong with every row alike
    """
    return _Reader(Path(path)).sweep()


@dataclass(frozen=True, slots=True)
class _Raw:
    """Any node, kept as it is."""

    def read(self, node: Node, key: str, report: Report) -> Node:
        return node

    def schema(self) -> Schema:
        return {}


SWEEP = Fields(
    {"sweep": Text(), "base": _Raw(), "vary": _Raw(), "cases": _Raw()},
    required=("sweep", "base"),
    slips={"trial": "base: the trial itself, or its file", "name": "sweep"},
)

Step = list[list[Change]]
"""For each key of one mapping the changes to choose from."""


class _Reader:
    """Reads one sweep file; faults are gathered and told together."""

    def __init__(self, path: Path) -> None:
        self.path = path
        self.report = Report(str(path))

    def sweep(self) -> Sweep:
        section = SWEEP.read(read_nodes(self.path), "", self.report)
        if section is None:
            raise FaultyTrial(self.report.faults)
        where = section.where
        if "vary" not in where and "cases" not in where:
            self.report.add(None, "vary", "nothing", "vary or cases", remedy="vary: {blocks.plots: [4, 5]}")
        steps = self.steps(where["vary"]) if "vary" in where else [[]]
        cases = self.cases(where["cases"]) if "cases" in where else {"": []}
        self.check_count(len(cases) * sum(prod(len(choices) for choices in step) for step in steps))
        base, file = self.base(where["base"]) if "base" in where else (None, "")
        if self.report.faults or base is None:
            raise FaultyTrial(self.report.faults)
        combinations = [
            (case, [*changes, *chosen])
            for case, changes in cases.items()
            for step in steps
            for chosen in product(*step)
        ]
        rows = tuple(
            self.row(number, base, file, case, changes)
            for number, (case, changes) in enumerate(combinations, 1)
        )
        self.check_rows(rows)
        columns = [choices[0].column for step in steps for choices in step]
        columns = [CASE, *columns] if "cases" in where else columns
        return Sweep(section["sweep"], tuple(dict.fromkeys(columns)), rows)

    def check_count(self, rows: int) -> None:
        if rows > MOST_ROWS:
            remedy = "fewer values, or mappings one after another in place of all combinations"
            self.report.add(None, "vary", f"{rows:,} combinations", f"at most {MOST_ROWS:,}", remedy=remedy)

    def check_rows(self, rows: tuple[SweepRow, ...]) -> None:
        """A fault of every row is a fault of the file."""
        common = [fault for fault in rows[0].faults if all(fault in row.faults for row in rows)]
        if common:
            raise FaultyTrial(common)

    # -- the parts of the file -------------------------------------------------------------------

    def base(self, node: Node) -> tuple[Mapping | None, str]:
        """The base trial's document and the file in which it stands."""
        root, file = node, str(self.path)
        if isinstance(node, Scalar) and not is_nothing(node):
            path = self.path.parent / node.text.strip()
            root, file = read_nodes(path), str(path)
        if isinstance(root, Mapping):
            return root, file
        self.report.add(node, "base", describe(root), "a trial, or the name of its file")
        return None, file

    def steps(self, node: Node) -> list[Step]:
        """The mappings of `vary`, one after another."""
        mappings = node.items if isinstance(node, Sequence) else (node,)
        if not mappings or any(isinstance(item, Mapping) and not item.pairs for item in mappings):
            self.report.add(node, "vary", "nothing", "keys of the trial, each with a list of values")
        return [self.step(mapping) for mapping in mappings]

    def step(self, node: Node) -> Step:
        listed = self.changes(node, "vary")
        step = [
            [Change(change.path, change.key, value) for value in self.values(change)] for change in listed
        ]
        return [choices for choices in step if choices]

    def values(self, listed: Change) -> tuple[Node, ...]:
        node = listed.value
        if isinstance(node, Sequence) and node.items:
            return node.items
        remedy = f"[{in_short(node)}]" if not is_nothing(node) else ""
        self.report.add(node, f"vary.{listed.column}", describe(node), "a list of values", remedy=remedy)
        return ()

    def cases(self, node: Node) -> dict[str, list[Change]]:
        """Named changes; a name with nothing is the base as it stands."""
        cases: dict[str, list[Change]] = {}
        if not isinstance(node, Mapping) or not node.pairs:
            self.report.add(node, "cases", describe(node), "names with changes, `name: {key: value}`")
            return cases
        for name_node, listed in node.pairs:
            name = Text().read(name_node, "cases", self.report)
            if name in cases:
                self.report.add(name_node, f"cases.{name}", "the name a second time", "each name once")
            elif name is not None:
                cases[name] = [] if is_nothing(listed) else self.changes(listed, f"cases.{name}")
        return cases

    def changes(self, node: Node, key: str) -> list[Change]:
        """The keys of a mapping with what stands under them."""
        if not isinstance(node, Mapping):
            self.report.add(node, key, describe(node), "keys of the trial with values")
            return []
        found: dict[tuple[str, ...], Change] = {}
        for key_node, value in node.pairs:
            path = self.path_of(key_node, key)
            if path in found:
                self.report.add(key_node, f"{key}.{dotted(path)}", "the key a second time", "each key once")
            elif path:
                found[path] = Change(path, key_node, value)
        return list(found.values())

    def path_of(self, node: Node, key: str) -> tuple[str, ...]:
        """The keys that lead to a place of the trial; empty after a fault was told."""
        path: tuple[str, ...] = ()
        if isinstance(node, Scalar):
            path = tuple(part.strip() for part in node.text.split("."))
        elif isinstance(node, Sequence):
            path = tuple(item.text.strip() if isinstance(item, Scalar) else "" for item in node.items)
        if not path or not all(path):
            remedy = "blocks.plots, or [treatments, St. Ives, plots] where a name holds a dot"
            self.report.add(node, key, describe(node), "a dotted key, or a list of keys", remedy=remedy)
            return ()
        if path[0] not in TRIAL_KEYS:
            must = "it begins with one of: " + ", ".join(TRIAL_KEYS)
            remedy = did_you_mean(path[0], TRIAL_KEYS)
            self.report.add(node, key, f"the key {shown(path[0])}", must, remedy=remedy)
            return ()
        return path

    # -- rows ------------------------------------------------------------------------------------

    def row(self, number: int, base: Mapping, file: str, case: str, changes: list[Change]) -> SweepRow:
        """One combination as a trial, or with its faults."""
        values = {CASE: case} if case else {}
        values |= {change.column: in_short(change.value) for change in changes}
        document = base
        try:
            for change in changes:
                document = changed(document, change)
            trial = trial_from_nodes(document, file)
        except FaultyTrial as error:
            return SweepRow(number, values, None, tuple(self.placed(x, changes) for x in error.faults))
        return SweepRow(number, values, replace(trial, name=_name(trial.name, values)))

    def placed(self, fault: Fault, changes: list[Change]) -> Fault:
        """A fault of a value that stands in this file names this file."""
        here = any(change.concerns(fault) for change in changes)
        return replace(fault, file=str(self.path)) if here else fault


def _name(base: str, values: dict[str, str]) -> str:
    """The name under which a row is kept."""
    words = ", ".join(value if column == CASE else f"{column} {value}" for column, value in values.items())
    return f"{base}: {words}"[:MOST_NAME]
