"""Measured maps: drawn as they lie where plots are in line, on a grid where they are not."""

from __future__ import annotations

from typing import Any

import pytest

from search.field.crew import CrewPacket, crew_packet
from search.field.sheets.steps import steps_of
from search.trial.reading import trial_from_document
from tests.field.made import LOW_MOOR, document_of


def packet_with(**ground: Any) -> CrewPacket:
    """The packet of a trial of two treatments on some ground."""
    trial = trial_from_document({"trial": "x", "treatments": ["A", "B"], "plots_each": 2, "ground": ground})
    return crew_packet(trial, document_of(trial))


def measured(*xs: float) -> CrewPacket:
    """Four plots of 1.5 m by 8 m in a line."""
    rows = "\n".join(f"1,{place},{'aabb'[place - 1]},{x},3" for place, x in enumerate(xs, start=1))
    return packet_with(places="line,place,block,x_m,y_m\n" + rows, plot_m=[1.5, 8])


def test_a_tramline_is_drawn_as_wide_as_it_is() -> None:
    """Plots at 0, 1.8, 6.6 and 8.4 m (by hand): gaps of 0.3, 3.3 and 0.3 m; the usual gap is 0.3 m."""
    steps = steps_of(measured(10.0, 11.8, 16.6, 18.4))
    assert steps.columns == pytest.approx((0, 1.8, 6.6, 8.4))
    assert steps.gap_across == pytest.approx(0.3)
    assert steps.shape.gap_across == pytest.approx(1.3)
    assert steps.shape.true


def test_plots_out_of_line_lie_on_a_grid() -> None:
    """Two lines shifted against one another by half a plot are not drawn to scale, and that is known."""
    table = "line,place,block,x_m,y_m\n1,1,a,0,0\n1,2,a,2,0\n2,1,b,1,9\n2,2,b,3,9"
    steps = steps_of(packet_with(places=table, plot_m=[1.5, 8]))
    assert not steps.shape.true
    assert steps.columns == pytest.approx((0, 1.5))


def test_places_without_a_plot_keep_their_room() -> None:
    """A skipped place between measured neighbours lies half way."""
    table = "line,place,block,x_m,y_m\n1,1,a,0,0\n1,3,a,4,0\n2,1,b,0,9\n2,3,b,4,9"
    steps = steps_of(packet_with(places=table, plot_m=[1.5, 8]))
    assert steps.columns == pytest.approx((0, 2, 4))


def test_a_drawn_map_has_even_steps() -> None:
    """Plot and gap give the step, in both directions."""
    trial = trial_from_document({**LOW_MOOR, "ground": {**LOW_MOOR["ground"], "gap_m": [0.5, 2.0]}})
    steps = steps_of(crew_packet(trial, document_of(trial)))
    assert steps.columns[:3] == pytest.approx((0, 2, 4))
    assert steps.rows == pytest.approx((0, 11, 22))
