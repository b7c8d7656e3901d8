"""Results from elsewhere are taken where they are true and better; a false one is refused with its line."""

from __future__ import annotations

import csv
import json
from collections.abc import Callable
from dataclasses import replace
from fractions import Fraction
from pathlib import Path
from random import Random
from typing import Any

import pytest
from hypothesis import given, settings

from search.foundation.documents import canonical_json
from search.foundation.errors import BadInput, Impossible
from search.foundation.stopping import Limits
from search.proof.results import proved
from search.runs.exchange import document, harmless, shown_from, table
from search.runs.gathering import import_lines, merge
from search.runs.keeping import Keeping, remember, run_of
from search.runs.kept import IssuedPlan, KeptPlan, Shown, Taken
from search.runs.selection import Selection
from search.runs.store import Store
from search.solvers.start import feasible_start
from search.trial.canonical import canonical
from search.trial.limits import limits
from search.trial.reading import trial_from_document
from search.trial.records import Trial
from search.trial.tables import tables
from tests.drawn import small_trials, tiny_trial
from tests.proof.test_fuzz import mutated
from tests.runs.made import made_plan

GOOD, WORSE = (
    ((0, 1), (0, 2), (1, 2), (0, 3), (1, 3), (2, 3)),
    ((0, 1), (0, 1), (1, 2), (2, 3), (2, 3), (0, 3)),
)
"""Every pair once, which is balanced; and a plan that is none."""


def six_pairs() -> Trial:
    """Four treatments in six blocks of two."""
    return trial_from_document({"trial": "=six pairs", "treatments": 4, "blocks": {"count": 6, "plots": 2}})


def keep(store: Store, trial: Trial, contents: Any, seed: int = 1) -> None:
    """Keep a plan as if a search had found it."""
    found = replace(made_plan(trial, contents), seed=seed)
    remember(store, canonical(trial), found, run_of(found, Limits(moves=5), 1))


def lines_of(store: Store) -> list[bytes]:
    return [canonical_json(document(shown)).encode() for shown in store.all_shown()]


@pytest.fixture
def full(tmp_path: Path) -> Any:
    """A store with two problems, one of them with an issued plan."""
    with Store(tmp_path / "full.sqlite") as store:
        keep(store, six_pairs(), GOOD)
        keep(store, tiny_trial(), ((0, 1), (0, 2), (1, 2)))
        digest = canonical(six_pairs()).digest
        store.issued(
            digest, "all pairs", IssuedPlan("K7-QX", store.best(digest, "all pairs").plan.contents, 2 / 3)
        )  # type: ignore[union-attr]
        yield store


def test_what_is_exported_is_imported_whole(full: Store, tmp_path: Path) -> None:
    """A store that imports everything holds the same, and importing again changes nothing."""
    with Store(tmp_path / "empty.sqlite") as other:
        gathered = import_lines(other, [*lines_of(full), b"\n"], proved)
        assert (gathered.taken, gathered.refused) == (Taken(2, 2, 2, 2), ())
        for one, same in zip(full.all_shown(), other.all_shown(), strict=True):
            assert replace(same, problem=one.problem) == one
        again = import_lines(other, lines_of(full), proved)
        assert again.taken == Taken(2, 0, 0, 0)


@settings(max_examples=40, deadline=None)
@given(small_trials())
def test_every_drawn_result_can_be_proved_from_its_line(trial: Trial) -> None:
    """With every mixture of rules and aims, what finders and bounds claim is proved from the line alone."""
    try:
        contents, _ = feasible_start(trial, tables(trial), limits(trial), seed=1, seconds=5)
    except Impossible:
        return
    found = made_plan(trial, contents)
    with Store(":memory:") as store:
        remember(store, canonical(trial), found, run_of(found, Limits(moves=5), 1))
        (shown,) = store.all_shown()
    line = json.loads(canonical_json(document(shown)))
    assert shown_from(line, proved(line)) == shown


def changed(line: bytes, change: Callable[[dict[str, Any]], None]) -> bytes:
    content = json.loads(line)
    change(content)
    return json.dumps(content).encode()


def swap(content: dict[str, Any]) -> None:
    content["plan"]["contents"] = [list(block) for block in WORSE]


def falsify(content: dict[str, Any]) -> None:
    content["plan"]["score"] = content["plan"]["efficiency"] = content["plan"]["score"] + 1e-6


def tighten(content: dict[str, Any]) -> None:
    exact = Fraction(content["bound"]["exact"]) * Fraction(999, 1000)
    content["bound"] |= {"exact": f"{exact.numerator}/{exact.denominator}", "value": float(exact)}


FALSE: dict[str, tuple[Callable[[dict[str, Any]], Any], str]] = {
    "a worse plan under the score of the better": (swap, r"plan\.score is claimed to be"),
    "a score a little too good": (falsify, r"plan\.score is claimed to be"),
    "an efficiency that is not the score": (
        lambda x: x["plan"].update(efficiency=0.9),
        r"plan\.efficiency is not the score",
    ),
    "a run with an efficiency of its own": (
        lambda x: x["runs"][0].update(efficiency=0.99),
        r"runs\[1\]\.efficiency is not the score",
    ),
    "a bound that is too tight": (tighten, "the certificate proves no more than"),
    "a bound of another aim": (lambda x: x["bound"].update(aim="overall"), "speaks of the aim"),
    "a block too few": (lambda x: x["plan"]["contents"].pop(), "5 blocks, the problem 6"),
    "a plot too many": (lambda x: x["plan"]["contents"][0].append(3), "3 plots planted, not 2"),
    "a treatment that is none": (lambda x: x["plan"]["contents"].__setitem__(0, [0, 4]), "names a treatment"),
    "the digest of another problem": (lambda x: x.update(digest="0" * 64), "digest is not that"),
    "a text with another problem": (
        lambda x: x.update(text=x["text"].replace("[6,2,-1]", "[5,2,-1]")),
        "digest is not that",
    ),
    "a seed that no store can hold": (
        lambda x: x["runs"][0].update(seed=2**63),
        r"runs\.seed has not the form",
    ),
    "a name that no file can hold": (lambda x: x.update(trial="\ud800"), "written down again"),
    "another format": (lambda x: x.update(format="evenfield plan 1"), "no kept result"),
    "no plan key": (lambda x: x.pop("runs"), "runs is missing"),
    "a run above the bound": (
        lambda x: x["runs"][0].update(score=0.99, efficiency=0.99),
        "above its own proven bound",
    ),
    "a run without a seed": (lambda x: x["runs"][0].pop("seed"), r"runs\.seed has not the form"),
    "an issued plan that breaks a rule": (
        lambda x: x["issued"][0]["contents"].__setitem__(0, [0, 0]),
        r"issued\[1\]: .* more than once",
    ),
    "an unknown aim": (lambda x: x.update(aim="the moon"), "text: "),
}


@pytest.mark.parametrize(("change", "reason"), FALSE.values(), ids=FALSE.keys())
def test_a_false_line_is_refused_and_the_others_are_taken(
    full: Store, tmp_path: Path, change: Callable[[dict[str, Any]], None], reason: str
) -> None:
    """The refusal names line and reason; the lines around it are taken."""
    lines = lines_of(full)
    at = next(i for i, line in enumerate(lines) if b"six pairs" in line)
    spoiled = [changed(line, change) if i == at else line for i, line in enumerate(lines)]
    with Store(tmp_path / "other.sqlite") as other:
        gathered = import_lines(other, [b"", *spoiled], proved)
        (refused,) = gathered.refused
        assert refused.where == f"line {at + 2}"
        assert Pattern(reason) == refused.reason
        assert [entry.name for entry in other.list()] == ["tiny"]


class Pattern(str):
    """Equal to every text in which it is found."""

    __hash__ = str.__hash__

    def __eq__(self, other: object) -> bool:
        import re

        return isinstance(other, str) and re.search(self, other) is not None


def test_junk_is_refused_and_never_believed(full: Store, tmp_path: Path) -> None:
    """Lines spoiled at random: taken only where what they claim is true; what is kept can be proved again."""
    lines = lines_of(full)
    refused = 0
    with Store(tmp_path / "other.sqlite") as other:
        for seed in range(150):
            rng = Random(seed)
            try:
                line = json.dumps(mutated(json.loads(rng.choice(lines)), rng)).encode(
                    "utf-8", "surrogatepass"
                )
            except ValueError:
                continue  # a whole number too long for anybody to write
            refused += len(import_lines(other, [line], proved).refused)
        for shown in other.all_shown():
            proved(document(shown))
    assert refused > 75


@pytest.mark.parametrize(
    "line", [b"x", b"[]", b"null", b'{"a": 1, "a": 2}', b"\xff", b"[" * 100_000, b'{"format": NaN}']
)
def test_what_is_no_json_object_is_refused(tmp_path: Path, line: bytes) -> None:
    """A line of anything else has its refusal too."""
    with Store(tmp_path / "store.sqlite") as store:
        assert len(import_lines(store, [line], proved).refused) == 1
        assert store.count() == 0


def test_merging_keeps_the_better_of_each(tmp_path: Path) -> None:
    """Whichever way two stores are merged, the better plan stays, and the runs of both are there."""
    trial = six_pairs()
    with Store(tmp_path / "a.sqlite") as a, Store(tmp_path / "b.sqlite") as b:
        keep(a, trial, GOOD, seed=1)
        keep(b, trial, WORSE, seed=2)
        keep(b, tiny_trial(), ((0, 1), (0, 2), (1, 2)))
        assert merge(a, b, proved).taken == Taken(2, 1, 1, 2)
        assert merge(b, a, proved).taken == Taken(2, 1, 0, 1)
        assert merge(b, a, proved).taken == Taken(2, 0, 0, 0)
        digest = canonical(trial).digest
        for store in (a, b):
            assert store.best(digest, "all pairs").plan.seed == 1  # type: ignore[union-attr]
            assert {run.seed for run in store.runs(digest, "all pairs")} == {1, 2}


def test_a_false_better_plan_displaces_nothing_when_merged(tmp_path: Path) -> None:
    """What somebody wrote into the other store is judged before it takes the place of anything."""
    trial = six_pairs()
    digest = canonical(trial).digest
    with Store(tmp_path / "a.sqlite") as a, Store(tmp_path / "b.sqlite") as b:
        keep(a, trial, WORSE)
        keep(b, trial, WORSE)
        with b._database.writing() as connection:
            connection.execute("UPDATE plan SET score = 0.9")
        before = a.best(digest, "all pairs")
        gathered = merge(a, b, proved)
        assert len(gathered.refused) == 1
        assert gathered.refused[0].where.startswith(digest[:12])
        assert a.best(digest, "all pairs") == before


def test_a_merge_that_is_interrupted_is_done_by_the_next(
    tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    """Each lot is taken whole or not at all, and the same merge goes on."""
    monkeypatch.setattr("search.runs.gathering.AT_ONCE", 2)
    with Store(tmp_path / "a.sqlite") as a, Store(tmp_path / "b.sqlite") as b:
        for t in range(3, 8):
            trial = trial_from_document(
                {"trial": f"t {t}", "treatments": t, "blocks": {"count": t, "plots": 2}}
            )
            keep(b, trial, tuple(tuple(sorted((i, (i + 1) % t))) for i in range(t)))
        calls = 0

        def interrupted(content: Any) -> Trial:
            nonlocal calls
            calls += 1
            if calls == 4:
                raise KeyboardInterrupt
            return proved(content)

        with pytest.raises(KeyboardInterrupt):
            merge(a, b, interrupted)
        assert a.count() == 2
        assert merge(a, b, proved).taken.plans == 3
        assert {entry.name for entry in a.list()} == {f"t {t}" for t in range(3, 8)}


def test_the_table_holds_no_formula(full: Store) -> None:
    """Names that a spreadsheet would run are told as text; a reader finds every column."""
    rows = list(csv.DictReader("".join(table(full.list())).splitlines()))
    assert {row["trial"] for row in rows} == {"'=six pairs", "tiny"}
    assert {row["sizes"] for row in rows} == {"6 × 2", "3 × 2"}
    for text in ("=1", "+1", "-1", "@x", " =1", "\t=1"):
        assert harmless(text) == f"'{text}"
    assert harmless("1-1") == "1-1"


def test_selections_select(full: Store) -> None:
    """Each filter alone, against the same question asked of the records in Python."""
    everything = full.list()
    assert len(everything) == 2
    for where, chosen in (
        (Selection(name="SIX"), lambda e: "six" in e.name),
        (Selection(treatments=(4, 9)), lambda e: 4 <= e.t <= 9),
        (Selection(blocks=(3, 3)), lambda e: e.b == 3),
        (Selection(aim="overall"), lambda e: e.aim == "overall"),
        (Selection(standing="balanced"), lambda e: e.standing == "balanced"),
        (Selection(gap_most=0.0), lambda e: e.gap_percent <= 0),
        (Selection(gap_least=0.1), lambda e: e.gap_percent >= 0.1),
        (Selection(older_days=1), lambda e: False),
        (Selection(newer_days=1), lambda e: True),
        (Selection(issued=True), lambda e: e.mark),
        (Selection(issued=False), lambda e: not e.mark),
        (Selection(name="six", issued=False), lambda e: False),
    ):
        assert full.list(where=where) == tuple(entry for entry in everything if chosen(entry)), where
        assert full.count(where) == len(full.list(where=where))


def test_pruning_drops_the_selected_and_nothing_else(full: Store) -> None:
    """Plan, bound, runs and problem of what is dropped are gone; the rest is as it was."""
    keep_ = full.show("K7-QX")
    assert full.prune(Selection(issued=False)) == 1
    assert [entry.name for entry in full.list()] == ["=six pairs"]
    assert full.show("K7-QX") == keep_
    with full._database.reading() as connection:
        for name in ("problem", "plan", "bound", "run", "result"):
            assert connection.execute(f"SELECT count(*) FROM {name}").fetchone() == (1,)
    assert full.give_room_back()


def test_an_issued_plan_is_found_after_a_better_one_came(tmp_path: Path) -> None:
    """The mark on the paper leads to the plan in the field, whatever was found since."""
    trial = six_pairs()
    with Keeping(trial, tmp_path / "store.sqlite") as keeping:
        keep(keeping.store, trial, WORSE)
        keeping.issued(made_plan(trial, WORSE), "K7-QX")
        keep(keeping.store, trial, GOOD)
        (shown,) = keeping.store.show("k7-qx")
        assert isinstance(shown, Shown)
        assert isinstance(shown.kept.plan, KeptPlan)
        assert shown.kept.plan.score > shown.issued[0].score
        assert keeping.failure is None


def test_what_was_handed_over_and_is_no_trial_is_told() -> None:
    """A document without the keys of a result is refused with words, whatever it is."""
    for junk in (
        None,
        3,
        [],
        {},
        {"format": "evenfield result 1"},
        {"format": "evenfield result 1", "text": 3},
    ):
        with pytest.raises(BadInput):
            proved(junk)


def test_a_proof_by_exhaustion_is_repeated_before_it_is_taken(tmp_path: Path) -> None:
    """A listing is taken as it stands; one whose plan is said to be worse than it is, is refused."""
    trial = trial_from_document({"trial": "nine", "treatments": 9, "blocks": {"count": 18, "plots": 2}})
    with Keeping(trial, tmp_path / "mine.sqlite") as keeping:
        plan = keeping.plan(limits=Limits(moves=400_000), seed=1, workers=1)
        assert plan.bound is not None
        assert plan.bound.certificate["kind"] == "exhaustion"
        (line,) = lines_of(keeping.store)

    def worse(content: dict[str, Any]) -> None:
        content["plan"], content["runs"] = None, []
        multipliers, bound = content["bound"]["certificate"]["multipliers"], content["bound"]
        worth = Fraction(multipliers["worth"]) * Fraction(102, 100)  # below 0
        multipliers["worth"] = f"{worth.numerator}/{worth.denominator}"
        exact = Fraction(bound["exact"]) * Fraction(981, 1000)
        bound["exact"], bound["value"] = f"{exact.numerator}/{exact.denominator}", float(exact)

    with Store(tmp_path / "other.sqlite") as other:
        assert import_lines(other, [line], proved).refused == ()
    with Store(tmp_path / "third.sqlite") as third:
        (refused,) = import_lines(third, [changed(line, worse)], proved).refused
        assert "better" in refused.reason
