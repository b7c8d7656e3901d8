"""From a trial file to a `Trial`: names become numbers, defaults are filled in, every fault is told."""

from __future__ import annotations

from pathlib import Path
from typing import Any

from search.foundation.errors import Fault, FaultyTrial
from search.trial.catalogue import MOST_PLOTS, TRIAL
from search.trial.drawing import EMPTY, read_ground
from search.trial.even import even_ranges
from search.trial.kinds import Report, Section
from search.trial.names import Names
from search.trial.nodes import Node, nodes_of, read_nodes
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
    SearchSettings,
    Treatment,
    Trial,
    Wanted,
)
from search.trial.wanted import bays, read_wanted


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
        raise FaultyTrial(sorted(report.faults, key=_place))
    return trial


def _place(fault: Fault) -> tuple[int, int]:
    return fault.line, fault.column


class _Reader:
    """Builds the trial part by part; a part that cannot be built has left a fault behind."""

    def __init__(self, section: Section, report: Report) -> None:
        self.section = section
        self.report = report

    def trial(self) -> Trial | None:
        names = self._treatment_names()
        bare = "wanted" in self.section.get("blocks", ())
        ground, blocks = read_ground(self.section.get("ground"), self.report, bare)
        wanted = self._wanted(ground) if bare else None
        blocks = self._bays(wanted, ground) if bare else self._blocks(blocks)
        if names is None or blocks is None:
            return None
        treatments = Names("treatment", names)
        bays = Names("block", [block.name for block in blocks])
        rules = read_rules(self.section.get("rules"), treatments, bays, self.report) or Rules()
        self._fits_ground(rules, ground, wanted)
        settings = self.section.get("treatments")
        settings = settings if isinstance(settings, Section) else Section()
        plants = self._treatments(names, settings, blocks, rules)
        aim = self._aim(treatments, plants)
        return Trial(
            name=self.section.get("trial", ""),
            treatments=plants,
            blocks=blocks,
            rules=rules,
            even="plots_each" not in self.section and any(not x.own_range for x in plants),
            plots_each=self._range(self.section, "plots_each"),
            aim=aim,
            ground=ground,
            wanted=wanted,
            about=tuple(self.section.get("about", {}).items()),
            search=SearchSettings(**self.section.get("search", {})),
            randomise=Randomise(**self.section.get("randomise", {})),
            precision=Precision(**self.section.get("precision", {})),
            packet=PacketSettings(**self.section.get("packet", {})),
            file=self.report.file,
        )

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
            plain = "".join(name.split()).casefold()
            if plain in seen:
                self.report.add(
                    place,
                    key,
                    f'"{name}" beside "{seen[plain]}"',
                    "names that differ in more than case and blanks",
                    "on a label in the field they would be taken for one another",
                    "rename one of them",
                )
            seen.setdefault(plain, name)

    def _blocks(self, drawn: tuple[Block, ...] | None) -> tuple[Block, ...] | None:
        section: Section | None = self.section.get("blocks")
        where = self.section.where
        if section is None:
            if drawn is None and "ground" not in where and "blocks" not in where:
                self.report.add(
                    None,
                    "blocks",
                    "neither blocks nor ground",
                    "blocks with their plots, or a map",
                    remedy="blocks: {count: 6, plots: 8}",
                )
            return drawn
        if "count" in section.where or "plots" in section.where:
            if "count" not in section or "plots" not in section:
                return None
            blocks = tuple(Block(f"block {j}", section["plots"]) for j in range(1, section["count"] + 1))
        else:
            self._unlike(list(section.key_at), list(section.key_at.values()), "blocks")
            blocks = tuple(Block(name, plots) for name, plots in section.items())
        if drawn is not None and sorted(map(repr, drawn)) != sorted(map(repr, blocks)):
            self.report.add(
                where["blocks"],
                "blocks",
                "blocks unlike those on the map",
                "blocks as ground draws them, or no blocks at all",
                "two accounts of one field: one of them is wrong",
                "leave blocks out",
            )
        plots = sum(block.plots for block in blocks)
        if plots > MOST_PLOTS:
            self.report.add(where["blocks"], "blocks", f"{plots:,} plots", f"at most {MOST_PLOTS:,}")
        return drawn if drawn is not None else blocks

    def _wanted(self, ground: Ground | None) -> Wanted | None:
        """What the bays to be cut must be like; they need a map to be cut from."""
        node = self.section.where["blocks"]
        if ground is None:
            if "ground" not in self.section.where:
                self.report.add(
                    node,
                    "blocks.wanted",
                    "no ground",
                    "ground: rows with one letter for every plot",
                    "bays are cut from a map",
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
        single: list[str] = [key for key in ("keep_out", "replicates") if key in section.where]
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

    def _range(self, section: Section, key: str) -> tuple[int, int] | None:
        value = section.get(key)
        if value is None:
            return None
        if isinstance(value, int):
            return value, value
        if len(value) != 2:
            return None
        least, most = value
        if least > most:
            self.report.add(
                section.where[key],
                key,
                f"[{least}, {most}]",
                "[least, most]",
                remedy=f"[{most}, {least}]",
            )
        return least, most

    def _treatments(
        self, names: list[str], settings: Section, blocks: tuple[Block, ...], rules: Rules
    ) -> tuple[Treatment, ...]:
        own = [self._range(settings.get(name, Section()) or Section(), "plots") for name in names]
        each = self._range(self.section, "plots_each")
        if each is None:
            ranges = even_ranges(_own_limits(own, blocks, rules), sum(block.plots for block in blocks))
        else:
            ranges = tuple(each for _ in names)
        return tuple(
            _treatment(name, wanted or share, wanted is not None, settings.get(name) or Section())
            for name, wanted, share in zip(names, own, ranges, strict=True)
        )

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
