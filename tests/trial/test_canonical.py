"""One digest for one problem, and plans and certificates carried to and from its numbering."""

from __future__ import annotations

import random
from dataclasses import replace
from time import perf_counter
from typing import Any

import networkx as nx
import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from search.trial.canonical import canonical
from search.trial.carrying import from_canonical, to_canonical
from search.trial.checker import broken_rules
from search.trial.reading import trial_from_document
from search.trial.records import Contents, Trial
from search.trial.refinement import canonical_order
from tests.drawn import all_plans, small_trials, tiny_trial


def trial_of(t: int, count: int, plots: int, **more: Any) -> Trial:
    return trial_from_document(
        {"trial": "x", "treatments": t, "blocks": {"count": count, "plots": plots}, **more}
    )


def apart(t: int, count: int, plots: int, pairs: list[tuple[int, int]]) -> Trial:
    trial = trial_of(t, count, plots)
    return replace(trial, rules=replace(trial.rules, never_share_block=tuple(pairs)))


def renumbered(trial: Trial, draw: random.Random) -> Trial:
    """The same problem with other names, other numbers and its rules in another order."""
    to, block_to = list(range(trial.t)), list(range(trial.b))
    draw.shuffle(to)
    draw.shuffle(block_to)

    def mixed(items: Any) -> tuple[Any, ...]:
        return tuple(draw.sample(list(items), len(items)))

    def meetings(of: Any) -> tuple[Any, ...]:
        return mixed([replace(m, pair=m.pair and tuple(to[i] for i in m.pair)) for m in of])

    rules = trial.rules
    rules = replace(
        rules,
        never_share_block=mixed([mixed([to[i] for i in group]) for group in rules.never_share_block]),
        meet_at_least=meetings(rules.meet_at_least),
        meet_at_most=meetings(rules.meet_at_most),
        keep_out=mixed([(to[i], block_to[j]) for i, j in rules.keep_out]),
        must_hold=mixed([(to[i], block_to[j]) for i, j in rules.must_hold]),
        replicates=mixed(
            [replace(r, blocks=mixed([block_to[j] for j in r.blocks])) for r in rules.replicates]
        ),
        per_replicate=mixed([(to[i], times) for i, times in rules.per_replicate]),
        planted=mixed(
            [replace(x, treatment=to[x.treatment], block=block_to[x.block]) for x in rules.planted]
        ),
    )
    contrasts = [
        replace(c, label=c.label * 2, of=mixed([(to[i], x) for i, x in c.of])) for c in trial.aim.contrasts
    ]
    treatments = sorted(zip(to, trial.treatments, strict=True), key=lambda pair: pair[0])
    blocks = sorted(zip(block_to, trial.blocks, strict=True), key=lambda pair: pair[0])
    return replace(
        trial,
        name="renamed",
        treatments=tuple(replace(x, name=f"V{i}", caution="gloves") for i, x in treatments),
        blocks=tuple(replace(x, name=f"bay {j}") for j, x in blocks),
        rules=rules,
        aim=replace(trial.aim, contrasts=mixed(contrasts)),
    )


@settings(max_examples=150, deadline=None)
@given(small_trials(), st.randoms(use_true_random=False))
def test_names_and_order_do_not_matter(trial: Trial, draw: random.Random) -> None:
    """Renaming, renumbering and reordering leave the digest as it is."""
    first, second = canonical(trial), canonical(renumbered(trial, draw))
    assert first.complete
    assert first.text == second.text
    assert first.digest == second.digest


@settings(max_examples=100, deadline=None)
@given(small_trials(), st.randoms(use_true_random=False))
def test_plans_carry_over_between_numberings(trial: Trial, draw: random.Random) -> None:
    """A plan carried through the canonical numbering obeys the rules of a renumbered trial."""
    try:
        plan = next(all_plans(trial), None)
    except OverflowError:
        plan = None
    if plan is None:
        return
    carried = to_canonical(canonical(trial)).contents(plan)
    assert from_canonical(canonical(trial)).contents(carried) == plan
    other = renumbered(trial, draw)
    assert broken_rules(other, from_canonical(canonical(other)).contents(carried)) == ()


def test_a_hexagon_is_not_two_triangles() -> None:
    """Six pairs around a hexagon and six pairs in two triangles are different problems."""
    hexagon = apart(9, 9, 3, [(i, (i + 1) % 6) for i in range(6)])
    triangles = apart(9, 9, 3, [(0, 1), (1, 2), (2, 0), (3, 4), (4, 5), (5, 3)])
    assert canonical(hexagon).digest != canonical(triangles).digest


def test_every_relation_counts() -> None:
    """Changing any one thing that a plan must obey changes the digest."""
    plain = {"treatments": ["A", "B", "C", "D"], "blocks": {"a": 2, "b": 2, "c": 2, "d": 2}}
    changes: list[dict[str, Any]] = [
        {},
        {"plots_each": [1, 3]},
        {"treatments": {"A": {"plots": 2}, "B": {}, "C": {}, "D": {"plots": 2}}, "plots_each": [1, 3]},
        {"blocks": {"a": 2, "b": 2, "c": 1, "d": 3}},
        {"rules": {"never_share_block": [["A", "B"]]}},
        {"rules": {"meet_at_least": [{"pair": ["A", "B"], "blocks": 1}]}},
        {"rules": {"meet_at_least": [{"pair": ["A", "B"], "blocks": 2}]}},
        {"rules": {"meet_at_most": [{"pair": ["A", "B"], "blocks": 1}]}},
        {"rules": {"meet_at_most": 1}},
        {"rules": {"keep_out": {"A": ["a"]}}},
        {"rules": {"must_hold": {"a": ["A"]}}},
        {"rules": {"replicates": {"I": ["a", "b"]}}},
        {"rules": {"replicates": {"I": ["a", "b"], "II": ["c", "d"]}}},
        {"rules": {"twice_in_block": True}},
        {"treatments": {"A": {"control": True}, "B": {}, "C": {}, "D": {}}, "aim": "against control"},
        {"aim": {"contrasts": {"x": {"of": {"A": 1, "B": -1}}}}},
        {"aim": {"contrasts": {"x": {"of": {"A": 2, "B": -1, "C": -1}}}}},
    ]
    digests = [canonical(trial_from_document({"trial": "x", **plain, **change})).digest for change in changes]
    assert len(set(digests)) == len(changes)


def test_wording_does_not_count() -> None:
    """Names, aim, controls nobody asks for, settings and rules that limit nothing stay out."""
    plain = {"treatments": ["A", "B", "C"], "blocks": {"a": 2, "b": 2, "c": 2}}
    digest = canonical(trial_from_document({"trial": "x", **plain})).digest
    for change in (
        {"trial": "y", "about": {"site": "elsewhere"}, "search": {"seconds": 3}},
        {"treatments": {"C": {"control": True, "caution": "gloves"}, "A": {}, "B": {}}},
        {"aim": "overall"},
        {"plots_each": 2},
        {"rules": {"meet_at_most": 3, "meet_at_least": 0}},
        {"blocks": {"count": 3, "plots": 2}},
    ):
        assert canonical(trial_from_document({"trial": "x", **plain, **change})).digest == digest
    weighted = {"aim": {"contrasts": {"x": {"weight": 2, "of": {"A": 1, "B": -1}}}}}
    once = {"aim": {"contrasts": {"x": {"of": {"A": 1, "B": -1}}}}}
    first, second = (
        canonical(trial_from_document({"trial": "x", **plain, **aim})) for aim in (weighted, once)
    )
    assert first.digest == second.digest


PINNED = {
    "tiny": "405493ca0974d94b3c9e823d6c132a3135524e7fb08c134567a892d2d2f1d5f8",
    "odd": "ee9db71ce92a14b235c7d9116ce5f807e18324c426ef71cd2e3c277dede0a881",
    "resolvable": "88a5d0390f874e0ff20d3cc61cc96d862e4547880efcc40e0ba5844552f0cfa3",
    "contrasts": "88af8acc2f492fc3ca2621291704fefbce5bd6fee905c259da727b61af6e067e",
}


def pinned_trials() -> dict[str, Trial]:
    return {
        "tiny": tiny_trial(),
        "odd": trial_from_document(
            {
                "trial": "odd",
                "treatments": {"A": {"plots": 3}, "B": {"control": True}, "C": {}, "D": {}, "E": {}},
                "blocks": {"a": 4, "b": 3, "c": 3},
                "rules": {
                    "never_share_block": [["C", "D"]],
                    "keep_out": {"E": ["a"]},
                    "must_hold": {"every block": ["B"]},
                },
                "plots_each": [1, 3],
                "aim": "against control",
            }
        ),
        "resolvable": trial_from_document(
            {
                "trial": "resolvable",
                "treatments": 7,
                "blocks": {"a": 4, "b": 3, "c": 4, "d": 3},
                "rules": {"replicates": {"I": ["a", "b"], "II": ["c", "d"]}, "meet_at_most": 1},
            }
        ),
        "contrasts": trial_from_document(
            {
                "trial": "contrasts",
                "treatments": ["A", "B", "C", "D"],
                "blocks": {"count": 4, "plots": 3},
                "aim": {
                    "contrasts": {"x": {"weight": 2, "of": {"A": 1, "B": -1}}, "y": {"of": {"C": 1, "D": -1}}}
                },
            }
        ),
    }


@pytest.mark.parametrize("name", PINNED)
def test_digests_stay_as_they_are(name: str) -> None:
    """A digest that changed would lose every result kept under the old one."""
    assert canonical(pinned_trials()[name]).digest == PINNED[name]


def test_past_the_work_limit_the_text_is_still_the_whole_problem() -> None:
    """Cut short, a numbering is no longer canonical, says so, and still is a numbering of all."""
    graph = nx.hypercube_graph(5)
    trial = apart(40, 20, 4, list(nx.convert_node_labels_to_integers(graph).edges))
    cut = canonical(trial, most_work=1)
    assert not cut.complete
    assert sorted(cut.treatments) == list(range(40))
    assert sorted(cut.blocks) == list(range(20))
    whole = canonical(trial)
    assert whole.complete
    assert cut.text.count("[") == whole.text.count("[")


@pytest.mark.parametrize(
    "graph",
    [
        nx.petersen_graph(),
        nx.cycle_graph(9),
        nx.path_graph(7),
        nx.hypercube_graph(4),
        nx.complete_bipartite_graph(3, 4),
    ],
)
def test_orders_agree_with_a_general_graph_library(graph: Any) -> None:
    """Two graphs taken in canonical order are equal exactly when networkx finds them isomorphic."""
    draw = random.Random(5)
    graph = nx.convert_node_labels_to_integers(graph)

    def form(g: Any) -> bytes:
        table = nx.to_numpy_array(g, nodelist=sorted(g), dtype=np.int64)
        order = canonical_order(np.zeros(len(table), dtype=np.int64), table).order
        return table[np.ix_(order, order)].tobytes()

    for _ in range(10):
        to = draw.sample(range(len(graph)), len(graph))
        other = nx.relabel_nodes(graph, dict(enumerate(to)))
        assert form(other) == form(graph)
        # A pair of edges exchanged keeps all degrees, and mostly makes another graph.
        changed = nx.double_edge_swap(other.copy(), nswap=1, max_tries=1000, seed=draw.randrange(10**6))
        assert (form(changed) == form(graph)) == nx.is_isomorphic(changed, graph)


def test_certificates_carry_over() -> None:
    """Treatments, replicates and the order of contrasts in a certificate are renumbered and return."""
    trial = pinned_trials()["resolvable"]
    certificate = {
        "kind": "some argument",
        "statement": "no plan is better",
        "multipliers": {
            "rows": [{"treatments": [2, 0, 5], "partners": {"4": "1/3"}}],
            "meets": [{"size": 4, "group": 1, "with": 0, "price": "1/2"}],
            "plots": [{"size": 3, "group": -1, "price": "7"}],
        },
    }
    draw = random.Random(2)
    other = renumbered(trial, draw)
    one, two = canonical(trial), canonical(other)
    there = from_canonical(two).certificate(to_canonical(one).certificate(certificate))
    back = from_canonical(one).certificate(to_canonical(two).certificate(there))
    certificate["multipliers"]["rows"][0]["treatments"] = [0, 2, 5]  # type: ignore[index]
    assert back == certificate
    with pytest.raises(IndexError):
        to_canonical(one).certificate({"treatments": [7]})
    with pytest.raises(IndexError):
        to_canonical(one).certificate({"treatments": [-1]})


def test_contents_of_another_trial_are_refused() -> None:
    """Contents with too few blocks or unknown treatments are not carried."""
    carrier = to_canonical(canonical(tiny_trial()))
    good: Contents = ((0, 1), (0, 2), (1, 2))
    assert len(carrier.contents(good)) == 3
    for bad in (((0, 1), (0, 2)), ((0, 1), (0, 2), (1, 3)), ((0, 1), (0, 2), (-1, 2))):
        with pytest.raises(IndexError):
            carrier.contents(bad)


def test_numbering_takes_a_moment() -> None:
    """Two hundred treatments with sixty rules are numbered in well under a second."""
    draw = random.Random(1)
    trial = apart(200, 80, 10, [tuple(draw.sample(range(200), 2)) for _ in range(60)])  # type: ignore[misc]
    began = perf_counter()
    assert canonical(trial).complete
    assert perf_counter() - began < 1


@pytest.mark.bench
@pytest.mark.parametrize(
    ("t", "count", "pairs"), [(12, 6, 2), (200, 80, 60), (200, 80, 300), (1000, 400, 20), (1000, 400, 300)]
)
def test_timings(t: int, count: int, pairs: int) -> None:
    """One numbering takes less than 0.4 s; pytest -m bench -s tells how much less."""
    draw = random.Random(1)
    trial = apart(t, count, 10, [tuple(draw.sample(range(t), 2)) for _ in range(pairs)])  # type: ignore[misc]
    times = []
    for _ in range(5):
        began = perf_counter()
        complete = canonical(trial).complete
        times.append(perf_counter() - began)
    print(f"\nt {t}, b {count}, {pairs} pairs apart: {1000 * sorted(times)[2]:.1f} ms, complete: {complete}")
    assert sorted(times)[2] < 0.4
