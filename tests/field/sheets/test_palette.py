"""Colours that can be read in drizzle and on a grey printer."""

from __future__ import annotations

import pytest

from search.field.sheets.palette import (
    ACCENT,
    INK,
    PANEL,
    QUIET,
    TINTS,
    WARNING,
    WARNING_TINT,
    WHITE,
    Colour,
    contrast,
    luminance,
    tints_for,
)


def test_contrast_is_that_of_the_recommendation() -> None:
    """Black on white is 21:1, a colour on itself 1:1 (WCAG 2.1, closed form)."""
    assert contrast((0, 0, 0), (1, 1, 1)) == pytest.approx(21)
    assert contrast(INK, INK) == pytest.approx(1)


@pytest.mark.parametrize("ground", [*TINTS, PANEL, WARNING_TINT, WHITE])
def test_text_stands_out_everywhere(ground: Colour) -> None:
    """Ink reaches 4.5:1 on every ground (WCAG 2.1 for text); so do the other inks where they are used."""
    assert contrast(INK, ground) >= 4.5


@pytest.mark.parametrize(
    ("ink", "ground"),
    [(QUIET, WHITE), (QUIET, PANEL), (ACCENT, WHITE), (ACCENT, PANEL), (WARNING, WHITE), (WHITE, WARNING)],
)
def test_other_inks_stand_out_where_they_are_used(ink: Colour, ground: Colour) -> None:
    """At least 4.5:1."""
    assert contrast(ink, ground) >= 4.5


def test_the_caution_sign_stands_out_on_every_tint() -> None:
    """At least 3:1, which WCAG 2.1 asks of signs."""
    assert all(contrast(WARNING, tint) >= 3 for tint in TINTS)


def test_neighbours_differ_in_grey() -> None:
    """Six bays around each other: every two that touch differ in luminance, none shares a tint."""
    touching = [(0, 1), (0, 2), (0, 3), (1, 3), (2, 3), (2, 4), (3, 4), (3, 5), (4, 5)]
    tints = tints_for(6, touching)
    for one, other in touching:
        assert tints[one] != tints[other]
        assert abs(luminance(tints[one]) - luminance(tints[other])) >= 0.09
