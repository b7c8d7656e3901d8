"""Plot numbers, against a map numbered by hand."""

from __future__ import annotations

import pytest

from search.foundation.errors import BadInput
from search.trial.numbering import Place, places
from search.trial.reading import trial_from_document
from search.trial.records import Trial
from tests.drawn import tiny_trial
from tests.field.made import trial_with

NAMES = {letter: f"bay {letter}" for letter in "abcdef"}


def numbers(trial: Trial, block: str) -> list[int]:
    """Plot numbers of a block, in rising order."""
    at = [block.name for block in trial.blocks].index(block)
    return [place.plot for place in places(trial) if place.block == at]


def test_the_odd_map_is_numbered_from_its_near_left_corner() -> None:
    """Line 1 is the near line; dots count as places; the second line counts from the right."""
    trial = trial_with()
    assert numbers(trial, "bay e") == [102, 103, 104, 105]
    assert numbers(trial, "bay f") == [106, 107, 108, 109]
    assert numbers(trial, "bay d") == [203, 204, 205, 206, 207]
    assert numbers(trial, "bay c") == [208, 209, 210, 211, 212]
    assert numbers(trial, "bay a") == [301, 302, 303, 304, 305, 306]
    assert numbers(trial, "bay b") == [307, 308, 309, 310, 311, 312]


def test_a_place_tells_number_and_position_on_the_map() -> None:
    """Plot 203 is the last plot of bay d on the middle row: the third place from the right."""
    by_number = {place.plot: place for place in places(trial_with())}
    assert by_number[203] == Place(203, block=3, line=2, place=3, row=1, column=9)
    assert by_number[102] == Place(102, block=4, line=1, place=2, row=2, column=1)


@pytest.mark.parametrize(
    ("start", "way", "drawn"),
    [
        ("bottom left", "serpentine", [[203, 202, 201], [101, 102, 103]]),
        ("bottom left", "same way", [[201, 202, 203], [101, 102, 103]]),
        ("bottom right", "serpentine", [[201, 202, 203], [103, 102, 101]]),
        ("bottom right", "same way", [[203, 202, 201], [103, 102, 101]]),
        ("top left", "serpentine", [[101, 102, 103], [203, 202, 201]]),
        ("top left", "same way", [[101, 102, 103], [201, 202, 203]]),
        ("top right", "serpentine", [[103, 102, 101], [201, 202, 203]]),
        ("top right", "same way", [[103, 102, 101], [203, 202, 201]]),
    ],
)
def test_every_corner_and_way(start: str, way: str, drawn: list[list[int]]) -> None:
    """Line 1 lies at the start corner's side, place 1 at its end (written out by hand)."""
    ground = {"rows": "aaa\nbbb\n", "numbering": {"start": start, "way": way}}
    trial = trial_from_document({"trial": "six", "treatments": 3, "ground": ground})
    found = {(place.row, place.column): place.plot for place in places(trial)}
    assert [[found[row, column] for column in range(3)] for row in range(2)] == drawn


def test_without_a_map_each_block_is_a_line() -> None:
    """Blocks are lines in the order of the file, read like a page."""
    assert [place.plot for place in places(tiny_trial())] == [101, 102, 201, 202, 301, 302]
    assert [place.row for place in places(tiny_trial())] == [0, 0, 1, 1, 2, 2]


@pytest.mark.parametrize(("longest", "last"), [(99, 199), (100, 1100), (999, 1999)])
def test_long_lines_get_a_digit_more(longest: int, last: int) -> None:
    """A line of 99 places still has three-digit numbers; one of 100 needs four."""
    trial = trial_from_document({"trial": "long", "treatments": 999, "blocks": {"one": longest}})
    assert max(place.plot for place in places(trial)) == last


def test_a_line_beyond_three_digits_is_refused() -> None:
    """A thousand places cannot be numbered, and the message says what to do."""
    trial = trial_from_document({"trial": "long", "treatments": 1000, "blocks": {"one": 1000}})
    with pytest.raises(BadInput, match=r"1000 places.*break the line"):
        places(trial)
