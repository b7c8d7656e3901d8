"""The rules of the file, from names to numbers."""

from __future__ import annotations

from collections.abc import Iterator

from search.trial.kinds import Items, Report, Section
from search.trial.names import Names
from search.trial.nodes import Node
from search.trial.records import Meeting, NotBeside, Replicate, Rules

EVERY = "every block"


def read_rules(section: Section | None, treatments: Names, blocks: Names, report: Report) -> Rules | None:
    """The rules, or None where the file has none.

    Parameters
    ----------
    section : the `rules` of the file as the grammar read them
    treatments, blocks : the names that rules may use
    report : where faults go
    """
    if section is None:
        return None
    return _RulesReader(section, treatments, blocks, report).rules()


class _RulesReader:
    def __init__(self, section: Section, treatments: Names, blocks: Names, report: Report) -> None:
        self.section = section
        self.treatments = treatments
        self.blocks = blocks
        self.report = report

    def rules(self) -> Rules:
        replicates, inside = self._replicates()
        outside = self._times(self.section.get("per_replicate", Section()), "rules.per_replicate")
        if (inside or outside) and not replicates:
            self.report.add(
                self.section.where.get("per_replicate"),
                "rules.per_replicate",
                "times in each replicate, but no replicates",
                "rules.replicates beside it",
            )
        return Rules(
            never_share_block=tuple(self._apart()),
            meet_at_least=tuple(self._meetings("meet_at_least")),
            meet_at_most=tuple(self._meetings("meet_at_most")),
            keep_out=tuple(self._keep_out()),
            must_hold=tuple(self._must_hold()),
            replicates=replicates,
            per_replicate=tuple(sorted({**inside, **outside}.items())),
            twice_in_block=self.section.get("twice_in_block", False),
            not_beside=self._not_beside(),
        )

    def _not_beside(self) -> NotBeside | None:
        section: Section | None = self.section.get("not_beside")
        if section is None:
            return None
        key, node = "rules.not_beside", self.section.where["not_beside"]
        pairs: list[tuple[int, int]] = []
        for number, names in enumerate(section.get("pairs", Items()), start=1):
            found = self._found(names, f"{key}.pairs[{number}]", self.treatments, self.blocks)
            pair = sorted({i for i, _ in found})
            if len(pair) == 2:
                pairs.append((pair[0], pair[1]))
        itself = section.get("itself", False)
        if not itself and "pairs" not in section.where:
            self.report.add(
                node,
                key,
                "nobody to keep apart",
                "pairs: [[A, B]], or itself: true, or both",
                "a rule about nobody would keep nothing",
            )
        if "plots_apart" in section.where and "distance_m" in section.where:
            self.report.add(node, key, "plots_apart and distance_m", "one of the two")
        return NotBeside(
            pairs=tuple(dict.fromkeys(pairs)),
            itself=itself,
            plots_apart=section.get("plots_apart", 1),
            distance_m=section.get("distance_m"),
        )

    def _found(
        self, names: Items, key: str, sort: Names, other: Names | None = None
    ) -> Iterator[tuple[int, Node]]:
        seen: set[int] = set()
        for name, node in zip(names, names.where, strict=True):
            number = sort.find(name, node, key, self.report, other)
            if number is None:
                continue
            if number in seen:
                self.report.add(node, key, f'"{name}" a second time', "each name once")
            seen.add(number)
            yield number, node

    def _apart(self) -> Iterator[tuple[int, ...]]:
        groups = self.section.get("never_share_block", Items())
        for number, names in enumerate(groups, start=1):
            key = f"rules.never_share_block[{number}]"
            yield tuple(i for i, _ in self._found(names, key, self.treatments, self.blocks))

    def _meetings(self, word: str) -> Iterator[Meeting]:
        value = self.section.get(word)
        if isinstance(value, int):
            yield Meeting(value)
            return
        for number, fields in enumerate(value or (), start=1):
            key = f"rules.{word}[{number}]"
            pair = [i for i, _ in self._found(fields.get("pair", Items()), f"{key}.pair", self.treatments)]
            if len(set(pair)) == 2 and "blocks" in fields:
                yield Meeting(fields["blocks"], (pair[0], pair[1]))

    def _keep_out(self) -> Iterator[tuple[int, int]]:
        section: Section = self.section.get("keep_out", Section())
        for name, blocks in section.items():
            key = f"rules.keep_out.{name}"
            i = self.treatments.find(name, section.key_at[name], key, self.report, self.blocks)
            for j, _ in self._found(blocks, key, self.blocks, self.treatments):
                if i is not None:
                    yield i, j

    def _must_hold(self) -> Iterator[tuple[int, int]]:
        section: Section = self.section.get("must_hold", Section())
        for name, treatments in section.items():
            key = f"rules.must_hold.{name}"
            if name == EVERY and EVERY not in self.blocks:
                into: list[int | None] = list(range(len(self.blocks.numbers)))
            else:
                into = [self.blocks.find(name, section.key_at[name], key, self.report, self.treatments)]
            for i, _ in self._found(treatments, key, self.treatments, self.blocks):
                yield from ((i, j) for j in into if j is not None)

    def _replicates(self) -> tuple[tuple[Replicate, ...], dict[int, int]]:
        section: Section = self.section.get("replicates", Section())
        replicates, times = [], {}
        home: dict[int, str] = {}
        for name, value in section.items():
            key = f"rules.replicates.{name}"
            if isinstance(value, Section):
                if name == "per_replicate":
                    times = self._times(value, key)
                else:
                    self.report.add(section.where[name], key, "a mapping", "a list of blocks [in, brackets]")
                continue
            blocks = []
            for j, node in self._found(value, key, self.blocks, self.treatments):
                if j in home:
                    self.report.add(
                        node,
                        key,
                        f"a block that is in {home[j]} already",
                        "each block in one replicate",
                        "a block cannot count towards two complete sets of treatments",
                    )
                home.setdefault(j, name)
                blocks.append(j)
            replicates.append(Replicate(name, tuple(blocks)))
        return tuple(replicates), times

    def _times(self, section: Section, key: str) -> dict[int, int]:
        found = {}
        for name, times in section.items():
            i = self.treatments.find(name, section.key_at[name], f"{key}.{name}", self.report, self.blocks)
            if i is not None:
                found[i] = times
        return found
