"""From a trial file to a `Trial`: names become numbers, defaults are filled in, every fault is told."""

from __future__ import annotations

from collections import Counter
from collections.abc import Iterator
from dataclasses import replace
from fractions import Fraction
from pathlib import Path
from typing import Any

from search.foundation.errors import shown
from search.trial.catalogue import MOST_CELLS, MOST_PLOTS, TRIAL
from search.trial.drawing import EMPTY, read_ground
from search.trial.even import even_ranges
from search.trial.kinds import Report, Section
from search.trial.names import Names, plain
from search.trial.nodes import Node, nodes_of, read_nodes
from search.trial.planted import read_planted
from search.trial.reading_rules import EVERY, read_rules
from search.trial.records import (
    Aim,
    AimKind,
    Amount,
    Block,
    Contrast,
    Ground,
    NotBeside,
    PacketSettings,
    Precision,
    Randomise,
    Rules,
    Said,
    SearchSettings,
    Treatment,
    Trial,
    Wanted,
)
from search.trial.wanted import bays, read_wanted

WIDEST_RATIO = 1000
"""Of the variances of blocks and plots, either way: beyond, floats cannot tell such a plan from its limit."""


def read_trial(path: str | Path) -> Trial:
    """The trial of a YAML file.

    Raises
    ------
    FaultyTrial : with every fault of the file
    """
    path = Path(path)
    return trial_from_nodes(read_nodes(path), str(path))


def trial_from_document(document: Any) -> Trial:
    """The trial of plain JSON data in the form of a trial file.

    Raises
    ------
    FaultyTrial : with every fault of the data
    """
    return trial_from_nodes(nodes_of(document), "")


def trial_from_nodes(root: Node, file: str) -> Trial:
    """The trial of a parsed document.

    Raises
    ------
    FaultyTrial : with every fault of the document
    """
    report = Report(file)
    section = TRIAL.read(root, "", report)
    trial = _Reader(section, report).trial() if section is not None else None
    if trial is None or report.faults:
        raise report.faulty()
    return trial


class _Reader:
    """Builds the trial part by part; a part that cannot be built has left a fault behind."""

    def __init__(self, section: Section, report: Report) -> None:
        self.section = section
        self.report = report
        self.plots_each = self._range(section, "plots_each", "plots_each")

    def trial(self) -> Trial | None:
        names = self._treatment_names()
        bare = "wanted" in self.section.get("blocks", ())
        ground, blocks = read_ground(self.section.get("ground"), self.report, bare)
        wanted = self._wanted(ground) if bare else None
        blocks = self._bays(wanted, ground) if bare else self._blocks(blocks)
        if names is None or blocks is None or not self._in_reach(len(names), len(blocks)):
            return None
        treatments = Names("treatment", names)
        bays = Names("block", [block.name for block in blocks])
        rules, said = read_rules(self.section.get("rules", Section()), treatments, bays, self.report)
        if wanted is None:
            rules, said = self._planted(rules, said, treatments, ground, blocks)
        self._fits_ground(rules, ground, wanted)
        settings = self.section.get("treatments")
        settings = settings if isinstance(settings, Section) else Section()
        plants = self._treatments(names, settings, blocks, rules)
        aim = self._aim(treatments, plants)
        self._power()
        return Trial(
            name=self.section.get("trial", ""),
            treatments=plants,
            blocks=blocks,
            rules=rules,
            even="plots_each" not in self.section and any(not x.own_range for x in plants),
            plots_each=self.plots_each,
            aim=aim,
            blocks_random=self._blocks_random(),
            ground=ground,
            wanted=wanted,
            about=tuple(self.section.get("about", {}).items()),
            search=SearchSettings(**self.section.get("search", {})),
            randomise=Randomise(**self.section.get("randomise", {})),
            precision=Precision(**self.section.get("precision", {})),
            packet=PacketSettings(**self.section.get("packet", {})),
            file=self.report.file,
            said=(*self._frame(plants), *said),
        )

    def _frame(self, treatments: tuple[Treatment, ...]) -> Iterator[Said]:
        """Where the file says how many plots there are, and how many each treatment has."""
        section = self.section
        for word in ("treatments", "ground" if "blocks" not in section else "blocks"):
            node = section.key_at[word]
            yield Said(word, (), word, node.line, node.column)
        settings: Section = section.get("treatments", Section())
        own = [i for i, treatment in enumerate(treatments) if treatment.own_range]
        for i in own:
            node = settings[treatments[i].name].key_at["plots"]
            yield Said("plots", (i,), f"treatments.{treatments[i].name}.plots", node.line, node.column)
        others = tuple(i for i in range(len(treatments)) if i not in set(own))
        each = section.key_at.get("plots_each")
        if others:
            place = (each.line, each.column) if each is not None else (0, 0)
            yield Said("plots_each", others, "plots_each", *place)

    def _treatment_names(self) -> list[str] | None:
        value = self.section.get("treatments")
        if isinstance(value, int):
            width = max(2, len(str(value)))
            return [f"T{number:0{width}d}" for number in range(1, value + 1)]
        if value is None:
            return None
        places = value.key_at.values() if isinstance(value, Section) else value.where
        names = list(value.key_at) if isinstance(value, Section) else list(value)
        self._unlike(names, list(places), "treatments")
        return names

    def _unlike(self, names: list[str], places: list[Node], key: str) -> None:
        """Refuse names that differ only in case or blanks."""
        seen: dict[str, str] = {}
        for name, place in zip(names, places, strict=True):
            if plain(name) in seen:
                self.report.add(
                    place,
                    key,
                    f"{shown(name)} beside {shown(seen[plain(name)])}",
                    "names that differ in more than case and blanks",
                    "on a label in the field they would be taken for one another",
                    "rename one of them",
                )
            seen.setdefault(plain(name), name)

    def _blocks(self, drawn: tuple[Block, ...] | None) -> tuple[Block, ...] | None:
        section: Section | None = self.section.get("blocks")
        if section is None:
            return drawn
        if "count" in section.where or "plots" in section.where:
            if "count" not in section or "plots" not in section:
                return None
            if isinstance(section["plots"], Section) and "at_most" not in section["plots"]:
                return None
            blocks = tuple(_block(f"block {j}", section["plots"]) for j in range(1, section["count"] + 1))
        else:
            self._unlike(list(section.key_at), list(section.key_at.values()), "blocks")
            if any(isinstance(size, Section) and "at_most" not in size for size in section.values()):
                return None  # it has left its fault behind
            blocks = tuple(_block(name, size) for name, size in section.items())
        if not self._few_enough(sum(block.plots for block in blocks)):
            return None
        return blocks if drawn is None else self._as_drawn(drawn, blocks)

    def _as_drawn(self, drawn: tuple[Block, ...], named: tuple[Block, ...]) -> tuple[Block, ...]:
        """The blocks of the map, in its order; `blocks` beside it may say which of them may be emptier."""
        size = {block.name: block.plots for block in drawn}
        agree = all(size.get(block.name) == block.plots for block in named)
        if agree and (len(named) == len(drawn) or all(block.may_be_emptier for block in named)):
            known = {block.name: block for block in named}
            return tuple(known.get(block.name, block) for block in drawn)
        self.report.add(
            self.section.where["blocks"],
            "blocks",
            "blocks unlike those on the map",
            "blocks as ground draws them, or those alone that may stay partly empty: {at_most: its plots}",
            "two accounts of one field: one of them is wrong",
            "leave blocks out",
        )
        return drawn

    def _planted(
        self,
        rules: Rules,
        said: tuple[Said, ...],
        treatments: Names,
        ground: Ground | None,
        blocks: tuple[Block, ...],
    ) -> tuple[Rules, tuple[Said, ...]]:
        """The rules with what is in the soil already: plot numbers need the map, the other rules do not."""
        section: Section | None = self.section.get("rules", Section()).get("planted")
        if section is None or (ground is None and "ground" in self.section.where):
            return rules, said
        sites = self.section.get("randomise", Section()).get("sites", 1)
        planted, places = read_planted(section, treatments, ground, blocks, sites, self.report)
        return replace(rules, planted=planted), (*said, *places)

    def _wanted(self, ground: Ground | None) -> Wanted | None:
        """What the bays to be cut must be like; they need a map to be cut from."""
        node = self.section.where["blocks"]
        if ground is None:
            if "ground" not in self.section.where:
                self.report.add(
                    node,
                    "blocks.wanted",
                    "no ground",
                    "a map from which bays can be cut",
                    "bays are bundles of neighbouring plots",
                    "ground: rows with one letter for every plot",
                )
            return None
        return read_wanted(self.section["blocks"].get("wanted"), node, _plots(ground), self.report)

    def _bays(self, wanted: Wanted | None, ground: Ground | None) -> tuple[Block, ...] | None:
        return bays(wanted, _plots(ground)) if wanted is not None and ground is not None else None

    def _fits_ground(self, rules: Rules, ground: Ground | None, wanted: Wanted | None) -> None:
        """Rules that speak of places need a map that shows them."""
        section: Section = self.section.get("rules", Section())
        if rules.not_beside is not None:
            self._needs_map(rules.not_beside, section.where["not_beside"], ground)
        if wanted is None:
            return
        single: list[str] = [key for key in ("keep_out", "replicates", "planted") if key in section.where]
        if set(section.get("must_hold", ())) - {EVERY}:
            single.append("must_hold")
        for key in single:
            self.report.add(
                section.where[key],
                f"rules.{key}",
                "a rule about single blocks",
                "rules about every block, while blocks are still to be cut from the map",
                "nobody knows yet where a bay will lie",
                "cut the bays first: plan once without the rule, and take the map of its plan.json",
            )

    def _needs_map(self, rule: NotBeside, node: Node, ground: Ground | None) -> None:
        if ground is None and "ground" not in self.section.where:
            self.report.add(
                node,
                "rules.not_beside",
                "no ground",
                "a map that shows which plots are neighbours",
                "without it nobody can tell who stands beside whom",
                "ground: rows, in the place of blocks",
            )
        elif rule.distance_m is not None and ground is not None and ground.plot_m is None:
            self.report.add(
                node,
                "rules.not_beside.distance_m",
                "no plot_m",
                "ground.plot_m: the width and length of a plot in metres",
                "without it the map has no metres",
                "plots_apart, which counts plots",
            )

    def _few_enough(self, plots: int) -> bool:
        if plots > MOST_PLOTS:
            node = self.section.key_at["blocks"]
            why = "no field trial is so large: a digit too many, most likely"
            most = f"at most {MOST_PLOTS:,} plots in all"
            self.report.add(node, "blocks", f"{plots:,} plots", most, why, "fewer or smaller blocks")
        return plots <= MOST_PLOTS

    def _in_reach(self, treatments: int, blocks: int) -> bool:
        if treatments * blocks > MOST_CELLS:
            why = "larger tables would not fit into a small machine"
            most = f"treatments times blocks at most {MOST_CELLS:,}"
            found = f"{treatments:,} treatments in {blocks:,} blocks"
            self.report.add(
                self.section.key_at["treatments"], "treatments", found, most, why, "split the trial"
            )
        return treatments * blocks <= MOST_CELLS

    def _range(self, section: Section, word: str, key: str) -> tuple[int, int] | None:
        value = section.get(word)
        if value is None:
            return None
        if isinstance(value, int):
            return value, value
        if len(value) != 2:
            return None
        least, most = value
        if least > most:
            self.report.add(
                section.where[word],
                key,
                f"[{least}, {most}]",
                "[least, most], the smaller number first",
                remedy=f"[{most}, {least}]",
            )
        return least, most

    def _treatments(
        self, names: list[str], settings: Section, blocks: tuple[Block, ...], rules: Rules
    ) -> tuple[Treatment, ...]:
        own = [
            self._range(settings.get(name) or Section(), "plots", f"treatments.{name}.plots")
            for name in names
        ]
        each = self.plots_each
        if each is None:
            ranges = _even_shares(_own_limits(own, blocks, rules), blocks, rules)
        else:
            ranges = tuple(each for _ in names)
        return tuple(
            _treatment(name, wanted or share, wanted is not None, settings.get(name) or Section())
            for name, wanted, share in zip(names, own, ranges, strict=True)
        )

    def _power(self) -> None:
        section: Section = self.section.get("precision", Section())
        asked = Precision(**section)
        if asked.level_percent >= asked.power_percent:
            key = next(key for key in ("power_percent", "level_percent") if key in section)
            self.report.add(
                section.where[key],
                f"precision.{key}",
                f"power {asked.power_percent:g} % at level {asked.level_percent:g} %",
                "a power above the level",
                "a test finds nothing at all as often as its level says",
                "power_percent: 80",
            )

    def _blocks_random(self) -> Fraction | None:
        ratio: Fraction | None = self.section.get("blocks_random")
        if ratio is not None and not Fraction(1, WIDEST_RATIO) <= ratio <= WIDEST_RATIO:
            self.report.add(
                self.section.where["blocks_random"],
                "blocks_random",
                f"{float(ratio):.12g}",
                f"block variance over plot variance, from 1/{WIDEST_RATIO} to {WIDEST_RATIO}",
                "beyond, blocks tell as good as nothing, or are as good as not there",
                "leave the key out to plan for fixed blocks",
            )
            return None
        return ratio

    def _aim(self, names: Names, treatments: tuple[Treatment, ...]) -> Aim:
        value = self.section.get("aim", AimKind.ALL_PAIRS.value)
        node = self.section.where.get("aim")
        if isinstance(value, str):
            kind = AimKind(value)
            if kind is AimKind.AGAINST_CONTROL and not any(x.control for x in treatments):
                self.report.add(
                    node,
                    "aim",
                    "against control, but no control",
                    "a treatment with control: true",
                    remedy="mark the control, or choose the aim: all pairs",
                )
            return Aim(kind)
        contrasts = []
        for label, fields in value.get("contrasts", {}).items():
            of = fields.get("of", Section())
            key = f"aim.contrasts.{label}.of"
            numbers = [names.find(name, of.key_at[name], key, self.report) for name in of]
            place = value["contrasts"].where[label]
            if sum(of.values()) != 0 or not any(of.values()):
                self.report.add(
                    place,
                    key,
                    f"coefficients that sum to {sum(of.values())}",
                    "coefficients that sum to 0, not all 0",
                    "otherwise it is no comparison, and the site mean would enter it",
                    "change one of them so that plus and minus are equal",
                )
            known = [(i, c) for i, c in zip(numbers, of.values(), strict=True) if i is not None]
            contrasts.append(Contrast(label, fields.get("weight", 1), tuple(known)))
        return Aim(AimKind.CONTRASTS, tuple(contrasts))


def _plots(ground: Ground) -> int:
    """Plots on a map, whichever way it is given."""
    return len(ground.spots) or sum(c != EMPTY for row in ground.rows for c in row)


def _own_limits(
    own: list[tuple[int, int] | None], blocks: tuple[Block, ...], rules: Rules
) -> list[tuple[int, int | None]]:
    """Own ranges, and for the others what the replicates settle: once in each, the rest outside."""
    inside = {j for replicate in rules.replicates for j in replicate.blocks}
    outside = sum(block.plots for j, block in enumerate(blocks) if j not in inside)
    times = dict(rules.per_replicate)
    limits: list[tuple[int, int | None]] = []
    for i, range_ in enumerate(own):
        if range_ is not None:
            limits.append(range_)
        elif rules.replicates:
            settled = times.get(i, 1) * len(rules.replicates)
            limits.append((settled, settled + outside))
        else:
            limits.append((1, None))
    return limits


def _even_shares(
    limits: list[tuple[int, int | None]], blocks: tuple[Block, ...], rules: Rules
) -> tuple[tuple[int, int], ...]:
    """The even share of the plots that can be planted; a plot less where some may stay filler.

    A block that may stay partly empty counts with as many plots as there are treatments that may enter
    it, where none may stand there twice. Filler takes its plots from any treatment, one from each at most.
    """
    barred = Counter(j for _, j in set(rules.keep_out))
    plots = 0
    for j, block in enumerate(blocks):
        able = len(limits) - barred[j]
        plots += min(block.plots, able) if block.may_be_emptier and not rules.twice_in_block else block.plots
    shares = even_ranges(limits, plots)
    if not any(block.may_be_emptier for block in blocks):
        return shares
    return tuple(
        (min(low, max(least, high - 1)), high) for (low, high), (least, _) in zip(shares, limits, strict=True)
    )


def _block(name: str, size: int | Section) -> Block:
    if isinstance(size, int):
        return Block(name, size)
    return Block(name, size["at_most"], may_be_emptier=True)


def _treatment(name: str, plots: tuple[int, int], own: bool, settings: Section) -> Treatment:
    weighed = settings.get("amount", {})
    amount = Amount(weighed["per_plot"], weighed["unit"]) if len(weighed) == 2 else None
    return Treatment(
        name=name,
        least=plots[0],
        most=plots[1],
        own_range=own,
        control=settings.get("control", False),
        caution=settings.get("caution", ""),
        amount=amount,
    )
