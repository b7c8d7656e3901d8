"""Who plays the same part as whom."""

from __future__ import annotations

from dataclasses import replace
from fractions import Fraction
from itertools import combinations
from time import perf_counter

from hypothesis import given, settings
from hypothesis import strategies as st

from search.trial.records import (
    Aim,
    AimKind,
    Block,
    Contrast,
    Meeting,
    Replicate,
    Rules,
    Treatment,
    Trial,
)
from search.trial.relations import Relations, relations, unpacked_cell, unpacked_pair
from search.trial.roles import block_roles, replicate_roles, treatment_roles

NO_RULES = Rules()


def plain(t: int, sizes: list[int], rules: Rules = NO_RULES, least: int = 1, most: int = 9) -> Trial:
    return Trial(
        name="plain",
        treatments=tuple(Treatment(f"T{i}", least, most) for i in range(t)),
        blocks=tuple(Block(f"B{j}", k) for j, k in enumerate(sizes)),
        rules=rules,
    )


def test_without_rules_all_play_the_same_part() -> None:
    """With no rule all treatments play one part, and so do all blocks of one size."""
    trial = plain(5, [3, 3, 4, 3])
    assert treatment_roles(trial) == ((0, 1, 2, 3, 4),)
    assert block_roles(trial) == ((0, 1, 3), (2,))


def test_a_pair_apart_is_told_from_the_rest() -> None:
    """Two treatments that never share a block may stand for each other, and for nobody else."""
    trial = plain(6, [3] * 4, Rules(never_share_block=((1, 4),)))
    assert treatment_roles(trial) == ((0, 2, 3, 5), (1, 4))


def test_a_triangle_is_one_part_and_a_hexagon_is_six() -> None:
    """Three mutually apart treatments are interchangeable; around a hexagon of pairs nobody is."""
    triangles = plain(6, [3] * 4, Rules(never_share_block=((0, 1, 2), (3, 4, 5))))
    assert treatment_roles(triangles) == ((0, 1, 2), (3, 4, 5))
    around = tuple((i, (i + 1) % 6) for i in range(6))
    hexagon = plain(6, [3] * 4, Rules(never_share_block=around))
    assert treatment_roles(hexagon) == ((0,), (1,), (2,), (3,), (4,), (5,))


def test_ranges_meetings_and_barred_blocks_count() -> None:
    """A range of its own, a meeting rule or a barred block takes a treatment out of its class."""
    trial = plain(
        7,
        [3] * 5,
        Rules(meet_at_least=(Meeting(2, (0, 1)),), keep_out=((2, 3),), must_hold=((3, 4),)),
    )
    first, *others = trial.treatments
    trial = replace(trial, treatments=(replace(first, most=4), *others))
    assert treatment_roles(trial) == ((0,), (1,), (2,), (3,), (4, 5, 6))
    assert block_roles(trial) == ((0, 1, 2), (3,), (4,))


def test_controls_count_only_where_the_aim_asks() -> None:
    """A control is a treatment like others for all pairs, and stands alone against control."""
    trial = plain(4, [2, 2, 2])
    first, *others = trial.treatments
    trial = replace(trial, treatments=(replace(first, control=True), *others))
    assert treatment_roles(trial) == ((0, 1, 2, 3),)
    against = replace(trial, aim=Aim(AimKind.AGAINST_CONTROL))
    assert treatment_roles(against) == ((0,), (1, 2, 3))


def test_contrasts_part_treatments_by_their_coefficients() -> None:
    """Under contrasts only treatments with equal coefficients in each may stand for each other."""
    half, one = Fraction(1, 2), Fraction(1)
    contrast = Contrast("new against old", one, ((0, one), (1, -half), (2, -half)))
    trial = replace(plain(5, [2] * 5), aim=Aim(AimKind.CONTRASTS, (contrast,)))
    assert treatment_roles(trial) == ((0,), (1, 2), (3, 4))


def test_replicates_keep_their_blocks_together() -> None:
    """Blocks of two replicates never mix; replicates with the same blocks may stand for each other."""
    rules = Rules(replicates=(Replicate("I", (0, 1)), Replicate("II", (2, 3)), Replicate("III", (4, 5))))
    trial = plain(6, [3, 3, 3, 3, 2, 4], rules)
    assert block_roles(trial) == ((0, 1), (2, 3), (4,), (5,))
    assert replicate_roles(trial) == ((0, 1), (2,))
    more = replace(trial, rules=replace(rules, per_replicate=((5, 2),)))
    assert treatment_roles(more) == ((0, 1, 2, 3, 4), (5,))


def test_counts_share_one_number_without_mixing() -> None:
    """Counts packed into one number come out as they went in."""
    trial = plain(3, [2, 4], Rules(meet_at_least=(Meeting(1, (0, 2)),), twice_in_block=True))
    rel = relations(trial)
    assert unpacked_pair(int(rel.pairs[0, 2])) == (1, 2, 0)
    assert unpacked_cell(int(rel.cells[1, 1])) == (1, 4, 0)


@st.composite
def trials(draw: st.DrawFn) -> Trial:
    """Small trials with a few rules of every kind."""
    t, b = draw(st.integers(2, 6)), draw(st.integers(1, 4))
    treatment, block = st.integers(0, t - 1), st.integers(0, b - 1)
    pair = st.tuples(treatment, treatment).filter(lambda p: p[0] != p[1])
    meeting = st.builds(Meeting, st.integers(0, 2), pair)
    rules = Rules(
        never_share_block=draw(st.lists(pair, max_size=2).map(tuple)),
        meet_at_least=draw(st.lists(meeting, max_size=1).map(tuple)),
        meet_at_most=draw(st.lists(meeting, max_size=1).map(tuple)),
        keep_out=draw(st.lists(st.tuples(treatment, block), max_size=1).map(tuple)),
        must_hold=draw(st.lists(st.tuples(treatment, block), max_size=1).map(tuple)),
        replicates=draw(st.sampled_from([(), (Replicate("I", (0,)),)])),
        per_replicate=draw(st.sampled_from([(), ((0, 2),)])),
        twice_in_block=draw(st.booleans()),
    )
    trial = plain(t, draw(st.lists(st.integers(1, 2), min_size=b, max_size=b)), rules)
    if draw(st.booleans()):
        first, *others = trial.treatments
        trial = replace(trial, treatments=(replace(first, control=True), *others))
        trial = replace(trial, aim=Aim(AimKind.AGAINST_CONTROL))
    return trial


def _same_after_exchange(rel: Relations, i: int, j: int) -> bool:
    """The definition, word by word: exchange two treatments and compare everything."""
    order = list(range(rel.t))
    order[i], order[j] = j, i
    return (
        rel.ranges[i] == rel.ranges[j]
        and rel.controls[i] == rel.controls[j]
        and (rel.pairs[order][:, order] == rel.pairs).all()
        and (rel.cells[order] == rel.cells).all()
    )


@given(trials())
@settings(max_examples=150, deadline=None)
def test_roles_are_what_the_definition_says(trial: Trial) -> None:
    """Two treatments are in one class exactly when exchanging them changes nothing."""
    rel = relations(trial)
    class_of = {i: number for number, group in enumerate(treatment_roles(trial)) for i in group}
    for i, j in combinations(range(trial.t), 2):
        assert (class_of[i] == class_of[j]) == _same_after_exchange(rel, i, j)


def test_a_thousand_treatments_take_a_moment() -> None:
    """A thousand treatments with a few rules are sorted in well under a second."""
    apart = tuple((2 * i, 2 * i + 1) for i in range(20))
    trial = plain(1000, [10] * 400, Rules(never_share_block=apart))
    began = perf_counter()
    classes = treatment_roles(trial)
    assert len(classes) == 21
    assert perf_counter() - began < 2
