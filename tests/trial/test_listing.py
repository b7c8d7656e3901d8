"""Maps as tables: read as they stand, kept inside a plan, refused with the line at fault."""

from __future__ import annotations

import json
from pathlib import Path
from typing import Any

import pytest

from search.foundation.errors import FaultyTrial
from search.trial.reading import read_trial, trial_from_document
from search.trial.records import Spot, Trial
from search.trial.writing import trial_document

TABLE = """line,place,block,x_m,y_m
1,1,north,0,0
1,2,north,1.5,0
1,4,"south, wet",6,0
2,1,"south, wet",0,9
"""


def with_places(table: str, **ground: Any) -> Trial:
    """Two treatments on the plots of a table."""
    return trial_from_document(
        {"trial": "table", "treatments": ["A", "B"], "ground": {"places": table, **ground}}
    )


def test_a_table_names_blocks_and_plots() -> None:
    """Blocks in the order in which their names are met; a skipped place has no plot."""
    trial = with_places(TABLE)
    assert [(block.name, block.plots) for block in trial.blocks] == [("north", 2), ("south, wet", 2)]
    assert trial.ground is not None
    assert trial.ground.spots[2] == Spot(1, 4, 1, 6.0, 0.0)
    assert trial.ground.numbering.way == "same way"


def test_a_file_beside_the_trial_becomes_part_of_the_plan(tmp_path: Path) -> None:
    """Semicolons, capitals and a byte-order mark are read; the plan then needs the file no more."""
    (tmp_path / "map.csv").write_text(
        "\ufeffLine;Place;Block\n1;1;a\n1;2;a\n\n2;1;b\n2;2;b\n", encoding="utf-8"
    )
    (tmp_path / "trial.yaml").write_text("trial: x\ntreatments: [A, B]\nground: {file: map.csv}\n")
    trial = read_trial(tmp_path / "trial.yaml")
    document = json.loads(json.dumps(trial_document(trial)))
    assert "file" not in document["ground"]
    assert trial_from_document(document) == trial


@pytest.mark.parametrize("name", ['quoted "name"', "semi;colon", "comma, name", "区画", "x" * 200])
def test_block_names_survive_the_plan(name: str) -> None:
    """Whatever a block is called, the table in a plan gives it back."""
    quoted = name.replace('"', '""')
    trial = with_places(f'line,place,block\n1,1,"{quoted}"\n1,2,"{quoted}"\n2,1,b\n2,2,b\n')
    assert trial.blocks[0].name == name
    assert trial_from_document(json.loads(json.dumps(trial_document(trial)))) == trial


def test_more_than_52_blocks() -> None:
    """A table has no alphabet that could run out."""
    rows = "\n".join(f"{line},{place},bay {line}" for line in range(1, 61) for place in (1, 2))
    assert with_places("line,place,block\n" + rows).b == 60


FAULTS = {
    "no block": ("line,place\n1,1", "no column block"),
    "unknown column": ("line,place,blocks\n1,1,a", 'did you mean "block"'),
    "short row": ("line,place,block\n1,1,a\n1,2", "2 cells in line 3"),
    "zero": ("line,place,block\n0,1,a", 'the line "0" in line 2'),
    "words": ("line,place,block\n1,one,a", 'the place "one"'),
    "twice": ("line,place,block\n1,1,a\n1,1,b", "line 1, place 1 a second time"),
    "case": ("line,place,block\n1,1,Bay\n1,2,bay", '"bay" beside "Bay"'),
    "no name": ("line,place,block\n1,1,", "the block"),
    "half measured": ("line,place,block,x_m\n1,1,a,1", "one of x_m and y_m"),
    "decimal comma": ('line,place,block,x_m,y_m\n1,1,a,"1,5",0', "a decimal point: 1.5"),
    "missing metres": ("line,place,block,x_m,y_m\n1,1,a,,0", "a number of metres, on every row"),
    "empty": ("line,place,block", "no plots"),
    "far": ("line,place,block\n1,1000,a", "from 1 to 999"),
}


@pytest.mark.parametrize("case", FAULTS)
def test_a_faulty_table_is_refused_with_its_line(case: str) -> None:
    """Each mistake is told in the words of the table."""
    table, words = FAULTS[case]
    with pytest.raises(FaultyTrial) as caught:
        with_places(table)
    assert words in str(caught.value)


def test_plots_upon_one_another_are_refused() -> None:
    """Measured plots of 1.5 m need 1.5 m; a millimetre is forgiven."""
    table = "line,place,block,x_m,y_m\n1,1,a,0,0\n1,2,a,{},0\n"
    with pytest.raises(FaultyTrial, match="line 1, place 2 upon line 1, place 1"):
        with_places(table.format(1.4), plot_m=[1.5, 9])
    assert with_places(table.format(1.4995), plot_m=[1.5, 9]).n == 2


def test_one_form_of_map_alone() -> None:
    """Rows and a table together are two accounts of one field; none at all is no map."""
    with pytest.raises(FaultyTrial, match="rows and places"):
        with_places(TABLE, rows="aabb")
    with pytest.raises(FaultyTrial, match="neither rows"):
        trial_from_document({"trial": "x", "treatments": 2, "ground": {"plot_m": [1, 2]}})


def test_a_document_cannot_make_anybody_read_a_file() -> None:
    """A plan that names a file is refused unread; a missing file is told by its path."""
    with pytest.raises(FaultyTrial, match="under places"):
        trial_from_document({"trial": "x", "treatments": 2, "ground": {"file": "/etc/hostname"}})


def test_a_missing_file_is_told(tmp_path: Path) -> None:
    """The path is looked for beside the trial file."""
    (tmp_path / "trial.yaml").write_text("trial: x\ntreatments: 2\nground: {file: nowhere.csv}\n")
    with pytest.raises(FaultyTrial, match="no such file"):
        read_trial(tmp_path / "trial.yaml")


def test_faults_of_a_long_table_are_told_once_over() -> None:
    """A hundred rows with the same slip give a score of faults, not a hundred."""
    rows = "\n".join(f"{line},zero,a" for line in range(1, 101))
    with pytest.raises(FaultyTrial) as caught:
        with_places("line,place,block\n" + rows)
    assert len(caught.value.faults) == 20
