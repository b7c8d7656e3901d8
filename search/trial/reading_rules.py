"""The rules of the file, from names to numbers."""

from __future__ import annotations

from collections.abc import Iterator

from search.foundation.errors import shown
from search.trial.kinds import Items, Report, Section
from search.trial.names import Names
from search.trial.nodes import Node
from search.trial.records import Meeting, NotBeside, Replicate, Rules, Said

EVERY = "every block"


def read_rules(
    section: Section, treatments: Names, blocks: Names, report: Report
) -> tuple[Rules, tuple[Said, ...]]:
    """The rules, and where the file says which.

    Parameters
    ----------
    section : the `rules` of the file as the grammar read them
    treatments, blocks : the names that rules may use
    report : where faults go
    """
    reader = _RulesReader(section, treatments, blocks, report)
    return reader.rules(), tuple(reader.said)


class _RulesReader:
    def __init__(self, section: Section, treatments: Names, blocks: Names, report: Report) -> None:
        self.section = section
        self.treatments = treatments
        self.blocks = blocks
        self.report = report
        self.said: list[Said] = []

    def rules(self) -> Rules:
        replicates, inside = self._replicates()
        outside = self._times(self.section.get("per_replicate", Section()), "rules.per_replicate")
        if (inside or outside) and not replicates:
            self.report.add(
                self.section.where.get("per_replicate"),
                "rules.per_replicate",
                "times in each replicate, but no replicates",
                "rules.replicates beside it",
                remedy="name the replicates too, or give the treatment its plots: {plots: 6}",
            )
        self._say("twice_in_block", (), "rules.twice_in_block", self.section.key_at.get("twice_in_block"))
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
            why = "a rule about nobody would keep nothing"
            remedy = "pairs: [[A, B]], or itself: true, or both"
            self.report.add(node, key, "nobody to keep apart", "treatments to keep apart", why, remedy)
        if "plots_apart" in section.where and "distance_m" in section.where:
            found_both, remedy = "plots_apart and distance_m", "leave one of them out"
            self.report.add(node, key, found_both, "one of the two", remedy=remedy)
        return NotBeside(
            pairs=tuple(dict.fromkeys(pairs)),
            itself=itself,
            plots_apart=section.get("plots_apart", 1),
            distance_m=section.get("distance_m"),
        )

    def _say(self, sort: str, items: tuple[int, ...], key: str, node: Node | None) -> None:
        line, column = (node.line, node.column) if node is not None else (0, 0)
        self.said.append(Said(sort, items, key, line, column))

    def _found(
        self, names: Items, key: str, sort: Names, other: Names | None = None
    ) -> Iterator[tuple[int, Node]]:
        seen: set[int] = set()
        for name, node in zip(names, names.where, strict=True):
            number = sort.find(name, node, key, self.report, other)
            if number is None:
                continue
            if number in seen:
                why = "one of the two was probably meant to be another name"
                found = f"{shown(name)} a second time"
                self.report.add(node, key, found, "each name once", why, "delete it, or name the other one")
            seen.add(number)
            yield number, node

    def _apart(self) -> Iterator[tuple[int, ...]]:
        groups = self.section.get("never_share_block", Items())
        for number, names in enumerate(groups, start=1):
            key = f"rules.never_share_block[{number}]"
            self._say("never_share_block", (number - 1,), key, groups.where[number - 1])
            yield tuple(i for i, _ in self._found(names, key, self.treatments, self.blocks))

    def _meetings(self, word: str) -> Iterator[Meeting]:
        value = self.section.get(word)
        if isinstance(value, int):
            self._say(word, (0,), f"rules.{word}", self.section.key_at[word])
            yield Meeting(value)
            return
        pairs: dict[frozenset[int], int] = {}
        value = value or Items()
        for number, fields in enumerate(value, start=1):
            key = f"rules.{word}[{number}]"
            pair = [i for i, _ in self._found(fields.get("pair", Items()), f"{key}.pair", self.treatments)]
            if len(set(pair)) == 2 and "blocks" in fields:
                node = value.where[number - 1]
                if frozenset(pair) in pairs:
                    before = pairs[frozenset(pair)]
                    why = "of two numbers for one pair only one can be meant"
                    found, remedy = (
                        "this pair a second time",
                        f"delete one; the first stands in line {before}",
                    )
                    self.report.add(node, key, found, "each pair once", why, remedy)
                pairs.setdefault(frozenset(pair), node.line)
                self._say(word, (number - 1,), key, node)
                yield Meeting(fields["blocks"], (pair[0], pair[1]))

    def _keep_out(self) -> Iterator[tuple[int, int]]:
        section: Section = self.section.get("keep_out", Section())
        position = 0
        for name, blocks in section.items():
            key = f"rules.keep_out.{name}"
            i = self.treatments.find(name, section.key_at[name], key, self.report, self.blocks)
            if i is None and name in self.blocks:
                continue  # turned round: the names behind it are, too
            found = self._found(blocks, key, self.blocks, self.treatments)
            for number, (j, node) in enumerate(found, start=1):
                if i is not None:
                    self._say("keep_out", (position,), f"{key}[{number}]", node)
                    position += 1
                    yield i, j

    def _must_hold(self) -> Iterator[tuple[int, int]]:
        section: Section = self.section.get("must_hold", Section())
        position = 0
        for name, treatments in section.items():
            key = f"rules.must_hold.{name}"
            if name == EVERY and EVERY not in self.blocks:
                into = list(range(len(self.blocks.numbers)))
            else:
                j = self.blocks.find(name, section.key_at[name], key, self.report, self.treatments)
                if j is None and name in self.treatments:
                    continue  # turned round: the names behind it are, too
                into = [] if j is None else [j]
            found = self._found(treatments, key, self.treatments, self.blocks)
            for number, (i, node) in enumerate(found, start=1):
                self._say("must_hold", tuple(range(position, position + len(into))), f"{key}[{number}]", node)
                position += len(into)
                yield from ((i, j) for j in into)

    def _replicates(self) -> tuple[tuple[Replicate, ...], dict[int, int]]:
        section: Section = self.section.get("replicates", Section())
        times: dict[int, int] = {}
        replicates: list[Replicate] = []
        home: dict[int, str] = {}
        for name, value in section.items():
            key = f"rules.replicates.{name}"
            if name == "per_replicate":
                times = self._times(value, key)
                continue
            blocks = []
            for j, node in self._found(value, key, self.blocks, self.treatments):
                if j in home:
                    self.report.add(
                        node,
                        key,
                        f"a block that is in {shown(home[j])} already",
                        "each block in one replicate",
                        "a block cannot count towards two complete sets of treatments",
                        "leave it in one of the two",
                    )
                home.setdefault(j, name)
                blocks.append(j)
            self._say("replicates", (len(replicates),), key, section.key_at[name])
            replicates.append(Replicate(name, tuple(blocks)))
        return tuple(replicates), times

    def _times(self, section: Section, key: str) -> dict[int, int]:
        found = {}
        for name, times in section.items():
            i = self.treatments.find(name, section.key_at[name], f"{key}.{name}", self.report, self.blocks)
            if i is not None:
                found[i] = times
        return found
