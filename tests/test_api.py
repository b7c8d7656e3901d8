"""Evenfield from Python."""

from __future__ import annotations

from pathlib import Path

import pytest

import search
from search import Store, Trial, bound, evaluate, plan
from search.foundation.errors import BadInput

TRIANGLE = {"trial": "tiny", "treatments": ["A", "B", "C"], "blocks": {"x": 2, "y": 2, "z": 2}}


def test_public_names_are_those_listed() -> None:
    """Everything in `__all__` can be imported, and nothing else is offered."""
    assert sorted(search.__all__) == sorted(search.HOMES)
    for name in search.__all__:
        assert getattr(search, name) is not None
    with pytest.raises(AttributeError, match="no attribute 'magic'"):
        search.magic  # noqa: B018


def test_the_triangle_is_planned_and_bounded() -> None:
    """Three treatments in three pairs: balanced, λ = 1, E = λt/(rk) = 3/4 (Yates 1936)."""
    trial = Trial.from_document(TRIANGLE)
    found = plan(trial, moves=1000)
    assert found.standing == "balanced"
    assert found.gap_percent == 0
    assert found.score.aim == pytest.approx(0.75, abs=1e-12)
    limit = bound(trial)
    assert limit is not None
    assert limit.value == 0.75
    assert list(found.frame.columns) == ["block", "treatment"]
    assert len(found.frame) == 6
    assert "<table>" in found._repr_html_()


def test_contents_can_be_evaluated() -> None:
    """The same contents by hand have the same efficiency; a broken rule is told."""
    trial = Trial.from_document(TRIANGLE)
    assert evaluate(trial, {"x": ["A", "B"], "y": ["B", "C"], "z": ["A", "C"]}).aim == pytest.approx(0.75)
    with pytest.raises(BadInput, match="C stands on 1 plots"):
        evaluate(trial, {"x": ["A", "B"], "y": ["B", "A"], "z": ["A", "C"]})
    with pytest.raises(BadInput, match="at odds"):
        evaluate(trial, {"x": ["A", "D"], "y": ["B", "A"], "z": ["A", "C"]})


def test_results_are_kept_where_asked(tmp_path: Path) -> None:
    """A store remembers the problem under any names, and a second search is never worse."""
    path = tmp_path / "kept.sqlite"
    first = plan(Trial.from_document({**TRIANGLE, "blocks": {"x": 2, "y": 2}}), moves=500, store=path)
    renamed = {"trial": "other", "treatments": ["P", "Q", "R"], "blocks": {"u": 2, "v": 2}}
    second = plan(Trial.from_document(renamed), moves=500, store=path)
    assert second.digest == first.digest
    assert second.score.aim >= first.score.aim
    with Store(path) as store:
        assert store.count() == 1


def test_names_are_inert_in_a_notebook() -> None:
    """Markup in a name is shown, not obeyed."""
    trial = Trial.from_document({**TRIANGLE, "treatments": ["<b>A</b>", "B", "C"]})
    html = plan(trial, moves=200)._repr_html_()
    assert "&lt;b&gt;A&lt;/b&gt;" in html
