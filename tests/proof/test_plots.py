"""Plots at their places: maps, corners and numbers."""

from __future__ import annotations

from dataclasses import replace
from typing import Any

import pytest

from search.proof.plots import planted
from search.proof.reading import Plot
from search.proof.records import Refuted
from search.trial.reading import trial_from_document
from search.trial.records import Trial
from tests.drawn import tiny_trial

CONTENTS = ((0, 1), (0, 2), (1, 2))

# The map, the far line first; by hand, numbering from the bottom left in serpentines:
#   a a .     201 is the b at the right of the far line ... of two lines of three places
#   b b c     line 1: b b c = 101 102 103; line 2 from the right: c = 201, a = 202, a = 203
ROWS = "aac\nbbc"


def mapped(**numbering: Any) -> Trial:
    """Three treatments on a map of two lines."""
    ground = {"rows": ROWS} | ({"numbering": numbering} if numbering else {})
    return trial_from_document({"trial": "map", "treatments": ["A", "B", "C"], "ground": ground})


def plots(*rows: tuple[int, int, int, int, int]) -> tuple[Plot, ...]:
    """Plots from number, block, line, place and treatment."""
    return tuple(Plot(*row) for row in rows)


# Blocks in the order in which a reader meets their letters: a, c, b.
SERPENTINE = plots(
    (101, 2, 1, 1, 1),
    (102, 2, 1, 2, 2),
    (103, 1, 1, 3, 0),
    (201, 1, 2, 1, 2),
    (202, 0, 2, 2, 0),
    (203, 0, 2, 3, 1),
)


def test_serpentine_from_the_bottom_left() -> None:
    """The second line is counted from the other side; every plot lies in its block."""
    assert planted(mapped(), CONTENTS, SERPENTINE).ok


def test_same_way_from_the_top_right() -> None:
    """Counted from the top right, every line from the right: the far line is line 1."""
    trial = mapped(start="top right", way="same way")
    found = plots(
        (101, 1, 1, 1, 0),
        (102, 0, 1, 2, 0),
        (103, 0, 1, 3, 1),
        (201, 1, 2, 1, 2),
        (202, 2, 2, 2, 1),
        (203, 2, 2, 3, 2),
    )
    assert planted(trial, CONTENTS, found).ok
    with pytest.raises(Refuted, match="lies on a place of"):
        planted(mapped(), CONTENTS, found)


def test_places_without_a_plot_are_counted() -> None:
    """A dot takes a place in its line but no plot: .ab has its plots at places 2 and 3."""
    trial = trial_from_document(
        {"trial": "dot", "treatments": ["A", "B"], "ground": {"rows": ".ab\nab."}, "plots_each": 2}
    )
    contents = ((0, 1), (0, 1))
    found = plots((101, 0, 1, 1, 0), (102, 1, 1, 2, 0), (201, 1, 2, 1, 1), (202, 0, 2, 2, 1))
    assert planted(trial, contents, found).ok
    moved = (*found[:3], replace(found[3], place=3, number=203))
    with pytest.raises(Refuted, match="where the field has no plot"):
        planted(trial, contents, moved)


def test_without_a_map_each_block_is_a_line() -> None:
    """Block 2 is line 2, its plots counted from 1."""
    found = plots(*((100 * j + p, j - 1, j, p, CONTENTS[j - 1][p - 1]) for j in (1, 2, 3) for p in (1, 2)))
    assert planted(tiny_trial(), CONTENTS, found).ok


def test_lines_of_more_than_99_have_longer_numbers() -> None:
    """A block of 100 plots is numbered from 1001, one of 99 from 101."""
    for size, first in ((100, 1001), (99, 101)):
        trial = trial_from_document(
            {"trial": "long", "treatments": size, "blocks": {"one": size}, "plots_each": 1}
        )
        found = plots(*((first + i, 0, 1, i + 1, i) for i in range(size)))
        assert planted(trial, (tuple(range(size)),), found).ok


@pytest.mark.parametrize(
    ("changes", "said"),
    [
        ({"number": 104}, "another plot number"),
        ({"treatment": 0}, "do not hold what its block says"),
        ({"block": 0}, "do not hold what its block says"),
        ({"line": 9}, "where the field has no plot"),
        ({"place": 0}, "where the field has no plot"),
        ({"number": 102}, "stands twice"),
    ],
)
def test_refutes_a_plot_that_was_moved(changes: dict[str, int], said: str) -> None:
    """A plot with another number, treatment, block, line or place is refuted."""
    spoiled = (*SERPENTINE[:2], replace(SERPENTINE[2], **changes), *SERPENTINE[3:])
    if "treatment" in changes:
        spoiled = (replace(SERPENTINE[0], treatment=0), *SERPENTINE[1:])
    with pytest.raises(Refuted, match=said):
        planted(mapped(), CONTENTS, spoiled)


def test_refutes_missing_and_additional_plots() -> None:
    """Every plot of a block is there, and once."""
    with pytest.raises(Refuted, match="do not hold"):
        planted(mapped(), CONTENTS, SERPENTINE[:-1])
    with pytest.raises(Refuted, match="do not hold"):
        planted(mapped(), CONTENTS, (*SERPENTINE, SERPENTINE[0]))
