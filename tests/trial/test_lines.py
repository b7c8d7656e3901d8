"""Lines of a file: each demand has its place, and a trial can do without any of them."""

from __future__ import annotations

from hypothesis import given, settings
from hypothesis import strategies as st

from search.trial.checker import broken_rules
from search.trial.lines import demands, only, place, quoted
from search.trial.nodes import parse_nodes
from search.trial.reading import trial_from_nodes
from search.trial.records import Trial
from tests.drawn import all_plans, small_trials

TEXT = """\
trial: lines
treatments:
  A: {plots: 2}
  B:
  C:
  D: {plots: [1, 3], control: true}
blocks: {one: 3, two: 3, three: 2}
plots_each: [2, 3]
rules:
  never_share_block:
    - [A, B]
  meet_at_least: [{pair: [B, C], blocks: 1}]
  meet_at_most: 2
  keep_out: {C: [one, two]}
  must_hold:
    every block: [D]
    one: [A]
  replicates: {first: [one]}
"""
TOLD = {
    3: "A: {plots: 2}",
    6: "D: {plots: [1, 3]}",
    8: "plots_each: [2, 3]",
    11: "never_share_block: [A, B]",
    12: "meet_at_least: {pair: [B, C], blocks: 1}",
    13: "meet_at_most: 2",
    14: "keep_out: {C: [two]}",
    16: "must_hold: {every block: [D]}",
    17: "must_hold: {one: [A]}",
    18: "replicates: {first: [one]}",
    0: "twice_in_block: false",
}


def trial() -> Trial:
    """The trial of `TEXT`."""
    return trial_from_nodes(parse_nodes(TEXT, "field.yaml"), "field.yaml")


def test_every_demand_is_told_with_its_line() -> None:
    """The words and line numbers are those of the file, counted by hand; a default has no line."""
    told = {said.line: quoted(trial(), said) for said in demands(trial())}
    assert told == TOLD
    (default,) = [said for said in demands(trial()) if said.line == 0]
    assert place(trial(), default) == "not in the file"


def test_lists_on_one_line_are_told_apart_by_key() -> None:
    """Two blocks that a treatment is kept out of are two demands on one line."""
    keys = [said.key for said in demands(trial()) if said.sort == "keep_out"]
    assert keys == ["rules.keep_out.C[1]", "rules.keep_out.C[2]"]


@settings(max_examples=60, deadline=None)
@given(small_trials(), st.data())
def test_fewer_demands_admit_every_plan_that_more_admit(drawn: Trial, data: st.DataObject) -> None:
    """Whatever is left out, no plan of the trial is lost; with all demands it is the trial again."""
    lines = demands(drawn)
    assert only(drawn, lines) == drawn
    kept = data.draw(st.lists(st.sampled_from(lines), unique=True)) if lines else []
    try:
        plans = list(all_plans(drawn, most=2_000))
    except OverflowError:
        return
    for plan in plans[:50]:
        assert not broken_rules(only(drawn, kept), plan)
