"""Neighbours on the map, proved apart without looking at who made the layout."""

from __future__ import annotations

from typing import Any

import pytest

from search.field.beside import clash_in_words
from search.proof.neighbours import kept_apart
from search.proof.plots import planted
from search.proof.reading import Plot
from search.proof.records import Refuted
from search.trial.numbering import places
from search.trial.reading import trial_from_document
from search.trial.records import Trial


def row_of(rule: dict[str, Any], rows: str = "aabb", **ground: Any) -> Trial:
    """Two treatments in two blocks of two, side by side in one line."""
    return trial_from_document(
        {
            "trial": "row",
            "treatments": ["A", "B"],
            "plots_each": 2,
            "ground": {"rows": rows, **ground},
            "rules": {"not_beside": rule},
        }
    )


def plots_of(trial: Trial, standing: str) -> tuple[Plot, ...]:
    """Plots from the letters of their treatments, in the order of plot numbers."""
    sites = places(trial)
    return tuple(
        Plot(site.plot, site.block, site.line, site.place, "AB".index(name))
        for site, name in zip(sites, standing, strict=True)
    )


@pytest.mark.parametrize(
    ("rule", "ground", "standing", "apart"),
    [
        ({"itself": True}, {}, "ABAB", True),
        ({"itself": True}, {}, "ABBA", False),
        ({"pairs": [["A", "B"]]}, {}, "ABAB", False),
        ({"pairs": [["A", "B"]]}, {"rows": "a.a\n...\nb.b"}, "ABAB", True),
        ({"itself": True, "plots_apart": 2}, {}, "ABAB", False),
        ({"itself": True}, {"rows": "aa\nbb"}, "ABAB", True),
        ({"itself": True}, {"rows": "aa\nbb"}, "ABBA", False),
        ({"itself": True}, {"rows": "aa\nbb", "numbering": {"way": "same way"}}, "ABAB", False),
        ({"itself": True, "distance_m": 1.5}, {"plot_m": [1.5, 9]}, "ABAB", True),
        ({"itself": True, "distance_m": 1.6}, {"plot_m": [1.5, 9]}, "ABAB", False),
        ({"itself": True, "distance_m": 1.6}, {"plot_m": [1.5, 9], "gap_m": [0.1, 0]}, "ABAB", True),
    ],
)
def test_finder_and_checker_agree_with_a_count_by_hand(
    rule: dict[str, Any], ground: dict[str, Any], standing: str, apart: bool
) -> None:
    """Both routes see a clash exactly where the map, looked at by hand, has one."""
    trial = row_of(rule, **ground)
    plots = plots_of(trial, standing)
    clash = clash_in_words(trial, places(trial), [plot.treatment for plot in plots])
    assert (clash == "") == apart
    if apart:
        found = kept_apart(trial, plots)
        assert found is not None
        assert found.ok
    else:
        with pytest.raises(Refuted, match="stands beside"):
            kept_apart(trial, plots)


@pytest.mark.parametrize(("distance", "apart"), [(3.0, True), (3.1, False)])
def test_measured_plots_are_as_far_apart_as_measured(distance: float, apart: bool) -> None:
    """B stands on both sides of a tramline whose edges are 3 m apart (by hand: 6 − 1.5 − 1.5)."""
    table = "line,place,block,x_m,y_m\n1,1,a,0,0\n1,2,a,1.5,0\n1,3,b,6,0\n1,4,b,7.5,0"
    trial = trial_from_document(
        {
            "trial": "row",
            "treatments": ["A", "B"],
            "plots_each": 2,
            "ground": {"places": table, "plot_m": [1.5, 9]},
            "rules": {"not_beside": {"itself": True, "distance_m": distance}},
        }
    )
    plots = plots_of(trial, "ABBA")
    assert (clash_in_words(trial, places(trial), [0, 1, 1, 0]) == "") == apart
    if apart:
        assert kept_apart(trial, plots) is not None
    else:
        with pytest.raises(Refuted, match="plot 102 stands beside B on plot 103"):
            kept_apart(trial, plots)


def test_a_plan_whose_bays_are_not_cut_is_refuted() -> None:
    """Plots of a bare map belong to no block, so no plan can say that they do."""
    trial = trial_from_document(
        {
            "trial": "bare",
            "treatments": ["A", "B"],
            "blocks": {"wanted": {"count": 2}},
            "ground": {"rows": "xxxx"},
        }
    )
    found = tuple(Plot(100 + place, (place - 1) // 2, 1, place, place % 2) for place in range(1, 5))
    with pytest.raises(Refuted, match="where the field has no plot"):
        planted(trial, ((0, 1), (0, 1)), found)
