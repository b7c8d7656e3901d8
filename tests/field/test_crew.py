"""What the crew reads, before anybody draws it."""

from __future__ import annotations

from typing import Any

import pytest

from search.field.cautions import FIRST, USUAL
from search.field.crew import CrewPacket, crew_packet
from search.foundation.errors import BadInput
from tests.field.made import LOW_MOOR, document_of, trial_with


def packet(**changes: Any) -> CrewPacket:
    """The packet of a Low Moor trial with some keys of its file changed."""
    trial = trial_with(**changes)
    return crew_packet(trial, document_of(trial))


def test_the_packet_tells_what_where_and_when() -> None:
    """Title, mark, day, size and the free text of the file."""
    crew = packet()
    assert crew.title == "Low Moor winter wheat"
    assert crew.issued == "2 March 2027"
    assert crew.size == "8 treatments, 6 blocks, 30 plots"
    assert dict(crew.about)["number"] == "LM-27-03"
    assert crew.seed == 8123
    assert [block.letter for block in crew.blocks] == list("abcdef")


def test_cautions_come_in_order_of_weight() -> None:
    """Labels and law first, then what single treatments ask, then the usual ones."""
    first, own, *usual = packet().cautions
    assert (first.title, first.text) == FIRST
    assert own.text == "Treated seed: gloves, no food on the plot"
    assert own.about == (4,)
    assert [(caution.title, caution.text) for caution in usual] == list(USUAL)


def test_equal_cautions_are_told_once_for_all_their_treatments() -> None:
    """Two treatments with one caution share it; a third with another has its own."""
    treatments = {
        **LOW_MOOR["treatments"],
        "Arlen": {"caution": "gloves"},
        "Fescue": {"caution": "gloves"},
    }
    about = [caution.about for caution in packet(treatments=treatments).cautions if caution.about]
    assert about == [(0, 5), (4,)]


@pytest.mark.parametrize(("spare", "total"), [(0, "1.68 kg"), (2, "2.52 kg")])
def test_what_to_weigh_out(spare: int, total: str) -> None:
    """Elder has four plots of 0.42 kg: 1.68 kg; two spare bags more: 2.52 kg (by hand)."""
    treatments = {**LOW_MOOR["treatments"]}
    treatments["Elder"] = {**treatments["Elder"], "plots": 4}
    elder = packet(treatments=treatments, packet={"spare_bags": spare}).treatments[4]
    assert (elder.plots, elder.per_plot, elder.total) == (4, "0.42 kg", total)


def test_a_plan_issued_on_no_day_is_refused() -> None:
    """The 31st of February has the form of a date and is none."""
    trial = trial_with()
    document = {**document_of(trial), "issued": "2027-02-31T00:00:00Z"}
    with pytest.raises(BadInput, match="no date"):
        crew_packet(trial, document)
