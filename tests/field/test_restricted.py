"""Layouts under not_beside: uniform over what the rule allows, by every route; the clash told."""

from __future__ import annotations

from collections import Counter
from itertools import permutations, product
from typing import Any

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st
from scipy.stats import chisquare

from search.field import restricted
from search.field.beside import Restriction, clash_in_words, restriction
from search.field.chain import Walk
from search.field.planfile import plan_document
from search.field.randomise import lay_out
from search.field.urn import Urn
from search.foundation.errors import Undecided
from search.proof import verify as proof
from search.trial.numbering import Place, places
from search.trial.reading import trial_from_document
from search.trial.records import Contents, Trial
from tests.field.made import ISSUED, plan_of, trial_with

CONTENTS: Contents = ((0, 1, 2), (0, 1, 2))
SQUARE = "aaa\nbbb"
RULE: dict[str, Any] = {"itself": True, "pairs": [["A", "B"]]}


def twin(rule: dict[str, Any] = RULE, rows: str = ".aaa\nbbb.", **more: Any) -> Trial:
    """Three treatments in two complete blocks of three, one line above the other."""
    return trial_from_document(
        {
            "trial": "twin",
            "treatments": ["A", "B", "C"],
            "ground": {"rows": rows},
            "rules": {"not_beside": rule},
            **more,
        }
    )


def allowed(trial: Trial, sites: tuple[Place, ...]) -> list[tuple[int, ...]]:
    """Every layout of complete blocks that keeps the rule, found by trying them all."""
    plots = [[p for p, site in enumerate(sites) if site.block == j] for j in range(trial.b)]
    found = []
    for orders in product(permutations(range(3)), repeat=trial.b):
        standing = [0] * len(sites)
        for order, own in zip(orders, plots, strict=True):
            for p, i in zip(own, order, strict=True):
                standing[p] = i
        if not clash_in_words(trial, sites, standing):
            found.append(tuple(standing))
    return found


def urn_of(trial: Trial) -> tuple[Urn, Restriction]:
    """What a draw of the twin trial needs."""
    sites = places(trial)
    limit = restriction(trial, sites)
    assert limit is not None
    return Urn.of(trial, CONTENTS, sites), limit


def test_layouts_that_keep_the_rule_are_counted_by_hand() -> None:
    """A and B never side by side leaves ACB and BCA in each line; itself alone leaves 6 × 2 derangements."""
    trial = twin()
    assert len(allowed(trial, places(trial))) == 4
    square = twin({"itself": True}, rows=SQUARE)
    assert len(allowed(square, places(square))) == 12


@pytest.mark.parametrize("rule", [RULE, {"itself": True}, {"pairs": [["A", "B"]]}])
def test_every_layout_that_keeps_the_rule_is_equally_likely(
    rule: dict[str, Any], monkeypatch: pytest.MonkeyPatch
) -> None:
    """Chi-squared over all layouts that keep the rule (found by trying them all), seeds fixed."""
    monkeypatch.setattr("search.field.randomise.never_on", lambda *_: ((), True))
    trial = twin(rule, rows=SQUARE if rule == {"itself": True} else ".aaa\nbbb.")
    drawn = Counter(
        tuple(planted.treatment for planted in lay_out(trial, CONTENTS, seed).plots) for seed in range(480)
    )
    possible = allowed(trial, places(trial))
    assert set(drawn) == set(possible)
    assert chisquare([drawn[layout] for layout in possible]).pvalue > 0.001


def test_the_walk_is_as_uniform_as_the_draw(monkeypatch: pytest.MonkeyPatch) -> None:
    """Without rejection the checked walk reaches the same layouts equally often (chi-squared)."""
    monkeypatch.setattr(restricted, "_by_rejection", lambda *_: None)
    trial = twin({"itself": True}, rows=SQUARE)
    urn, limit = urn_of(trial)
    drawn: Counter[tuple[int, ...]] = Counter()
    for seed in range(240):
        found = restricted.draw_restricted(trial, urn, limit, np.random.default_rng(seed))
        assert found.method == "chain"
        assert found.uniform
        drawn[tuple(found.standing.tolist())] += 1
    possible = allowed(trial, places(trial))
    assert set(drawn) == set(possible)
    assert chisquare([drawn[layout] for layout in possible]).pvalue > 0.001


def test_the_walk_sees_neighbours_as_often_as_the_draw(monkeypatch: pytest.MonkeyPatch) -> None:
    """How often each pair stands side by side on Low Moor: drawn and walked agree (chi-squared)."""
    trial = trial_with(rules={"not_beside": {"itself": True, "pairs": [["Arlen", "Elder"]]}})
    contents = plan_of(trial).contents
    near = restriction(trial, places(trial))
    assert near is not None

    def seen(seeds: range) -> Counter[tuple[int, int]]:
        pairs: Counter[tuple[int, int]] = Counter()
        for seed in seeds:
            standing = [planted.treatment for planted in lay_out(trial, contents, seed).plots]
            for p, q in zip(near.first.tolist(), near.second.tolist(), strict=True):
                one, other = sorted((standing[p], standing[q]))
                pairs[one, other] += 1
        return pairs

    monkeypatch.setattr("search.field.randomise.never_on", lambda *_: ((), True))
    drawn = seen(range(60))
    monkeypatch.setattr(restricted, "_by_rejection", lambda *_: None)
    walked = seen(range(60))
    assert not any(one == other or (one, other) == (0, 4) for one, other in drawn | walked)
    keys = sorted(drawn | walked)
    expected = np.array([(drawn[key] + walked[key]) / 2 for key in keys])
    statistic = sum(
        (np.array([part[key] for key in keys]) - expected) ** 2 @ (1 / expected) for part in (drawn, walked)
    )
    # Neighbours of one layout hang together, so the statistic is compared with a bound far out.
    assert statistic < 3 * len(keys)


@settings(max_examples=20, deadline=None)
@given(st.integers(0, 2**32), st.integers(0, 2))
def test_every_draw_keeps_the_rule(seed: int, kind: int) -> None:
    """Whatever the seed, no layout has forbidden neighbours; the same seed draws the same."""
    rule = ({"itself": True}, {"pairs": [["Arlen", "Elder"]]}, {"pairs": [["Arlen", "Dunlin"]]})[kind]
    trial = trial_with(rules={"not_beside": rule})
    drawn = lay_out(trial, plan_of(trial).contents, seed)
    standing = [planted.treatment for planted in drawn.plots]
    assert clash_in_words(trial, places(trial), standing) == ""
    assert drawn.restricted is not None
    assert lay_out(trial, plan_of(trial).contents, seed) == drawn


def test_what_can_never_stand_is_listed() -> None:
    """In ACB and BCA, C stands in the middle alone, and A and B never do (by hand)."""
    trial = twin({"pairs": [["A", "B"]]})
    found = lay_out(trial, CONTENTS, 1).restricted
    assert found is not None
    assert found.complete
    sites = places(trial)
    never = {(sites[p].plot, i) for p, i in found.never}
    middle = {102, 202}
    assert never == {(site.plot, 2) for site in sites if site.plot not in middle} | {
        (plot, i) for plot in middle for i in (0, 1)
    }


def test_the_plan_file_tells_the_restriction_and_is_proved() -> None:
    """Method, uniformity and what can never stand are in plan.json; the checker finds the rule kept."""
    trial = trial_with(rules={"not_beside": {"itself": True}})
    plan = plan_of(trial)
    document = plan_document(plan, lay_out(trial, plan.contents, 3), ISSUED)
    told = document["layout"]["restriction"]
    assert told["method"] == "rejection"
    assert told["uniform"] is True
    findings = {finding.what: finding.ok for finding in proof.verify(document).findings}
    assert findings["neighbours"]


def test_a_clash_is_told(monkeypatch: pytest.MonkeyPatch) -> None:
    """Two plots cannot keep two treatments apart: the block, the names and ways out are told."""
    monkeypatch.setattr(restricted, "MOST_DRAWS", 20)
    trial = trial_from_document(
        {
            "trial": "tight",
            "treatments": ["A", "B"],
            "ground": {"rows": "aabb", "names": {"a": "near bay", "b": "far bay"}},
            "rules": {"not_beside": {"pairs": [["A", "B"]]}},
        }
    )
    with pytest.raises(Undecided, match=r"2 plots of .* cannot keep A, B apart.*never_share_block"):
        lay_out(trial, ((0, 1), (0, 1)), 1)


def test_the_solver_finds_what_draws_and_walks_miss(monkeypatch: pytest.MonkeyPatch) -> None:
    """Its layout keeps the rule and is recorded as not uniform."""
    monkeypatch.setattr(restricted, "_by_rejection", lambda *_: None)
    monkeypatch.setattr(restricted, "_by_walking", lambda *_: None)
    trial = twin()
    found = lay_out(trial, CONTENTS, 1).restricted
    assert found is not None
    assert found.method == "solver"
    assert not found.uniform
    assert found.told.startswith("not uniform")


def test_a_walk_counts_its_clashes_right() -> None:
    """After many steps the running count equals a count from scratch, moves of every sort included."""
    trial = twin({"itself": True, "pairs": [["A", "B"]]}, rows="aaa\nbbb\nccc")
    sites = places(trial)
    limit = restriction(trial, sites)
    assert limit is not None
    contents: Contents = ((0, 1, 2),) * 3
    urn = Urn.of(trial, contents, sites)
    random = np.random.default_rng(5)
    walk = Walk(urn, limit, urn.draw(random), random)
    walk.stiffness = 0.3
    for _ in range(60):
        walk.sweep()
        assert walk.clashes == limit.clashes(walk.layout())
        assert urn.contents_of(walk.layout()) == contents
