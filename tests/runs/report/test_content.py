"""What the page of a sweep tells is what the table tells, each name once, nothing as markup."""

from __future__ import annotations

import json
import re
from base64 import b64encode
from dataclasses import replace
from hashlib import sha256

import pandas as pd
import pytest

from search.runs.report import content as contents
from search.runs.report.content import content, summary
from search.runs.report.page import sweep_html
from search.runs.sweep_table import frame_of
from tests.runs.report.swept import swept


def test_page_and_table_tell_the_same() -> None:
    """Figures of every row are those of the table, to eight digits; plans are those of the rows."""
    sweep, rows = swept()
    told = content(sweep.name, sweep.columns, rows)
    table = frame_of(sweep.columns, rows).to_dict("records")
    for row, shown, line in zip(rows, told["rows"], table, strict=True):
        assert (shown["row"], shown["status"]) == (line["row"], line["status"])
        assert shown["values"] == [row.row.values[column] for column in sweep.columns]
        if row.plan is None:
            assert shown["reason"] == line["reason"]
            assert "best" not in shown
            continue
        for key, column in {
            "best": "best_found",
            "bound": "bound",
            "gap": "gap_percent",
            "blocks": "loss_to_blocks_percent",
            "replication": "loss_to_replication_percent",
            "error": "standard_error",
            "detectable_worst": "detectable_difference_worst_pair",
            "df": "residual_df",
        }.items():
            if pd.isna(line[column]):
                assert shown.get(key) is None, column
            else:
                assert shown[key] == pytest.approx(line[column], rel=1e-7), column
        blocks = [tuple(map(int, block.split())) for block in shown["plan"].split("|")]
        assert tuple(blocks) == row.plan.contents
        names = told["names"][shown["treatments"]]
        assert names == [treatment.name for treatment in row.plan.trial.treatments]
    # Six treatments laid round blocks of two or of three fall into parts.
    assert [line["row"] for line in table[:6] if "disconnected" in line["flags"]] == [4, 5]
    # Five or six treatments and six blocks: three lists of names for all rows.
    assert len(told["names"]) == 3


def test_a_page_carries_no_more_plots_than_it_can(monkeypatch: pytest.MonkeyPatch) -> None:
    """Beyond its limit a page tells the figures of a row without its plan, and how many it leaves out."""
    sweep, rows = swept()
    monkeypatch.setattr(contents, "MOST_PLOTS", 30)
    told = content(sweep.name, sweep.columns, rows)
    with_plan = [row for row in told["rows"] if "plan" in row]
    assert sum(row["n"] for row in with_plan) <= 30
    assert told["left_out"] == 6 - len(with_plan)
    assert all("best" in row for row in told["rows"][:6])


def test_the_sweep_in_a_sentence() -> None:
    """How rows ended and how much is proved; nothing of gaps where there is no plan."""
    _, rows = swept()
    plans = [row.plan for row in rows if row.plan is not None and row.plan.score.connected]
    gaps = sorted(plan.gap_percent or 0.0 for plan in plans)
    text = summary(rows)
    assert text.startswith("12 rows: 6 planned, 6 impossible. ")
    assert text.endswith(f"the largest gap is {gaps[-1]:.2g} %.")
    assert summary(rows[6:]) == "6 rows: 6 impossible."
    assert summary(rows[:1]).startswith("1 row: 1 planned.")


def test_nothing_ends_a_script() -> None:
    """Data and script stay what they are whatever names say; the policy names the script that is there."""
    sweep, rows = swept()
    hostile = "</script><script>alert(1)</script><!--"
    rows = (replace(rows[0], row=replace(rows[0].row, values={sweep.columns[0]: hostile})),)
    page = sweep_html(hostile, (hostile, *sweep.columns), rows)
    assert hostile not in page
    scripts = re.findall(r"<script(?: [^>]*)?>(.*?)</script>", page, re.DOTALL)
    assert len(scripts) == 2
    data = json.loads(scripts[0])
    assert data["name"] == hostile
    digest = b64encode(sha256(scripts[1].encode()).digest()).decode()
    assert f"script-src 'sha256-{digest}'" in page
    assert not re.search(r"https?://(?!www\.w3\.org/2000/svg)", page)
