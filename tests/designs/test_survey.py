"""The survey of all parameters, and the table kept in `results`."""

from __future__ import annotations

import csv
from pathlib import Path

import pytest

from search.designs.checking import block_faults
from search.designs.conditions import conditions
from search.designs.constructions.orbits import LIGHT, base_blocks, developed
from search.designs.constructions.stored import RECIPES
from search.designs.survey import COLUMNS, admissible, as_csv, survey

TABLE = Path(__file__).parents[2] / "results" / "balanced_designs.csv"


def _kept() -> list[dict[str, str]]:
    with open(TABLE, encoding="utf-8", newline="") as stream:
        return list(csv.DictReader(stream))


@pytest.mark.parametrize(("most", "many"), [(10, 54), (15, 132), (20, 229)])
def test_the_counts_allow_so_many_sets(most: int, many: int) -> None:
    """k from 3 to half the treatments, up to 100 treatments: 54, 132 and 229 sets."""
    assert len(list(admissible(range(3, 101), range(2, most + 1)))) == many


def test_up_to_ten_replications_one_set_is_unknown() -> None:
    """44 built, 9 impossible, and (51, 6, 1) unknown."""
    rows = [row for row in _kept() if int(row["replication"]) <= 10]
    assert sum(row["built"] == "yes" for row in rows) == 44
    assert sum(row["verdict"] == "impossible" for row in rows) == 9
    unknown = [row for row in rows if row["verdict"] == "unknown"]
    assert [(row["treatments"], row["block_size"], row["meetings"]) for row in unknown] == [("51", "6", "1")]


def test_the_table_was_made_fast() -> None:
    """No set took ten seconds, and nine in ten less than one."""
    seconds = [float(row["seconds"]) for row in _kept()]
    assert max(seconds) < 10
    assert sum(x < 1 for x in seconds) >= 0.9 * len(seconds)


def test_nine_in_ten_sets_up_to_twenty_replications_are_decided() -> None:
    """Existing or impossible, each with a reason."""
    rows = _kept()
    decided = [row for row in rows if row["verdict"] != "unknown"]
    assert len(decided) >= 0.9 * len(rows)
    assert all(row["reason"] for row in rows)


def test_a_sample_of_the_table_is_made_again() -> None:
    """Every seventh row up to fifteen replications comes out as it is kept, seconds aside."""
    kept = {tuple(row[name] for name in COLUMNS[:5]): row for row in _kept()}
    sets = list(admissible(range(3, 101), range(2, 16)))[::7]
    for entry in survey(sets):
        row = dict(zip(COLUMNS, entry.row(), strict=True))
        was = kept[tuple(row[name] for name in COLUMNS[:5])]
        assert {**row, "seconds": ""} == {**was, "seconds": ""}


@pytest.mark.slow
def test_the_whole_table_is_made_again() -> None:
    """Every row comes out as it is kept, seconds aside."""
    made = list(survey(admissible(range(3, 101), range(2, 21))))
    lines = list(csv.DictReader(as_csv(made).splitlines()))
    assert [{**row, "seconds": ""} for row in lines] == [{**row, "seconds": ""} for row in _kept()]


@pytest.mark.slow
@pytest.mark.parametrize("key", [key for key, recipe in RECIPES.items() if "light" in recipe.found])
def test_recipes_found_with_light_effort_are_found_again(key: tuple[int, int, int]) -> None:
    """The group of the recipe and light effort give a design again, which need not be the stored one."""
    t, k, meetings = key
    sizes = conditions(t, meetings * t * (t - 1) // (k * (k - 1)), k).allowed
    assert sizes is not None
    group = RECIPES[key].group
    base = base_blocks(sizes, group, LIGHT)
    assert base is not None
    assert block_faults(developed(group, base), sizes) == ()
