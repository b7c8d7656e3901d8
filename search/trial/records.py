"""What is to be planned: the frozen record that the reader hands to every other floor.

Treatments and blocks are numbered from 0 in the order of the file; everything below refers to them
by number, and only these records know their names.
"""

from __future__ import annotations

from dataclasses import dataclass, field
from enum import StrEnum
from fractions import Fraction

Contents = tuple[tuple[int, ...], ...]
"""For each block the treatments that stand in it, one entry a plot, in rising order."""


@dataclass(frozen=True, slots=True)
class Amount:
    """Seed or product to weigh out for one plot."""

    per_plot: float
    unit: str


@dataclass(frozen=True, slots=True)
class Treatment:
    """A treatment and the range of plots that the file states for it.

    `least` and `most` are the stated range: the treatment's own, else `plots_each`, else the even
    share (`Trial.even`). What the rules imply beyond that is in `search.trial.limits`.
    """

    name: str
    least: int
    most: int
    own_range: bool = False
    control: bool = False
    caution: str = ""
    amount: Amount | None = None


@dataclass(frozen=True, slots=True)
class Block:
    """A block of `plots` plots: all of them planted, or, where `may_be_emptier`, one or more of them.

    What is not planted of a block is filler: sown to keep the field even, and not scored.
    """

    name: str
    plots: int
    may_be_emptier: bool = False


@dataclass(frozen=True, slots=True)
class Replicate:
    """Blocks that together hold every treatment once (or as `Rules.per_replicate` says)."""

    name: str
    blocks: tuple[int, ...]


@dataclass(frozen=True, slots=True)
class Meeting:
    """A limit on the number of blocks that two treatments share; `pair` is None for every pair."""

    blocks: int
    pair: tuple[int, int] | None = None


@dataclass(frozen=True, slots=True)
class NotBeside:
    """Treatments that may share a block but not stand near one another on the map.

    `pairs` are kept apart from each other, and every treatment from its own plots where `itself`. Near
    means within `plots_apart` steps from plot to plot along and across the lines (1: plots that share an
    edge), or, where `distance_m` is given, nearest edges less than so many metres apart.
    """

    pairs: tuple[tuple[int, int], ...] = ()
    itself: bool = False
    plots_apart: int = 1
    distance_m: float | None = None


@dataclass(frozen=True, slots=True)
class InSoil:
    """A plot that is planted already: its number on the stake, its treatment, and its block."""

    plot: int
    treatment: int
    block: int


@dataclass(frozen=True, slots=True)
class Rules:
    """The rules of the file, by treatment and block numbers."""

    never_share_block: tuple[tuple[int, ...], ...] = ()
    meet_at_least: tuple[Meeting, ...] = ()
    meet_at_most: tuple[Meeting, ...] = ()
    keep_out: tuple[tuple[int, int], ...] = ()
    """(treatment, block): the treatment may not enter the block."""
    unforced: tuple[tuple[int, int], ...] = ()
    """(treatment, block): may stay out however large the block is. Never in a file: a trial with a `keep_out`
    left out must not ask for more than one that keeps it."""
    must_hold: tuple[tuple[int, int], ...] = ()
    """(treatment, block): the block must contain the treatment."""
    replicates: tuple[Replicate, ...] = ()
    per_replicate: tuple[tuple[int, int], ...] = ()
    """(treatment, times): stands that often in each replicate, instead of once."""
    twice_in_block: bool = False
    not_beside: NotBeside | None = None
    planted: tuple[InSoil, ...] = ()
    """In the order of the file; each plot at most once."""


@dataclass(frozen=True, slots=True)
class Numbering:
    """Where plot numbers start and how they run."""

    start: str = "bottom left"
    way: str = "serpentine"


@dataclass(frozen=True, slots=True)
class Spot:
    """A plot of a map from a table.

    Parameters
    ----------
    line, place : both counted from 1 at the corner where numbering starts
    block : number of its block; None on a bare map
    x_m, y_m : middle of the plot, to the right of and away from the reader, in metres from any one point
    """

    line: int
    place: int
    block: int | None
    x_m: float | None = None
    y_m: float | None = None


@dataclass(frozen=True, slots=True)
class Ground:
    """The field as a map, drawn in `rows` or listed in `spots`; the other of the two is empty.

    `rows` has one text per line of plots, the farthest from the reader first, all of one length; a
    letter is a block, a dot a place without a plot. `letters` gives the block number of each letter;
    it is empty on a bare map, from which blocks are still to be cut.
    """

    rows: tuple[str, ...] = ()
    letters: tuple[tuple[str, int], ...] = ()
    spots: tuple[Spot, ...] = ()
    plot_m: tuple[float, float] | None = None
    """Width and length of a sown plot in metres."""
    gap_m: tuple[float, float] = (0.0, 0.0)
    """Metres between neighbours in a line, and between lines."""
    numbering: Numbering = Numbering()
    north_deg: float | None = None
    """Compass bearing, in degrees from north, of the way from the reader to the far edge."""
    corner: tuple[float, float] | None = None
    """Latitude and longitude of the corner where numbering starts."""


@dataclass(frozen=True, slots=True)
class Wanted:
    """Blocks to be cut from a bare map: so many, or of so many plots (least, most)."""

    count: int | None = None
    plots: tuple[int, int] | None = None


class AimKind(StrEnum):
    """What a good plan is good for."""

    ALL_PAIRS = "all pairs"
    OVERALL = "overall"
    EVEN_MEETINGS = "even meetings"
    WORST_PAIR = "worst pair"
    AGAINST_CONTROL = "against control"
    CONTRASTS = "contrasts"

    @property
    def treats_pairs_alike(self) -> bool:
        """Whether every pair of treatments counts the same, so that a balanced plan is best."""
        return self not in (AimKind.AGAINST_CONTROL, AimKind.CONTRASTS)

    @property
    def depends_on_eigenvalues(self) -> bool:
        """Whether the eigenvalues of the information matrix tell how good a plan is."""
        return self in (AimKind.ALL_PAIRS, AimKind.OVERALL)

    @property
    def counts_meetings(self) -> bool:
        """Whether a plan is judged by a whole number, the less the better, and not by an efficiency."""
        return self is AimKind.EVEN_MEETINGS


@dataclass(frozen=True, slots=True)
class Contrast:
    """A comparison of interest: coefficients that sum to 0, and its weight among the others."""

    label: str
    weight: Fraction
    of: tuple[tuple[int, Fraction], ...]


@dataclass(frozen=True, slots=True)
class Aim:
    """The criterion of the trial; `contrasts` is filled for that kind alone."""

    kind: AimKind = AimKind.ALL_PAIRS
    contrasts: tuple[Contrast, ...] = ()


@dataclass(frozen=True, slots=True)
class SearchSettings:
    """How far to search; None where the file does not say."""

    seconds: float | None = None
    moves: int | None = None
    seed: int = 1
    workers: int | None = None


@dataclass(frozen=True, slots=True)
class Randomise:
    """The layout's own seed (None: a fresh one, recorded) and the number of sites."""

    seed: int | None = None
    sites: int = 1


@dataclass(frozen=True, slots=True)
class Precision:
    """What is expected of the field, for standard errors and detectable differences."""

    cv_percent: float | None = None
    mean: float | None = None
    unit: str = ""
    difference: float | None = None
    level_percent: float = 5.0
    power_percent: float = 80.0


@dataclass(frozen=True, slots=True)
class PacketSettings:
    """How the crew packet is drawn."""

    paper: str = "A4"
    spare_bags: int = 0
    labels: str = "sheet"
    blind: bool = False


@dataclass(frozen=True, slots=True)
class Said:
    """One thing that the file says and that every plan must obey, with its place in the file.

    Parameters
    ----------
    sort : the word of the file: a key of `rules`, `plots` (of one treatment), `plots_each` or `blocks`
    items : what it became: positions in that tuple of `Rules`, or numbers of treatments
    key : where it stands, such as `rules.keep_out.Heather[1]`
    line, column : of the file; 0 where the file leaves it to a default, or there is no file
    """

    sort: str
    items: tuple[int, ...]
    key: str
    line: int = 0
    column: int = 0


@dataclass(frozen=True, slots=True)
class Trial:
    """A trial as read: checked, complete, read-only."""

    name: str
    treatments: tuple[Treatment, ...]
    blocks: tuple[Block, ...]
    rules: Rules = Rules()
    even: bool = False
    """True where `plots_each` was left out and some treatment takes the even share."""
    plots_each: tuple[int, int] | None = None
    aim: Aim = Aim()
    blocks_random: Fraction | None = None
    """Block variance over plot variance, to plan for the combined analysis; None for fixed blocks."""
    ground: Ground | None = None
    wanted: Wanted | None = None
    """Set while the blocks are not cut from the map yet; their sizes are known, their plots are not."""
    about: tuple[tuple[str, str], ...] = ()
    search: SearchSettings = SearchSettings()
    randomise: Randomise = Randomise()
    precision: Precision = Precision()
    packet: PacketSettings = PacketSettings()
    file: str = field(default="", compare=False)
    said: tuple[Said, ...] = field(default=(), compare=False, repr=False)
    """Where the file says what, in the order of the file."""

    @property
    def t(self) -> int:
        """Number of treatments."""
        return len(self.treatments)

    @property
    def b(self) -> int:
        """Number of blocks."""
        return len(self.blocks)

    @property
    def land(self) -> int:
        """Number of plots, with those that stay filler."""
        return sum(block.plots for block in self.blocks)

    @property
    def may_be_emptier(self) -> bool:
        """Whether some plots may stay filler."""
        return any(block.may_be_emptier for block in self.blocks)

    @property
    def n(self) -> int:
        """The most plots that can be planted: all of them, or, where some may stay filler, no more than
        the stated ranges of the treatments take."""
        if not self.may_be_emptier:
            return self.land
        return min(self.land, sum(treatment.most for treatment in self.treatments))

    @property
    def controls(self) -> tuple[int, ...]:
        """Numbers of the control treatments."""
        return tuple(i for i, treatment in enumerate(self.treatments) if treatment.control)
