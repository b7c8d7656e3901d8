"""Filler and plots that are planted already, from the trial file to the papers of the crew."""

from __future__ import annotations

import copy
import csv
import io
import json
from collections import Counter
from dataclasses import replace
from itertools import pairwise
from pathlib import Path
from typing import Any

import pytest

from search.cli.clashes import clash_lines
from search.field.beside import refuse_clash_in_soil
from search.field.crew import FILLER, crew_packet
from search.field.geojson import plots_geojson
from search.field.packet import write_packet
from search.field.planfile import plan_document, read_plan, write
from search.field.planmark import seal_of
from search.field.randomise import lay_out
from search.field.sheets.labels import _labels
from search.field.tables import plots_csv
from search.foundation.errors import BadInput, Impossible
from search.foundation.stopping import Limits
from search.proof.verify import verify
from search.runs.conductor import find
from search.runs.explaining import explained
from search.trial.limits import limits
from search.trial.reading import read_trial, trial_from_document
from search.trial.records import Trial
from tests.field.made import ISSUED
from tests.trial.test_schema import CONFIGS

Document = dict[str, Any]
ELM, MAPLE, BIRCH, LARCH, CEDAR = 3, 8, 1, 7, 2
"""Treatments of the example by number; what it says is in the soil."""
IN_SOIL = {101: ELM, 102: MAPLE, 103: BIRCH, 104: LARCH, 109: CEDAR}


@pytest.fixture(scope="module")
def example() -> tuple[Trial, Document]:
    """The shipped example with a plan from a short search."""
    trial = read_trial(CONFIGS / "part_sown.yaml")
    plan = find(trial, limits=Limits(moves=20_000), seed=1, workers=1)
    return trial, plan_document(plan, lay_out(trial, plan.contents, 5), ISSUED)


def test_the_example_is_proved_from_its_file(example: tuple[Trial, Document]) -> None:
    """Forty of 45 plots are planted, five are filler, what is in the soil stays, and the checker agrees."""
    trial, document = example
    plots = {plot["plot"]: plot for plot in document["plots"]}
    filler = [plot for plot in plots.values() if plot.get("filler")]
    assert len(plots) == 45
    assert len(filler) == 5
    assert all(plot["treatment"] is None for plot in filler)
    assert {plot["block"] for plot in filler} <= {"south-west", "south-east"}
    for number, i in IN_SOIL.items():
        assert plots[number]["treatment"] == trial.treatments[i].name
        assert plots[number]["in_soil"] is True
    assert sum(map(len, document["blocks"].values())) == 40
    verdict = verify(json.loads(json.dumps(document)))
    assert all(finding.ok for finding in verdict.findings), [f for f in verdict.findings if not f.ok]


def test_every_layout_leaves_the_soil_alone_and_draws_the_filler(example: tuple[Trial, Document]) -> None:
    """Over many layouts the planted plots never change, and filler comes to every other plot of its bay."""
    trial, document = example
    trial = replace(trial, rules=replace(trial.rules, not_beside=None))  # every draw is quick then
    number = {treatment.name: i for i, treatment in enumerate(trial.treatments)}
    contents = tuple(
        tuple(sorted(number[name] for name in document["blocks"][block.name])) for block in trial.blocks
    )
    met: Counter[int] = Counter()
    for seed in range(60):
        layout = lay_out(trial, contents, seed)
        stands = {planted.place.plot: planted.treatment for planted in layout.plots}
        assert {plot: stands[plot] for plot in IN_SOIL} == IN_SOIL
        met.update(plot for plot, treatment in stands.items() if treatment is None)
    free = {planted.place.plot for planted in layout.plots if planted.place.line == 1} - set(IN_SOIL)
    emptier = {j for j, block in enumerate(contents) if len(block) < trial.blocks[j].plots}
    expected = {p.place.plot for p in layout.plots if p.place.plot in free and p.place.block in emptier}
    assert set(met) == expected


def test_the_crew_is_told_what_needs_no_seed(example: tuple[Trial, Document]) -> None:
    """Amounts and bags leave out what is sown, cautions stay; filler has a code, no bag and no label."""
    trial, document = example
    packet = crew_packet(trial, document)
    elm, alder = packet.treatments[ELM], packet.treatments[0]
    assert (elm.plots, elm.in_soil, elm.to_sow, elm.total) == (4, 1, 3, "1.44 kg")  # 3 bags and a spare
    assert (alder.plots, alder.to_sow) == (4, 4)
    assert packet.size == "10 treatments, 6 blocks, 40 plots, 5 plots of filler"
    labels = list(_labels(packet))
    assert len(labels) == 40 + 10
    assert sum(label.in_soil for label in labels) == 5
    assert labels[0].entry.caution.startswith("Treated seed")
    assert FILLER.code not in {entry.code for entry in packet.treatments}
    rows = list(csv.DictReader(io.StringIO(plots_csv(packet).lstrip("\N{BYTE ORDER MARK}"))))
    assert Counter(row["note"] for row in rows) == {"": 35, "filler": 5, "planted already": 5}
    assert {row["treatment"] for row in rows if row["note"] == "filler"} == {""}
    features = json.loads(plots_geojson(packet) or "")["features"]
    assert sum(feature["properties"].get("note") == "filler" for feature in features) == 5


@pytest.mark.parametrize("blind", [False, True])
def test_the_whole_packet_is_written(example: tuple[Trial, Document], tmp_path: Path, blind: bool) -> None:
    """Every paper can be drawn, hidden names or not, and the plan file reads back."""
    trial, document = example
    if blind:
        raw = copy.deepcopy(document)
        raw["trial"]["packet"]["blind"] = True
        trial, document = trial_from_document(raw["trial"]), raw
    else:
        write(document, tmp_path / "plan.json")
        assert read_plan(tmp_path / "plan.json")[0] == trial
    files = write_packet(trial, document, tmp_path)
    assert all(file.stat().st_size > 200 for file in files)


SPOILED = {
    "filler in a bay that is planted in full": ("south-west", "north-east", "is filler, and all plots"),
    "another treatment in the soil": (101, 102, "planted with Elm already"),
}


@pytest.mark.parametrize("case", SPOILED)
def test_the_checker_finds_what_was_moved(example: tuple[Trial, Document], case: str) -> None:
    """Two plots exchanged in the file, which is sealed again: refuted with the reason."""
    _, document = example
    one, other, told = SPOILED[case]
    spoiled = copy.deepcopy(document)
    plots = spoiled["plots"]
    if isinstance(one, str):
        first = next(plot for plot in plots if plot.get("filler"))
        second = next(plot for plot in plots if plot["block"] == other)
    else:
        first, second = (next(plot for plot in plots if plot["plot"] == p) for p in (one, other))
    for key in ("treatment", "filler"):
        first[key], second[key] = second.get(key), first.get(key)
    spoiled["seal"] = seal_of(spoiled)
    verdict = verify(spoiled)
    assert any(told in finding.detail for finding in verdict.findings if not finding.ok)
    with pytest.raises(BadInput):
        crew_packet(trial_from_document(spoiled["trial"]), spoiled)


CLASHES: dict[str, tuple[dict[str, Any], str]] = {
    "kept out": ({"keep_out": {"A": ["one"]}}, "one must hold A, which is kept out of it"),
    "never share": ({"never_share_block": [["A", "B"]]}, "one must hold both A and B"),
    "twice": ({"planted": {"101": "A", "102": "A"}}, "planted on 2 plots of one already"),
}


@pytest.mark.parametrize("case", CLASHES)
def test_what_is_in_the_soil_clashes_with_a_line_of_the_file(case: str) -> None:
    """The clash names the planted plots beside the line, and no advice asks to dig them up."""
    rules, cause = CLASHES[case]
    document = {
        "trial": "soil",
        "treatments": ["A", "B", "C", "D"],
        "blocks": {"one": 3, "two": 3},
        "plots_each": [1, 2],
        "rules": {"planted": {"101": "A", "103": "B"}, **rules},
    }
    trial = trial_from_document(document)
    with pytest.raises(Impossible) as caught:
        limits(trial)
    assert cause in str(caught.value)
    told = " ".join(
        line for clash in explained(trial, caught.value).clashes for line in clash_lines(clash, True)
    )
    assert "planted: {101: A}" in told
    assert "(planted" not in told.split("(each tried, smallest first)")[1]


def test_neighbours_in_the_soil_that_may_not_be_are_told_before_a_search(tmp_path: Path) -> None:
    """No layout can part what is sown: the command ends as impossible at once and names both plots."""
    text = """\
trial: side by side
treatments: [A, B, C, D]
rules:
  planted: {101: A, 102: B}
  not_beside: {pairs: [[A, B]]}
ground:
  rows: |
    aaabbb
"""
    path = tmp_path / "trial.yaml"
    path.write_text(text, encoding="utf-8")
    with pytest.raises(Impossible, match="A on plot 101 stands beside B on plot 102, both in the soil"):
        refuse_clash_in_soil(read_trial(path))
    path.write_text(text.replace("102: B", "103: B"), encoding="utf-8")
    refuse_clash_in_soil(read_trial(path))


def test_walks_under_a_rule_about_neighbours_leave_the_soil_alone() -> None:
    """A tight row: A may not stand beside itself, and two plots are sown; all layouts keep both rules."""
    document = {
        "trial": "tight",
        "treatments": {"A": {"plots": 5}, "B": {"plots": [3, 6]}, "C": {"plots": [1, 2]}},
        "ground": {"rows": "aaaaaaaaaaa"},
        "blocks": {"a": {"at_most": 11}},
        "rules": {
            "twice_in_block": True,
            "not_beside": {"itself": True},
            "planted": {"102": "A", "106": "B"},
        },
    }
    trial = trial_from_document(document)
    contents = ((0,) * 5 + (1,) * 3 + (2,),)
    for seed in range(5):
        layout = lay_out(trial, contents, seed)
        stands = [planted.treatment for planted in layout.plots]
        assert (stands[1], stands[5]) == (0, 1)
        assert layout.contents == contents
        assert stands.count(None) == 2
        assert not any(x == y is not None for x, y in pairwise(stands))
