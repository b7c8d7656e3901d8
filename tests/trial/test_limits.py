"""Implied replication: valid for every plan, and sharp where it should be."""

from __future__ import annotations

import pytest
from hypothesis import assume, given, settings
from hypothesis import strategies as st

from search.foundation.errors import Impossible
from search.trial.limits import cliques, limits
from search.trial.reading import trial_from_document
from search.trial.records import Trial
from search.trial.tables import incidence, tables
from tests.drawn import all_plans, small_trials


@settings(max_examples=400, deadline=None)
@given(small_trials())
def test_no_plan_lies_outside_the_limits(trial: Trial) -> None:
    """Every plan found by trying them all keeps within the box and the sums; "impossible" means none."""
    try:
        plans = list(all_plans(trial))
    except OverflowError:
        assume(False)
    try:
        implied = limits(trial)
    except Impossible:
        assert not plans
        return
    for contents in plans:
        counts = incidence(contents, trial.t)
        plots, held = counts.sum(axis=1), counts.sum(axis=0)
        assert (implied.fewest <= held).all()
        assert (held <= implied.fullest).all()
        assert implied.planted[0] <= held.sum() <= implied.planted[1]
        assert (implied.least <= plots).all()
        assert (plots <= implied.most).all()
        for s in implied.sums:
            assert plots[list(s.treatments)].sum() <= s.most


def test_a_pair_that_never_meets_shares_the_blocks() -> None:
    """Two treatments of three plots or more that never meet in six blocks have exactly three each."""
    trial = trial_from_document(
        {
            "trial": "six",
            "treatments": 8,
            "plots_each": [3, 5],
            "blocks": {"count": 6, "plots": 5},
            "rules": {"never_share_block": [["T01", "T02"]]},
        }
    )
    implied = limits(trial)
    assert implied.least.tolist() == [3] * 8
    assert implied.most.tolist() == [3, 3, 5, 5, 5, 5, 5, 5]
    assert any("T01 and T02 never share a block" in sentence for sentence in implied.told)


def test_a_sum_limit_stays_where_the_box_cannot_say_it() -> None:
    """With one to three plots each, the two together are limited by four blocks, neither alone."""
    trial = trial_from_document(
        {
            "trial": "sum",
            "treatments": {"A": {"plots": [1, 3]}, "B": {"plots": [1, 3]}, "C": {"plots": [1, 4]}, "D": {}},
            "plots_each": [1, 4],
            "blocks": {"count": 4, "plots": 2},
            "rules": {"never_share_block": [["A", "B"]]},
        }
    )
    (s,) = limits(trial).sums
    assert (s.treatments, s.most) == ((0, 1), 4)


CLASHES = {
    "too few plots": ({"plots_each": 3}, "need at least"),
    "too many plots": ({"plots_each": [1, 1]}, "can have at most"),
    "held and kept out": (
        {"rules": {"must_hold": {"block 1": ["A"]}, "keep_out": {"A": ["block 1"]}}},
        "must hold A",
    ),
    "both held, never together": (
        {"rules": {"must_hold": {"block 1": ["A", "B"]}, "never_share_block": [["A", "B"]]}},
        "must hold both",
    ),
    "meet and never meet": (
        {"rules": {"meet_at_least": [{"pair": ["A", "B"], "blocks": 1}], "never_share_block": [["A", "B"]]}},
        "must share 1 blocks and never may",
    ),
    "too dense": ({"rules": {"meet_at_most": 0}}, "meetings"),
    "clique": ({"rules": {"never_share_block": [["A", "B", "C"]]}}, "share a block"),
    "replicate of the wrong size": ({"rules": {"replicates": {"r": ["block 1"]}}}, "replicate r has 2 plots"),
}


@pytest.mark.parametrize("case", CLASHES)
def test_a_clash_of_counts_is_told_in_words(case: str) -> None:
    """Each clash is recognised by counting alone, and named."""
    change, words = CLASHES[case]
    document = {"trial": "tiny", "treatments": ["A", "B", "C"], "blocks": {"count": 3, "plots": 2}, **change}
    with pytest.raises(Impossible, match=words):
        limits(trial_from_document(document))


@given(st.integers(2, 8), st.data())
def test_cliques_cover_every_pair_apart(t: int, data: st.DataObject) -> None:
    """Every pair that never meets lies in a set all of whose pairs never meet."""
    group = st.lists(st.integers(0, t - 1), min_size=2, max_size=4, unique=True)
    groups = data.draw(st.lists(group, max_size=4))
    names = [f"T{i}" for i in range(t)]
    document = {
        "trial": "x",
        "treatments": names,
        "blocks": {"count": 2, "plots": 1},
        "rules": {"never_share_block": [[names[i] for i in group] for group in groups]},
    }
    apart = tables(trial_from_document(document)).apart
    found = cliques(apart)
    for members in found:
        assert all(apart[i, j] for i in members for j in members if i != j)
    covered = {(i, j) for members in found for i in members for j in members if i < j}
    assert covered == {(i, j) for i in range(t) for j in range(i + 1, t) if apart[i, j]}
