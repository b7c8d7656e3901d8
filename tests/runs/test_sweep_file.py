"""Sweep files: what they make of a base trial, and what is said where they make nothing."""

from __future__ import annotations

from pathlib import Path

import pytest

from search.foundation.errors import FaultyTrial
from search.runs.sweep_file import Sweep, read_sweep

BASE = """\
trial: first
treatments:
  Arlen:
  St. Ives: {plots: 3}
  Clover:
  Dunlin:
blocks: {count: 4, plots: 3}
plots_each: [2, 4]
rules:
  keep_out: {Clover: [block 1]}
"""


def sweep_of(folder: Path, vary: str, base: str = BASE) -> Sweep:
    (folder / "first.yaml").write_text(base)
    (folder / "sweeps").mkdir()
    path = folder / "sweeps" / "sweep.yaml"
    path.write_text(f"sweep: how many\nbase: ../first.yaml\n{vary}")
    return read_sweep(path)


def faults_of(folder: Path, vary: str, base: str = BASE) -> list[str]:
    with pytest.raises(FaultyTrial) as caught:
        sweep_of(folder, vary, base)
    return [str(fault) for fault in caught.value.faults]


def test_all_combinations_the_last_key_fastest(tmp_path: Path) -> None:
    """A mapping gives every combination of its values, in the order of the file."""
    sweep = sweep_of(tmp_path, "vary: {blocks.count: [4, 5], blocks.plots: [2, 3]}\n")
    assert sweep.name == "how many"
    assert sweep.columns == ("blocks.count", "blocks.plots")
    assert [tuple(row.values.values()) for row in sweep.rows] == [
        ("4", "2"),
        ("4", "3"),
        ("5", "2"),
        ("5", "3"),
    ]
    assert [(row.number, row.trial.b, row.trial.n) for row in sweep.rows if row.trial] == [
        (1, 4, 8),
        (2, 4, 12),
        (3, 5, 10),
        (4, 5, 15),
    ]
    assert sweep.rows[0].trial.name == "first: blocks.count 4, blocks.plots 2"  # type: ignore[union-attr]


def test_mappings_one_after_another(tmp_path: Path) -> None:
    """A list of mappings is gone through one by one; a row has values for its own mapping alone."""
    sweep = sweep_of(tmp_path, "vary:\n- blocks.plots: [2, 3]\n- blocks.count: [5]\n  aim: [overall]\n")
    assert sweep.columns == ("blocks.plots", "blocks.count", "aim")
    assert [row.values for row in sweep.rows] == [
        {"blocks.plots": "2"},
        {"blocks.plots": "3"},
        {"blocks.count": "5", "aim": "overall"},
    ]


@pytest.mark.parametrize(
    "key",
    [
        "[treatments, St. Ives, plots]: [4, 5]",
        "? [treatments, St. Ives, plots]\n  : [4, 5]",
        "? - treatments\n    - St. Ives\n    - plots\n  : - 4\n    - 5",
    ],
)
def test_a_list_of_keys_where_a_name_holds_a_dot(tmp_path: Path, key: str) -> None:
    """YAML carries a list as a key in several forms; all of them lead to the same place."""
    sweep = sweep_of(tmp_path, f"vary:\n  {key}\n")
    assert [row.trial.treatments[1].least for row in sweep.rows if row.trial] == [4, 5]
    assert sweep.columns == ("treatments.St. Ives.plots",)


def test_cases_are_named_changes(tmp_path: Path) -> None:
    """Each case is tried with every combination; one without changes is the base as it stands."""
    cases = "cases:\n  free:\n  apart: {rules.never_share_block: [[Arlen, Clover]], plots_each: [1, 4]}\n"
    sweep = sweep_of(tmp_path, f"vary: {{blocks.plots: [2, 3]}}\n{cases}")
    assert sweep.columns == ("case", "blocks.plots")
    assert [row.values["case"] for row in sweep.rows] == ["free", "free", "apart", "apart"]
    free, *_, last = [row.trial for row in sweep.rows]
    assert free is not None
    assert last is not None
    assert (free.rules.never_share_block, last.rules.never_share_block) == ((), ((0, 2),))
    assert last.rules.keep_out == ((2, 0),)


def test_keys_appear_and_disappear(tmp_path: Path) -> None:
    """A key that the base lacks is put in, a value of nothing takes one out, names under names too."""
    sweep = sweep_of(
        tmp_path,
        "cases:\n  more: {precision.cv_percent: 9, treatments.Elder: {}}\n"
        "  less: {treatments.Dunlin: ~, rules: ~}\n"
        "  own: {treatments.Arlen.plots: 2}\n",
    )
    more, less, own = (row.trial for row in sweep.rows)
    assert more is not None
    assert less is not None
    assert own is not None
    assert (more.precision.cv_percent, more.t) == (9, 5)
    assert (less.t, less.rules.keep_out) == (3, ())
    assert own.treatments[0].own_range


def test_a_base_inside_the_sweep_file(tmp_path: Path) -> None:
    """The base may be the trial itself."""
    path = tmp_path / "sweep.yaml"
    path.write_text(
        "sweep: s\nbase: {trial: x, treatments: 4, blocks: {count: 4, plots: 2}}\n"
        "vary: {treatments: [4, 5]}\n"
    )
    assert [row.trial.t for row in read_sweep(path).rows if row.trial] == [4, 5]


def test_a_combination_that_makes_no_trial_is_a_row(tmp_path: Path) -> None:
    """A value that cannot be is a fault of its row, told with file, line and key; the others stand."""
    sweep = sweep_of(tmp_path, "vary:\n  blocks.plots: [3, many]\n")
    good, bad = sweep.rows
    assert good.trial is not None
    assert bad.trial is None
    (fault,) = bad.faults
    assert (Path(fault.file).name, fault.line, fault.key) == ("sweep.yaml", 4, "blocks.plots")


def test_a_rule_that_a_value_breaks_names_the_base(tmp_path: Path) -> None:
    """Where a value leaves a rule of the base without its block, the fault lies in the base's file."""
    sweep = sweep_of(tmp_path, "vary:\n  blocks: [{count: 4, plots: 3}, {x: 4, y: 4}]\n")
    (fault,) = sweep.rows[1].faults
    assert Path(fault.file).name == "first.yaml"
    assert fault.line == 10


@pytest.mark.parametrize(
    ("vary", "told"),
    [
        ("", "vary or cases"),
        ("vary: {block.plots: [3]}\n", 'did you mean "blocks"?'),
        ("vary: {blocks.plots: 3}\n", "try: [3]"),
        ("vary: {blocks.plots: []}\n", "a list of values"),
        ("vary: []\n", "each with a list of values"),
        ("vary: [{}]\n", "each with a list of values"),
        ("vary: 3\n", "keys of the trial with values"),
        ("vary: {blocks..plots: [3]}\n", "a dotted key, or a list of keys"),
        ("vary: {[]: [3]}\n", "a dotted key, or a list of keys"),
        ("vary: {blocks.plots: [3], [blocks, plots]: [4]}\n", "a second time"),
        ("vary: {treatments.Arlin.plots: [3]}\n", 'did you mean "Arlen"?'),
        ("vary: {trial.name: [3]}\n", "names with settings"),
        ("vary: {blocks.size: [3]}\n", "size"),
        ("cases: [a, b]\n", "names with changes"),
        ("cases: {a: {}, a: {}}\n", "a second time"),
        ("vary: {blocks.plots: [3]}\nspeed: 3\n", "speed"),
        (
            f"vary: {{search.seed: {list(range(200))}, blocks.plots: {list(range(200))}}}\n",
            "40,000 combinations",
        ),
    ],
)
def test_faults_of_the_sweep_file_are_told(tmp_path: Path, vary: str, told: str) -> None:
    """Every mistake in the sweep file itself is refused, with what to write instead."""
    assert any(told in fault for fault in faults_of(tmp_path, vary))


def test_a_fault_of_every_row_is_a_fault_of_the_file(tmp_path: Path) -> None:
    """A base that is wrong in itself is refused once, not row by row."""
    (fault,) = faults_of(tmp_path, "vary: {blocks.plots: [3, 4]}\n", BASE.replace("Clover: [", "Clovr: ["))
    assert "first.yaml, line 10" in fault


def test_a_base_that_is_not_there_is_told(tmp_path: Path) -> None:
    """A base file that does not exist, or is no trial, is refused by its name."""
    path = tmp_path / "sweep.yaml"
    path.write_text("sweep: s\nbase: nowhere.yaml\nvary: {treatments: [4, 5]}\n")
    with pytest.raises(FaultyTrial, match=r"nowhere\.yaml"):
        read_sweep(path)
    path.write_text("sweep: s\nbase: [1, 2]\nvary: {treatments: [4, 5]}\n")
    with pytest.raises(FaultyTrial, match="the name of its file"):
        read_sweep(path)
