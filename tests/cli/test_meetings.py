"""Both aims from the file to the verdict: integers are told as integers, wherever an aim is told."""

from __future__ import annotations

import csv
import json
from pathlib import Path

import pytest

from search.cli.main import invoke

TRIAL = """\
trial: Mill Lane
treatments: [Arlen, Bracken, Clover, Dunlin, Elder, Fescue]
blocks: {a: 4, b: 4, c: 3, d: 4, e: 3}
plots_each: [2, 4]
rules: {never_share_block: [[Arlen, Clover]]}
aim: AIM
precision: {cv_percent: 9, mean: 8, unit: t/ha}
"""


def written(folder: Path, aim: str) -> Path:
    path = folder / "trial.yaml"
    path.write_text(TRIAL.replace("AIM", aim), encoding="utf-8")
    return path


@pytest.mark.parametrize(("aim", "whole"), [("even meetings", True), ("worst pair", False)])
def test_from_file_to_verdict(
    aim: str, whole: bool, tmp_path: Path, capsys: pytest.CaptureFixture[str]
) -> None:
    """inspect, bound, plan, verify and kept: all of them speak of the aim as it is measured."""
    path, store, out = written(tmp_path, aim), str(tmp_path / "store.sqlite"), tmp_path / "out"
    assert invoke(["inspect", str(path)]) == 0
    told = capsys.readouterr().out
    assert ("sum of squared meetings:" in told) is whole
    assert ("efficiency: at best" in told) is not whole

    assert invoke(["bound", str(path)]) == 0
    told = capsys.readouterr().out
    assert ("The highest of them (*) counts" in told) is whole
    assert ("The lowest of them (*) counts" in told) is not whole

    plan = ["plan", str(path), "--moves", "60000", "--workers", "1", "--out", str(out), "--store", store]
    assert invoke([*plan, "--json"]) == 0
    document = json.loads(capsys.readouterr().out)["plan"]
    reached, bound = document["score"]["aim"], document["bound"]
    assert bound["aim"] == document["trial"]["aim"] == aim
    assert isinstance(reached, int) is whole
    assert isinstance(bound["value"], int) is whole
    gap = 100 * (reached / bound["value"] - 1) if whole else 100 * (1 - reached / bound["value"])
    assert document["gap_percent"] == pytest.approx(gap, abs=1e-9)
    assert invoke(["verify", str(out / "plan.json")]) == 0
    capsys.readouterr()

    assert invoke(plan) == 0  # issued already: told again as it stands
    told = capsys.readouterr().out
    assert ("sum of squared meetings" in told) is whole
    assert ("plots of the best possible plan" in told) is False or not whole
    assert (f"{reached:.6f}" in told) is not whole
    page = (out / "plan.html").read_text(encoding="utf-8")
    assert ("Sum of squared meetings" in page) is whole
    assert (f"Efficiency, {aim}" in page) is not whole

    assert invoke(["kept", "list", "--store", store, "--json"]) == 0
    [entry] = json.loads(capsys.readouterr().out)["plans"]
    assert entry["score"] == reached
    assert (entry["efficiency"] is None) is whole
    assert entry["gap_percent"] == pytest.approx(gap, abs=1e-6)


def test_a_sweep_over_aims(tmp_path: Path, capsys: pytest.CaptureFixture[str]) -> None:
    """Each row has the figures of its own aim, and a second sweep takes all of them from the store."""
    (tmp_path / "trial.yaml").write_text(TRIAL.replace("AIM", "all pairs"), encoding="utf-8")
    sweep = tmp_path / "sweep.yaml"
    sweep.write_text(
        "sweep: aims\nbase: trial.yaml\nvary: {aim: [all pairs, even meetings, worst pair], "
        "search.moves: [40000]}\n",
        encoding="utf-8",
    )
    command = ["sweep", str(sweep), "--workers", "1", "--out", str(tmp_path / "out")]
    command += ["--store", str(tmp_path / "store.sqlite")]
    for where_from in ("searched", "kept"):
        assert invoke(command) == 0
        capsys.readouterr()
        with (tmp_path / "out" / "sweep.csv").open(encoding="utf-8", newline="") as file:
            rows = {row["aim"]: row for row in csv.DictReader(file)}
        assert {row["where_from"] for row in rows.values()} == {where_from}
        even = rows["even meetings"]
        assert float(even["best_found"]) >= float(even["bound"]) > 10
        assert float(even["best_found"]).is_integer()
        for aim in ("all pairs", "worst pair"):
            assert 0.5 < float(rows[aim]["best_found"]) <= float(rows[aim]["bound"]) <= 1
        assert float(rows["worst pair"]["best_found"]) < float(rows["all pairs"]["best_found"])


def test_repeats_are_warned_of(tmp_path: Path, capsys: pytest.CaptureFixture[str]) -> None:
    """Where a treatment may stand twice in a block the planner hears what even meetings would do."""
    path = written(tmp_path, "even meetings")
    path.write_text(path.read_text().replace("rules: {", "rules: {twice_in_block: true, "), encoding="utf-8")
    assert invoke(["inspect", str(path)]) == 0
    assert "do not meet, so even meetings favour repeats" in " ".join(capsys.readouterr().out.split())
