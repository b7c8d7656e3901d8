"""What the crew reads, decided once and without a format; paper, sheet and page only draw it."""

from __future__ import annotations

from collections import Counter
from collections.abc import Sequence
from dataclasses import dataclass, replace
from datetime import datetime
from itertools import islice
from string import ascii_lowercase
from typing import Any

from search.field.cautions import FIRST, USUAL, office_notes
from search.field.codes import treatment_codes
from search.field.planted import planted_plots
from search.field.randomise import Planted
from search.field.standing import plots_planted, standing_in_words
from search.field.walk import Pass, passes
from search.field.wording import clean, counted
from search.foundation.errors import BadInput
from search.trial.numbering import extent
from search.trial.records import Ground, Trial

SHORT_NAME = 4
"""Letters of a block's name that still stand for it on the map."""
MONTHS = [
    "January",
    "February",
    "March",
    "April",
    "May",
    "June",
    "July",
    "August",
    "September",
    "October",
    "November",
    "December",
]


@dataclass(frozen=True, slots=True)
class TreatmentEntry:
    """A treatment as the crew meets it.

    Parameters
    ----------
    number : counted from 1, in the order of the trial file
    code : short name on the map
    name : whole name; empty in a blind packet
    plots : how many it has
    in_soil : how many of them are planted already: they need no bag
    per_plot, total : what to weigh out, with its unit; the total includes spare bags
    """

    number: int
    code: str
    name: str
    control: bool
    caution: str
    plots: int
    per_plot: str
    total: str
    in_soil: int = 0

    @property
    def to_sow(self) -> int:
        """Plots that still need seed."""
        return self.plots - self.in_soil


FILLER = TreatmentEntry(0, "fill", "", False, "", 0, "", "")
"""What stands on a plot without a treatment; the code is no other's, for those have no four letters."""
FILLER_TOLD = "Filler: no treatment, nothing to score."
IN_SOIL_TOLD = "Planted already: do not sow."


@dataclass(frozen=True, slots=True)
class BlockEntry:
    """A block with the letter that stands for it on the map; none where every block is a line."""

    letter: str
    name: str
    replicate: str
    plots: int
    filler: int = 0
    """How many of them are filler."""

    @property
    def size(self) -> str:
        """Its plots in words."""
        return counted(self.plots, "plot") + (f", {self.filler} filler" if self.filler else "")


@dataclass(frozen=True, slots=True)
class Caution:
    """A caution.

    Parameters
    ----------
    title : what it is about, in a few words; empty where it is about certain treatments
    text : what to do
    about : those treatments, numbered from 0; none where it is about everything
    """

    title: str
    text: str
    about: tuple[int, ...] = ()


@dataclass(frozen=True, slots=True)
class CrewPacket:
    """The whole content of a packet; all text is safe to print.

    Parameters
    ----------
    issued : day of issue, `2 March 2027`
    seed : seed of the layout
    standing : how good the plan is, in sentences
    cautions : for everybody in the field, the most important first
    office : warnings about the statistics, for those who analyse
    plots : what stands where, by plot number
    passes : the same plots in planting order
    extent : rows and columns of the map
    spare_bags : bags to weigh out beyond those for the plots, of each treatment
    labels : on sheets, or single
    blind : whether codes stand in the place of treatments
    """

    title: str
    mark: str
    issued: str
    seed: int
    paper: str
    about: tuple[tuple[str, str], ...]
    size: str
    standing: tuple[str, ...]
    cautions: tuple[Caution, ...]
    office: tuple[str, ...]
    treatments: tuple[TreatmentEntry, ...]
    blocks: tuple[BlockEntry, ...]
    plots: tuple[Planted, ...]
    ground: Ground | None
    extent: tuple[int, int]
    passes: tuple[Pass, ...]
    spare_bags: int
    labels: str
    blind: bool

    def held(self, planted: Planted) -> TreatmentEntry:
        """What stands on a plot, `FILLER` where no treatment does."""
        return FILLER if planted.treatment is None else self.treatments[planted.treatment]

    @property
    def filler(self) -> int:
        """Plots without a treatment."""
        return sum(planted.treatment is None for planted in self.plots)

    @property
    def in_soil(self) -> int:
        """Plots that are planted already."""
        return sum(planted.in_soil for planted in self.plots)

    def note(self, planted: Planted) -> str:
        """What is out of the ordinary with a plot, in a word or two."""
        if planted.treatment is None:
            return "filler"
        return "planted already" if planted.in_soil else ""


def crew_packet(trial: Trial, document: dict[str, Any], blind: bool = False) -> CrewPacket:
    """Decide what the crew of a trial reads.

    Parameters
    ----------
    trial : the trial
    document : its plan as in plan.json
    blind : names are codes already and stand for nothing else

    Raises
    ------
    BadInput : the plan does not fit the trial
    """
    plots = planted_plots(trial, document)
    treatments = _treatments(trial, plots, blind)
    return CrewPacket(
        title=clean(trial.name),
        mark=clean(document["mark"]),
        issued=_day(document["issued"]),
        seed=document["layout"]["seed"],
        paper=trial.packet.paper,
        about=tuple((clean(key), clean(value)) for key, value in trial.about),
        size=_size(trial, plots),
        standing=standing_in_words(document, plots_planted(document)),
        cautions=_cautions(treatments, blind),
        office=() if blind else office_notes(trial, document),
        treatments=treatments,
        blocks=_blocks(trial, plots),
        plots=plots,
        ground=trial.ground,
        extent=extent([planted.place for planted in plots], trial.ground),
        passes=passes(trial),
        spare_bags=trial.packet.spare_bags,
        labels=trial.packet.labels,
        blind=blind,
    )


def with_codes(packet: CrewPacket, codes: Sequence[str]) -> CrewPacket:
    """The packet with other codes for its treatments."""
    coded = (replace(entry, code=code) for entry, code in zip(packet.treatments, codes, strict=True))
    return replace(packet, treatments=tuple(coded))


def _size(trial: Trial, plots: tuple[Planted, ...]) -> str:
    filler = sum(planted.treatment is None for planted in plots)
    parts = [counted(trial.t, "treatment"), counted(trial.b, "block"), counted(len(plots) - filler, "plot")]
    return ", ".join([*parts, *([counted(filler, "plot") + " of filler"] if filler else [])])


def _day(issued: str) -> str:
    try:
        day = datetime.strptime(issued, "%Y-%m-%dT%H:%M:%SZ")
    except ValueError as error:
        raise BadInput(f"the plan was issued on {issued}, which is no date") from error
    return f"{day.day} {MONTHS[day.month - 1]} {day.year}"


def _treatments(trial: Trial, plots: tuple[Planted, ...], blind: bool) -> tuple[TreatmentEntry, ...]:
    names = [clean(treatment.name) for treatment in trial.treatments]
    stands = Counter(planted.treatment for planted in plots)
    in_soil = Counter(planted.treatment for planted in plots if planted.in_soil)
    entries = []
    for i, (treatment, code) in enumerate(zip(trial.treatments, treatment_codes(names), strict=True)):
        amount, bags = treatment.amount, stands[i] - in_soil[i] + trial.packet.spare_bags
        entries.append(
            TreatmentEntry(
                number=i + 1,
                code=code,
                name="" if blind else names[i],
                control=treatment.control,
                caution=clean(treatment.caution),
                plots=stands[i],
                in_soil=in_soil[i],
                per_plot=clean(f"{amount.per_plot:.10g} {amount.unit}") if amount else "",
                total=clean(f"{amount.per_plot * bags:.10g} {amount.unit}") if amount else "",
            )
        )
    return tuple(entries)


def _blocks(trial: Trial, plots: tuple[Planted, ...]) -> tuple[BlockEntry, ...]:
    letters = _signs(trial)
    filler = Counter(planted.place.block for planted in plots if planted.treatment is None)
    replicate = {j: clean(group.name) for group in trial.rules.replicates for j in group.blocks}
    return tuple(
        BlockEntry(letters.get(j, ""), clean(block.name), replicate.get(j, ""), block.plots, filler[j])
        for j, block in enumerate(trial.blocks)
    )


def _signs(trial: Trial) -> dict[int, str]:
    """What stands for each block on the map: its letter there, else a short name, a letter, a number."""
    ground = trial.ground
    if ground is None:
        return {}
    if ground.letters:
        return {j: letter for letter, j in ground.letters}
    names = [clean(block.name) for block in trial.blocks]
    if max(map(len, names)) <= SHORT_NAME:
        return dict(enumerate(names))
    signs = ascii_lowercase if trial.b <= len(ascii_lowercase) else map(str, range(1, trial.b + 1))
    return dict(enumerate(islice(signs, trial.b)))


def _cautions(treatments: tuple[TreatmentEntry, ...], blind: bool) -> tuple[Caution, ...]:
    """The first rule, then what single treatments ask, then the usual ones."""
    own: dict[str, list[int]] = {}
    for i, treatment in enumerate(treatments):
        if treatment.caution:
            own.setdefault(treatment.caution, []).append(i)
    return (
        Caution(*FIRST),
        *(Caution("", text, tuple(about)) for text, about in own.items()),
        *([Caution(*_blinding(treatments))] if blind else []),
        *(Caution(*usual) for usual in USUAL),
    )


def _blinding(treatments: tuple[TreatmentEntry, ...]) -> tuple[str, str]:
    """That treatments are hidden, and what the cautions give away: safety is never hidden with them."""
    told = "Treatments stand under codes; the sealed key has their names. Whoever is hurt: open the key."
    warned = sum(bool(treatment.caution) for treatment in treatments)
    if 0 < warned < len(treatments):
        told += (
            f" Blinding is weakened: {warned} of {len(treatments)} codes carry a caution, which tells them "
            "from the others."
        )
    return "Blind trial", told
