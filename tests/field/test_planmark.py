"""Marks and seals of plans."""

from __future__ import annotations

from search.field.planmark import MARK_LETTERS, mark_of, seal_of
from tests.field.made import document_of, trial_with


def test_the_mark_is_short_and_follows_what_is_planted() -> None:
    """Four letters that cannot be taken for others; another layout has another, a later issue the same."""
    document = document_of(trial_with())
    mark = document["mark"]
    assert len(mark) == 5
    assert mark[2] == "-"
    assert set(mark.replace("-", "")) <= set(MARK_LETTERS)
    assert not set(MARK_LETTERS) & set("0O1ILl2Z5S8BUV6G")
    assert mark_of({**document, "issued": "2028-01-01T00:00:00Z", "gap_percent": 1.0}) == mark
    marks = {document_of(trial_with(), seed=seed)["mark"] for seed in range(20)}
    assert len(marks) == 20


def test_the_seal_follows_every_figure_but_not_their_order() -> None:
    """A figure changed changes the seal; keys in another order do not."""
    document = document_of(trial_with())
    assert document["seal"] == seal_of(document)
    assert seal_of({**document, "gap_percent": 0.5}) != document["seal"]
    assert seal_of(dict(reversed(document.items()))) == document["seal"]
