"""plan.html: whole, alone, inert."""

from __future__ import annotations

import base64
import re
import struct
from html.parser import HTMLParser
from typing import Any

import numpy as np
import pytest

from search.efficiency.evaluator import pair_variances
from search.field.crew import crew_packet
from search.field.office import office_sheet
from search.field.page import plan_html
from search.field.pictures import picture
from search.trial.reading import trial_from_document
from tests.field.made import LOW_MOOR, document_of
from tests.field.test_paper import HOSTILE, field

PRECISION = {"cv_percent": 9, "mean": 8.1, "unit": "t/ha", "difference": 1}


def page_of(document: dict[str, Any]) -> str:
    """The page of a trial file."""
    trial = trial_from_document(document)
    plan = document_of(trial)
    packet = crew_packet(trial, plan)
    return plan_html(packet, office_sheet(trial, plan, packet.office))


class Tags(HTMLParser):
    """Collects tags, attributes and text, as any reader of HTML would."""

    def __init__(self, page: str) -> None:
        super().__init__()
        self.tags: list[str] = []
        self.attributes: list[tuple[str, str | None]] = []
        self.texts: list[str] = []
        self.feed(page)

    def handle_starttag(self, tag: str, attrs: list[tuple[str, str | None]]) -> None:
        self.tags.append(tag)
        self.attributes += attrs

    def handle_data(self, data: str) -> None:
        self.texts.append(data.strip())


@pytest.fixture(scope="module")
def low_moor() -> str:
    """The page of the design document's trial."""
    return page_of({**LOW_MOOR, "precision": PRECISION})


def test_the_page_needs_nothing_else(low_moor: str) -> None:
    """No script, no address but data within the page itself, and a policy that says so."""
    tags = Tags(low_moor)
    assert not {"script", "link", "iframe", "object", "form", "a"} & set(tags.tags)
    for name, value in tags.attributes:
        assert not name.startswith("on")
        if name in ("href", "src", "xlink:href"):
            assert (value or "").startswith("data:image/png;base64,")
    assert "default-src 'none'" in low_moor
    assert "http:" not in low_moor
    assert "https:" not in low_moor


def test_every_plot_is_on_the_map(low_moor: str) -> None:
    """Thirty plots, each with its number, and a tag for each block."""
    numbers = re.findall(r'font-size="14">(\d+)<', low_moor)
    assert len(numbers) == 30
    assert low_moor.count("<tspan fill=") == sum(
        plot["treatment"] == "Elder" for plot in document_of(trial_from_document(LOW_MOOR))["plots"]
    )


def test_the_office_sheet_tells_what_a_biometrician_asks(low_moor: str) -> None:
    """Efficiency, losses, gap in plots, break-even, degrees of freedom, errors, power, and both pictures."""
    for words in (
        "Efficiency, all pairs",
        "Lost to replication",
        "Break-even",
        "of 30 plots are wasted",
        "Residual degrees of freedom",
        "PP 1/152",
        "Standard error of a difference",
        "Detectable difference",
        "Chance to find 1 t/ha",
        "Who meets whom",
        "How well pairs compare",
        "no choice in the number of plots",
    ):
        assert words in low_moor, words


def test_names_are_text_and_nothing_more() -> None:
    """Markup in names is shown, not obeyed, in the map's titles as in the tables."""
    hostile = {**HOSTILE, "{{ 7*7 }}": {}, "<script>alert(1)</script>": {}, '"><img src=x onerror=y>': {}}
    page = page_of(
        {"trial": "</title><script>", "treatments": hostile, "blocks": {"<svg onload=x>": 6, "b": 6, "c": 6}}
    )
    tags = Tags(page)
    assert not {"script", "img", "para", "a"} & set(tags.tags)
    assert not any(name.startswith("on") for name, _ in tags.attributes)
    assert any("{{ 7*7 }}" in text for text in tags.texts)
    assert any("<script>alert(1)</script>" in text for text in tags.texts)


def test_large_maps_and_maps_without_ground_are_drawn() -> None:
    """Three hundred plots with measures, and blocks as lines."""
    page = page_of(field(20, 15, plot_m=[1.5, 6], gap_m=[0.3, 1], north_deg=200))
    assert len(re.findall(r'font-size="14">\d+<', page)) == 300
    assert "200° from north" in page
    assert "Each block is a line" in page_of(
        {"trial": "no map", "treatments": 6, "blocks": {"count": 5, "plots": 5}}
    )


def test_a_picture_is_a_png_of_its_size() -> None:
    """Signature, size and colours of the file as the PNG standard has them; the key spans the values."""
    values = np.array([[0, 1, 2], [1, 0, 3], [2, 3, 0]], dtype=float)
    drawn = picture("t", "u", values, 0)
    data = base64.b64decode(drawn.source.split(",")[1])
    assert data.startswith(b"\x89PNG\r\n\x1a\n")
    assert struct.unpack(">II", data[16:24]) == (3, 3)
    assert [key.told for key in drawn.keys] == ["1", "2", "3"]
    assert len({key.colour for key in drawn.keys}) == 3


def test_an_even_table_has_one_colour_and_one_key() -> None:
    """Where every pair is alike there is no scale to read."""
    drawn = picture("t", "u", np.full((4, 4), 2.0), 2)
    assert [key.told for key in drawn.keys] == ["2.00"]


def test_the_picture_of_variances_is_that_of_the_evaluator() -> None:
    """The worst pair that the page names has the largest variance of the slow evaluator."""
    trial = trial_from_document({**LOW_MOOR, "precision": PRECISION})
    plan = document_of(trial)
    sheet = office_sheet(trial, plan, ())
    number = {treatment.name: i for i, treatment in enumerate(trial.treatments)}
    contents = tuple(tuple(sorted(number[name] for name in plan["blocks"][b.name])) for b in trial.blocks)
    variances = pair_variances(contents, trial.t)
    assert variances is not None
    told = next(f for group in sheet.groups for f in group.figures if f.name == "Variance of a difference")
    assert f"largest {variances.max():.3f}" in told.told
