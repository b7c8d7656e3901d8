"""Randomisation: uniform over what it says, never against a rule."""

from __future__ import annotations

from collections import Counter
from itertools import permutations

import pytest
from hypothesis import assume, given, settings
from hypothesis import strategies as st
from scipy.stats import chisquare

from search.efficiency.evaluator import score
from search.field.randomise import fresh_seed, lay_out, site_seeds
from search.trial.checker import broken_rules
from search.trial.records import Trial
from tests.drawn import all_plans, small_trials, tiny_trial
from tests.field.made import plan_of, trial_with

TRIANGLE = ((0, 1), (0, 2), (1, 2))


def test_every_layout_of_the_triangle_is_equally_likely() -> None:
    """Three pairs in three blocks, each in two orders: 6 × 8 layouts (counted by hand), all alike.

    Chi-squared with 47 degrees of freedom, seeds fixed.
    """
    trial = tiny_trial()
    drawn = Counter(
        tuple(planted.treatment for planted in lay_out(trial, TRIANGLE, seed).plots) for seed in range(1440)
    )
    possible = {
        tuple(pair[side] for pair, turn in zip(blocks, turns, strict=True) for side in turn)
        for blocks in permutations(TRIANGLE)
        for turns in _turns(3)
    }
    assert len(possible) == 48
    assert set(drawn) == possible
    assert chisquare([drawn[layout] for layout in possible]).pvalue > 0.001


def _turns(blocks: int) -> list[tuple[tuple[int, int], ...]]:
    turns: list[tuple[tuple[int, int], ...]] = [()]
    for _ in range(blocks):
        turns = [(*before, turn) for before in turns for turn in ((0, 1), (1, 0))]
    return turns


def test_labels_move_only_among_treatments_that_play_the_same_part() -> None:
    """A treatment kept out of a block never changes names with one that is not."""
    trial = tiny_trial(treatments=["A", "B", "C"], rules={"keep_out": {"A": ["block 1"]}})
    contents = ((1, 2), (0, 1), (0, 2))
    for seed in range(60):
        drawn = lay_out(trial, contents, seed)
        assert 0 not in drawn.contents[0]
        assert drawn.contents[0] == (1, 2)
    assert {lay_out(trial, contents, seed).contents for seed in range(60)} == {
        ((1, 2), (0, 1), (0, 2)),
        ((1, 2), (0, 2), (0, 1)),
    }


@settings(max_examples=60, deadline=None)
@given(small_trials(), st.integers(0, 2**63 - 1))
def test_no_draw_breaks_a_rule_or_costs_efficiency(trial: Trial, seed: int) -> None:
    """Whatever the rules and the aim, a layout obeys them as well and is worth as much as its plan."""
    try:
        contents = next(iter(all_plans(trial)), None)
    except OverflowError:
        contents = None
    assume(contents is not None)
    assert contents is not None
    drawn = lay_out(trial, contents, seed)
    assert not broken_rules(trial, drawn.contents)
    assert score(trial, drawn.contents).aim == pytest.approx(score(trial, contents).aim, abs=1e-9)
    by_block: list[list[int]] = [[] for _ in trial.blocks]
    for planted in drawn.plots:
        if planted.treatment is not None:
            by_block[planted.place.block].append(planted.treatment)
        assert (planted.treatment is not None) or trial.blocks[planted.place.block].may_be_emptier
    stands = {planted.place.plot: planted.treatment for planted in drawn.plots}
    assert all(stands[x.plot] == x.treatment for x in trial.rules.planted)
    assert tuple(tuple(sorted(block)) for block in by_block) == drawn.contents


def test_the_design_documents_trial_keeps_its_rules() -> None:
    """Fifty layouts of the Low Moor trial all obey its rules."""
    plan = plan_of(trial_with())
    layouts = [lay_out(plan.trial, plan.contents, seed) for seed in range(50)]
    assert not any(broken_rules(plan.trial, layout.contents) for layout in layouts)
    assert len({layout.plots for layout in layouts}) == 50


def test_a_seed_gives_one_layout_and_the_scheme_is_told() -> None:
    """The same seed draws the same layout; what could move is named."""
    first, again = (lay_out(tiny_trial(), TRIANGLE, 5) for _ in range(2))
    assert first == again
    assert first.seed == 5
    assert first.scheme == (
        "treatments drawn among those that play the same part: all of them; whole blocks drawn among "
        "those equal in size, rules and replicate: all of them; plots drawn within each block"
    )
    trial = trial_with()
    plan = plan_of(trial)
    scheme = lay_out(trial, plan.contents, 1).scheme
    assert "Fescue, Gorse" in scheme
    assert "bay a, bay b" in scheme
    assert "Dunlin" not in scheme


def test_sites_have_seeds_of_their_own() -> None:
    """The first site has the layout's seed, the others follow from it, none twice."""
    assert site_seeds(8123, 1) == (8123,)
    seeds = site_seeds(8123, 5)
    assert seeds[0] == 8123
    assert len(set(seeds)) == 5
    assert seeds[:3] == site_seeds(8123, 3)
    assert 0 <= fresh_seed() < 10**9
