"""What each key of a trial file means, why it matters in the field, and what it looks like.

One table serves the messages (why, and what to try) and the JSON schema (titles, descriptions, examples).
In a path `*` stands for a name of the planner's own and `[]` for an item of a list.
"""

from __future__ import annotations

import re
from dataclasses import dataclass
from functools import cache


@dataclass(frozen=True, slots=True)
class Words:
    """What a planner is told of one key.

    Parameters
    ----------
    title : two or three words
    about : one sentence on what it means
    why : what goes wrong in the field where it is misread
    example : a line of a file
    """

    title: str
    about: str
    why: str
    example: str


NUMBERS = "the search keeps to these numbers, and no plan is better than what it was asked for"
SECOND = "a plan under another rule than you meant looks just as good on paper"
DRILL = "the drill and the crew go by the map: one place wrong shifts every plot after it"
PAPER = "the crew works from this paper, far from anybody who could explain it"
ERROR = "expected errors and detectable differences are worked out from it"
FILLER = "a plot that nobody plants is a gap: filler keeps the neighbours from growing into it"
SEED = "the seed is what makes the same plan again"

WORDS: dict[str, Words] = {
    "": Words(
        "Trial file",
        "A field trial to be planned: treatments, blocks and rules.",
        "a trial is planned from this file and from nothing else",
        "trial: My trial",
    ),
    "trial": Words(
        "Name of the trial",
        "The name, printed on every page and used for the folder.",
        "packets of two trials without names cannot be told apart",
        "trial: Low Moor winter wheat",
    ),
    "about": Words(
        "Free text",
        "Anything worth printing on the packet: site, season, crop, number.",
        PAPER,
        "about: {site: Low Moor, season: 2027}",
    ),
    "about.*": Words("Note", "A line printed on the packet.", PAPER, "site: Low Moor"),
    "treatments": Words(
        "Treatments",
        "What is compared: a list of names, a number (12: named T01 to T12), or names with settings.",
        "a variety or product that is not listed is not sown, one listed twice is sown twice",
        "treatments: [Arlen, Bracken, Clover]",
    ),
    "treatments[]": Words(
        "Treatment",
        "The name of a treatment, as it is printed on labels.",
        "the name is all that the crew has to pick the right bag",
        "treatments: [Arlen, Bracken, Clover]",
    ),
    "treatments.*": Words(
        "Treatment",
        "Settings of one treatment; nothing where it needs none.",
        "a setting of one treatment changes how it is sown or handled",
        "Arlen: {plots: 3, control: true}",
    ),
    "treatments.*.plots": Words(
        "Plots of this treatment",
        "Exactly so many plots, or [least, most].",
        "seed for more plots than there is cannot be sown",
        "plots: [3, 4]",
    ),
    "treatments.*.control": Words(
        "Control",
        "Whether the others are compared with this one.",
        "under the aim `against control` the plan leans on the controls",
        "control: true",
    ),
    "treatments.*.caution": Words(
        "Caution",
        "What the crew must know to handle it safely; printed wherever it is handled.",
        "whoever opens the bag reads this, and perhaps nothing else",
        'caution: "Treated seed: gloves"',
    ),
    "treatments.*.amount": Words(
        "Amount for a plot",
        "Seed or product to weigh out for one plot.",
        "bags are weighed out from it before anybody is in the field",
        "amount: {per_plot: 0.42, unit: kg}",
    ),
    "treatments.*.amount.per_plot": Words(
        "Per plot", "The amount for one plot.", "a wrong amount is a wrong dose", "per_plot: 0.42"
    ),
    "treatments.*.amount.unit": Words(
        "Unit", "Unit of the amount.", "0.42 of an unknown unit cannot be weighed", "unit: kg"
    ),
    "blocks": Words(
        "Blocks",
        "Names with numbers of plots, or so many blocks of one size; left out where `ground` draws them.",
        "plots of one block are compared with one another: a block too many or too large spoils that",
        "blocks: {count: 6, plots: 8}",
    ),
    "blocks.*": Words(
        "Plots of this block",
        "So many plots, all of them planted; or {at_most: so many}.",
        "a plan for more plots than the block has cannot be sown",
        "north bay: 8",
    ),
    "blocks.*.at_most": Words(
        "At most",
        "So many plots, as many of them planted as ranges and rules allow, one at least; the rest is filler.",
        FILLER,
        "north bay: {at_most: 8}",
    ),
    "blocks.count": Words("Number of blocks", "How many blocks of one size.", NUMBERS, "count: 6"),
    "blocks.plots": Words(
        "Plots of a block",
        "How many plots each of them has; all are planted, or {at_most: so many}.",
        NUMBERS,
        "plots: 8",
    ),
    "blocks.plots.at_most": Words(
        "At most", "The same for each of these blocks; the rest is filler.", FILLER, "plots: {at_most: 8}"
    ),
    "blocks.wanted": Words(
        "Blocks to be cut", "Cut the blocks from the bare map.", DRILL, "wanted: {plots: [7, 8]}"
    ),
    "blocks.wanted.plots": Words("Sizes", "Plots a block may have.", DRILL, "plots: [7, 8]"),
    "blocks.wanted.count": Words("Number", "How many blocks to cut.", DRILL, "count: 6"),
    "plots_each": Words(
        "Plots for each treatment",
        "How many plots a treatment has that says nothing itself: a number or [least, most]; left out: as "
        "even as the plots that can be planted allow.",
        "replication decides how small a difference the trial can show",
        "plots_each: [3, 4]",
    ),
    "rules": Words(
        "Rules",
        "What every plan must obey.",
        "a rule that nobody reads is a rule that nobody keeps",
        "rules: {never_share_block: [[Arlen, Clover]]}",
    ),
    "rules.never_share_block": Words(
        "Never in one block",
        "Lists of treatments, no two of which stand in one block.",
        "neighbours that shade or cross each other spoil both plots",
        "never_share_block: [[Arlen, Clover]]",
    ),
    "rules.meet_at_least": Words(
        "Must meet",
        "Blocks that a pair must share: a list of {pair, blocks}, or one number for every pair.",
        "a pair that meets seldom is compared badly",
        "meet_at_least: [{pair: [Arlen, Elder], blocks: 1}]",
    ),
    "rules.meet_at_most": Words(
        "Must not meet oftener",
        "The most blocks that a pair may share: a list of {pair, blocks}, or one number for every pair.",
        "a pair that meets often takes comparisons from the others",
        "meet_at_most: 2",
    ),
    "rules.meet_*[].pair": Words("Pair", "Two treatments.", SECOND, "pair: [Arlen, Elder]"),
    "rules.meet_*[].blocks": Words("Blocks", "How many blocks.", SECOND, "blocks: 1"),
    "rules.keep_out": Words(
        "Keep out",
        "Treatments, each with the blocks it may not enter.",
        "what must stay out of a wet or a spray-free bay would be planted in it",
        "keep_out: {Heather: [bay c]}",
    ),
    "rules.must_hold": Words(
        "Must hold",
        "Blocks (or `every block`), each with treatments it must contain.",
        "a block without its check cannot be judged by itself",
        "must_hold: {every block: [Dunlin]}",
    ),
    "rules.replicates": Words(
        "Replicates",
        "Groups of blocks; every treatment stands exactly once in each group.",
        "a complete replicate can be drilled, sprayed or lost as a whole",
        "replicates: {north: [bay a, bay b]}",
    ),
    "rules.per_replicate": Words(
        "Times in each replicate",
        "Treatments that stand more than once in each replicate.",
        "a replicate with the wrong counts does not fill its blocks",
        "per_replicate: {Dunlin: 2}",
    ),
    "rules.replicates.per_replicate": Words(
        "Times in each replicate",
        "Treatments that stand more than once in each replicate.",
        "a replicate with the wrong counts does not fill its blocks",
        "per_replicate: {Dunlin: 2}",
    ),
    "rules.twice_in_block": Words(
        "Twice in a block",
        "Whether a treatment may stand more than once in a block.",
        "the second plot of a treatment in a block tells less about differences",
        "twice_in_block: true",
    ),
    "rules.not_beside": Words(
        "Not beside each other",
        "Pairs that may share a block, but not neighbouring plots.",
        "neighbours compete, shade and cross over the edge of a plot",
        "not_beside: {pairs: [[Arlen, Clover]], plots_apart: 1}",
    ),
    "rules.not_beside.pairs": Words("Pairs", "Lists of two treatments.", SECOND, "pairs: [[Arlen, Clover]]"),
    "rules.not_beside.itself": Words("Itself", "Nor beside itself.", SECOND, "itself: true"),
    "rules.not_beside.plots_apart": Words("Plots apart", "Plots in between.", SECOND, "plots_apart: 1"),
    "rules.not_beside.distance_m": Words("Distance", "Metres in between.", SECOND, "distance_m: 3"),
    "rules.planted": Words(
        "Planted already",
        "Plot numbers, as on the stakes, each with the treatment that is in the soil there.",
        "what is sown cannot be moved, and a plan that moves it would be sown twice",
        "planted: {101: Arlen}",
    ),
    "ground": Words(
        "Ground",
        "The field as a map.",
        DRILL,
        "ground: {rows: |  and a line of letters for each line of plots",
    ),
    "ground.plot_m": Words(
        "Size of a plot", "Width and length of a sown plot in metres.", DRILL, "plot_m: [1.5, 9.0]"
    ),
    "ground.gap_m": Words(
        "Gaps", "Metres between neighbours in a line, and between lines.", DRILL, "gap_m: [0.3, 1.5]"
    ),
    "ground.rows": Words(
        "Map",
        "A line of text is a line of plots, the farthest first; a letter is a block, a dot no plot.",
        DRILL,
        "rows: |  with lines such as  aaabbb  below it",
    ),
    "ground.file": Words(
        "Map in a file",
        "A CSV beside this file: line, place, block of every plot; where measured x_m, y_m of its middle.",
        DRILL,
        "file: map.csv",
    ),
    "ground.places": Words(
        "Map as a table",
        "The same table as in a file, written here; a plan carries its map so.",
        DRILL,
        "places: |  with lines such as  line,place,block  and  1,1,bay a  below it",
    ),
    "ground.names": Words(
        "Names of the blocks",
        "What the letters of the map stand for.",
        "rules speak of blocks by name, and the crew looks for the name at the headland",
        "names: {a: bay a, b: bay b}",
    ),
    "ground.numbering": Words(
        "Plot numbers",
        "Where plot numbers start and how they run.",
        "whoever scores the trial finds a plot by its number",
        "numbering: {start: bottom left, way: serpentine}",
    ),
    "ground.numbering.start": Words("Start", "Corner of the first plot.", DRILL, "start: bottom left"),
    "ground.numbering.way": Words("Way", "Back and forth, or always the same way.", DRILL, "way: serpentine"),
    "ground.north_deg": Words(
        "North",
        "Compass bearing, in degrees, of the way from the reader to the far edge.",
        "a map held the wrong way round is sown the wrong way round",
        "north_deg: 20",
    ),
    "ground.corner": Words(
        "Corner",
        "Latitude and longitude of the corner where numbering starts.",
        "the crew drives to it",
        "corner: [52.1, -1.3]",
    ),
    "aim": Words(
        "Aim",
        "What the plan is best for. `all pairs`: every difference equally. `overall`: the smallest joint "
        "confidence region. `even meetings`: pairs meet as equally often as they can, by the least sum of "
        "squared meetings and then the best average. `worst pair`: the least precise difference is made as "
        "precise as it can be. `against control`: all against the controls. `contrasts`: the comparisons "
        "you name.",
        "the plan that is best for one question is not the best for another",
        "aim: all pairs",
    ),
    "aim.contrasts": Words(
        "Contrasts",
        "Comparisons of interest, each with coefficients that sum to 0.",
        "a comparison that is not named is not planned for",
        "contrasts: {early against late: {of: {Arlen: 1, Clover: -1}}}",
    ),
    "aim.contrasts.*": Words(
        "Contrast", "One comparison.", "a comparison needs its sides", "new: {of: {Arlen: 1, Clover: -1}}"
    ),
    "aim.contrasts.*.weight": Words(
        "Weight", "How much it counts beside the others.", "the plan serves what weighs most", "weight: 2"
    ),
    "aim.contrasts.*.of": Words(
        "Coefficients",
        "Treatments with their coefficients: whole numbers, decimals or p/q, together 0.",
        "otherwise it is no comparison, and the site mean would enter it",
        "of: {Arlen: 1, Bracken: -1/2, Clover: -1/2}",
    ),
    "blocks_random": Words(
        "Random blocks",
        "Block variance over plot variance: plan for the combined analysis.",
        "fixed blocks waste what block totals tell; a plan that counts on it needs the combined analysis",
        "blocks_random: 2",
    ),
    "search": Words("Search", "How far to search.", NUMBERS, "search: {seconds: 20}"),
    "search.seconds": Words("Seconds", "Wall time of the search.", NUMBERS, "seconds: 20"),
    "search.moves": Words("Moves", "Moves scored in all.", NUMBERS, "moves: 1000000"),
    "search.seed": Words("Seed", "Seed of the search.", SEED, "seed: 1"),
    "search.workers": Words("Workers", "Threads.", "more threads than processors gain nothing", "workers: 2"),
    "randomise": Words(
        "Randomisation",
        "How the layout is drawn.",
        "without a fair draw no error is honest",
        "randomise: {sites: 3}",
    ),
    "randomise.seed": Words("Seed", "Seed of the layout; fresh where left out.", SEED, "seed: 8123"),
    "randomise.sites": Words(
        "Sites", "How many layouts to draw.", "two sites with one layout share its bad luck", "sites: 3"
    ),
    "precision": Words(
        "Precision",
        "What is expected of the field.",
        ERROR,
        "precision: {cv_percent: 9, mean: 8.1, unit: t/ha}",
    ),
    "precision.cv_percent": Words(
        "Coefficient of variation", "Between plots within these blocks, in percent.", ERROR, "cv_percent: 9"
    ),
    "precision.mean": Words("Mean", "Mean expected of the trial.", ERROR, "mean: 8.1"),
    "precision.unit": Words("Unit", "Unit of the mean.", ERROR, "unit: t/ha"),
    "precision.difference": Words("Difference", "Difference worth detecting.", ERROR, "difference: 0.5"),
    "precision.level_percent": Words("Level", "Two-sided level of the test.", ERROR, "level_percent: 5"),
    "precision.power_percent": Words("Power", "Chance of finding it.", ERROR, "power_percent: 80"),
    "packet": Words("Packet", "How the crew's packet is drawn.", PAPER, "packet: {paper: A4}"),
    "packet.paper": Words("Paper", "Size of the paper.", "labels on the wrong paper miss", "paper: A4"),
    "packet.blind": Words("Blind", "Codes in the place of names.", PAPER, "blind: true"),
    "packet.spare_bags": Words(
        "Spare bags", "Bags to fill for each treatment beyond its plots.", PAPER, "spare_bags: 1"
    ),
    "packet.labels": Words("Labels", "A sheet of labels, or single ones.", PAPER, "labels: sheet"),
}


def words_of(key: str) -> Words:
    """The words of a key as a message names it, or those of the nearest key above it.

    Parameters
    ----------
    key : such as `treatments.Arlen.plots` or `rules.keep_out.Heather[1]`
    """
    return next(words for pattern, words in _patterns() if pattern.match(key))


@cache
def _patterns() -> tuple[tuple[re.Pattern[str], Words], ...]:
    """Longest path first: what fits there is nearest to the key."""
    patterns = []
    for path in sorted(WORDS, key=len, reverse=True):
        parts = re.escape(path).replace(r"\*", ".+?").replace(r"\[\]", r"\[[0-9]+\]")
        patterns.append((re.compile(rf"{parts}(?=$|[.\[])" if path else ""), WORDS[path]))
    return tuple(patterns)
