"""The map on pages: all of it, legible, to scale."""

from __future__ import annotations

from hypothesis import given
from hypothesis import strategies as st

from search.field.sheets.tiling import Proportions, proportions, tiled

ROOMS = ((430.0, 620.0), (680.0, 380.0))
FORMS = ((24.0, 42.0), (30.0, 29.0), (15.0, 80.0), (15.0, 60.0))


def test_measures_become_proportions() -> None:
    """Without measures a square; extreme plots and gaps are shortened, and that is known."""
    assert proportions(None, (0.3, 1.0)) == Proportions(1.0, 1.0, 0.0, 0.0)
    assert proportions((1.5, 9.0), (0.3, 1.0)) == Proportions(1.5, 9.0, 0.3, 1.0)
    assert proportions((1.0, 40.0), (0.0, 0.0)) == Proportions(1.0, 9.0, 0.0, 0.0, true=False)
    assert proportions((2.0, 4.0), (30.0, 1.0)) == Proportions(2.0, 4.0, 2.0, 1.0, true=False)
    assert proportions((9.0, 1.0), (5.0, 0.0)) == Proportions(9.0, 1.0, 3.0, 0.0, true=False)


def test_a_small_field_takes_one_page() -> None:
    """Three lines of twelve plots of 1.5 m × 9 m stand upright on one page, text level."""
    tiling = tiled(3, 12, proportions((1.5, 9.0), (0, 0)), FORMS, ROOMS)
    assert len(tiling.tiles) == 1
    assert not tiling.landscape
    assert tiling.form == 0


@given(
    st.integers(1, 60),
    st.integers(1, 120),
    st.floats(0.3, 20),
    st.floats(0.3, 60),
    st.floats(0, 5),
    st.floats(0, 5),
)
def test_every_plot_is_on_one_page_and_legible(
    rows: int, columns: int, wide: float, long: float, across: float, along: float
) -> None:
    """Whatever the field, pages hold each plot once, none overflows, no cell is below its form's least."""
    shape = proportions((wide, long), (across, along))
    tiling = tiled(rows, columns, shape, FORMS, ROOMS)
    covered = [(row, column) for tile in tiling.tiles for row in tile.rows for column in tile.columns]
    assert sorted(covered) == [(row, column) for row in range(rows) for column in range(columns)]
    least = FORMS[tiling.form]
    assert tiling.scale * shape.wide >= least[0] - 1e-6
    assert tiling.scale * shape.long >= least[1] - 1e-6
    room = ROOMS[tiling.landscape]
    for tile in tiling.tiles:
        assert len(tile.columns) * tiling.scale * (shape.wide + shape.gap_across) <= room[0] + 1e-6
        assert len(tile.rows) * tiling.scale * (shape.long + shape.gap_along) <= room[1] + 1e-6
