"""The way through the field."""

from __future__ import annotations

import pytest

from search.field.walk import passes
from search.trial.reading import trial_from_document
from tests.drawn import tiny_trial
from tests.field.made import LOW_MOOR, trial_with


def test_the_odd_map_is_walked_in_the_order_of_its_numbers() -> None:
    """Serpentine numbers from the start corner are the walk itself."""
    walk = passes(trial_with())
    numbers = [stop.place.plot for walked in walk for stop in walked.stops]
    assert numbers == [*range(102, 110), *range(203, 213), *range(301, 313)]
    assert [walked.to_right for walked in walk] == [True, False, True]
    assert [walked.number for walked in walk] == [1, 2, 3]


def test_numbering_the_same_way_still_turns_at_the_end() -> None:
    """Nobody walks back empty: the second line is planted from its far end."""
    ground = {**LOW_MOOR["ground"], "numbering": {"start": "bottom left", "way": "same way"}}
    second = passes(trial_with(ground=ground))[1]
    assert [stop.place.plot for stop in second.stops] == list(range(210, 200, -1))


def test_places_without_a_plot_are_counted_and_empty_lines_skipped() -> None:
    """A gap inside a line is told before the next plot; a line without plots is no pass."""
    ground = {"rows": "aa..a\n.....\nb..bb\n"}
    trial = trial_from_document({"trial": "gaps", "treatments": 3, "ground": ground})
    first, second = passes(trial)
    assert [stop.skipped for stop in first.stops] == [0, 2, 0]
    assert (first.line, second.line) == (1, 3)
    assert second.to_right is False
    assert [stop.skipped for stop in second.stops] == [0, 2, 0]


@pytest.mark.parametrize(
    ("bearing", "heading"), [(0, "east"), (90, "south"), (180, "west"), (-45, "north-east"), (340, "east")]
)
def test_directions_are_told_by_compass(bearing: float, heading: str) -> None:
    """To the right of the way up the map: up is north, so right is east."""
    first, second, _ = passes(trial_with(ground={**LOW_MOOR["ground"], "north_deg": bearing}))
    assert first.heading == f"left to right on the map, heading {heading}"
    assert second.heading.startswith("right to left on the map, heading ")


def test_without_a_map_block_follows_block() -> None:
    """Each block is planted in the order of its numbers; nothing is said of directions."""
    walk = passes(tiny_trial())
    assert [[stop.place.plot for stop in walked.stops] for walked in walk] == [
        [101, 102],
        [201, 202],
        [301, 302],
    ]
    assert {walked.heading for walked in walk} == {"in the order of plot numbers"}
