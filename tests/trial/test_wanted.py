"""Bays that are wanted: how many, of which sizes, and what cannot be asked of them yet."""

from __future__ import annotations

from typing import Any

import pytest

from search.foundation.errors import FaultyTrial
from search.trial.reading import trial_from_document
from search.trial.records import Trial, Wanted
from search.trial.wanted import counts
from search.trial.writing import trial_document

ROWS = "xxxxxxxx\nxxxxxxxx\nxxxxxxx."


def wanted(asked: dict[str, Any], rows: str = ROWS, **more: Any) -> Trial:
    """Six treatments on a bare map of 23 plots."""
    return trial_from_document(
        {"trial": "bare", "treatments": 6, "blocks": {"wanted": asked}, "ground": {"rows": rows}, **more}
    )


@pytest.mark.parametrize(
    ("asked", "sizes"),
    [({"count": 4}, [6, 6, 6, 5]), ({"plots": [5, 6]}, [6, 6, 6, 5]), ({"plots": [7, 8]}, [8, 8, 7])],
)
def test_sizes_are_as_even_as_the_count_allows(asked: dict[str, Any], sizes: list[int]) -> None:
    """23 plots in four bays are 6, 6, 6 and 5; of several counts the fewest bays are planned for."""
    trial = wanted(asked)
    assert [block.plots for block in trial.blocks] == sizes
    assert trial_from_document(trial_document(trial)) == trial


def test_counts_that_fit() -> None:
    """24 plots in bays of 5 to 8: three, or four; counted by hand."""
    assert counts(Wanted(plots=(5, 8)), 24) == (3, 4)
    assert counts(Wanted(plots=(7, 7)), 24) == ()
    assert counts(Wanted(count=5), 24) == (5,)


FAULTS: dict[str, tuple[dict[str, Any], str]] = {
    "sizes that do not fit": ({"asked": {"plots": 7}}, "bays of 7 to 7 plots from 23 plots"),
    "nothing asked": ({"asked": {}}, "blocks.wanted"),
    "too many": ({"asked": {"count": 24}}, "24 bays from 23 plots"),
    "bays drawn already": ({"asked": {"count": 2}, "rows": "aabb"}, "a bare map"),
    "no map": ({"asked": {"count": 2}, "ground": None}, "no ground"),
    "single blocks": (
        {"asked": {"count": 4}, "rules": {"keep_out": {"T1": ["bay 1"]}}},
        "rules about every block",
    ),
    "one bay must hold": (
        {"asked": {"count": 4}, "rules": {"must_hold": {"bay 1": ["T1"]}}},
        "rules about every block",
    ),
}


@pytest.mark.parametrize("case", FAULTS)
def test_what_cannot_be_cut_is_told(case: str) -> None:
    """Each impossible wish is refused in its own words."""
    settings, words = FAULTS[case]
    document: dict[str, Any] = {
        "trial": "bare",
        "treatments": [f"T{i}" for i in range(1, 7)],
        "blocks": {"wanted": settings["asked"]},
        "ground": {"rows": settings.get("rows", ROWS)},
        "rules": settings.get("rules", {}),
    }
    if "ground" in settings:
        del document["ground"]
    with pytest.raises(FaultyTrial) as caught:
        trial_from_document(document)
    assert words in str(caught.value)
