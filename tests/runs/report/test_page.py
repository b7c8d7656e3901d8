"""sweep.html in a real Chromium: it sorts, filters, draws, opens plans, prints, and runs nothing foreign."""

from __future__ import annotations

import re
from collections.abc import Iterator
from dataclasses import replace
from pathlib import Path
from typing import Any

import pytest
from pypdf import PdfReader

from search.runs.report.page import HERE, sweep_html
from search.runs.sweep_records import RowResult
from tests.browser import Visit, chromium
from tests.runs.report.swept import SWEEP, swept


@pytest.fixture(scope="module")
def browser() -> Iterator[Any]:
    with chromium() as found:
        yield found


def page_of(folder: Path, text: str = SWEEP, rows: tuple[RowResult, ...] | None = None) -> Path:
    sweep, own = swept(text)
    file = folder / "sweep.html"
    file.write_text(sweep_html(sweep.name, sweep.columns, rows or own), encoding="utf-8")
    return file


def first_cells(visit: Visit) -> list[str]:
    return list(visit.page.locator("#rows tbody tr td:first-child").all_inner_texts())


def heading(visit: Visit, title: str) -> Any:
    return visit.page.get_by_role("columnheader", name=title).get_by_role("button")


def test_sorts_and_filters(browser: Any, tmp_path: Path) -> None:
    """A heading sorts, again the other way, rows without the figure last; filters go together with charts."""
    with Visit(browser, page_of(tmp_path)) as visit:
        assert first_cells(visit) == [str(n) for n in range(1, 13)]
        _, rows = swept()
        best = {str(row.row.number): row.plan.score.aim for row in rows if row.plan is not None}
        for way in (1, -1):
            heading(visit, "Best found").click()
            order = first_cells(visit)
            figures = [way * best[number] for number in order[:6]]
            assert figures == sorted(figures)
            assert set(order[6:]) == set(map(str, range(7, 13)))
        assert visit.page.locator("th[aria-sort=descending]").inner_text().startswith("Best found")
        points = visit.page.locator("figure .found").first.get_attribute("d").count("M")
        assert points == 3
        visit.page.get_by_label("Outcome").select_option("impossible")
        assert set(first_cells(visit)) == set(map(str, range(7, 13)))
        assert "6 of 12 rows" in visit.page.locator("#count").inner_text()
        assert "No row to draw" in visit.page.locator(".charts").inner_text()
        visit.page.get_by_label("Outcome").select_option("all")
        visit.page.get_by_label("Search").fill("MORE BLOCKS THAN")
        assert len(first_cells(visit)) == 6


def test_a_row_opens_its_plan_by_keyboard(browser: Any, tmp_path: Path) -> None:
    """Enter opens the plan with figures, argument and blocks; arrows go on; Escape leads back to the row."""
    file = page_of(tmp_path)
    sweep, rows = swept()
    with Visit(browser, file) as visit:
        page = visit.page
        page.locator("#rows tbody button").first.focus()
        page.keyboard.press("Enter")
        dialog = page.locator("dialog[open]")
        text = dialog.inner_text()
        plan = rows[0].plan
        assert plan is not None
        assert plan.bound is not None
        assert f"{plan.score.aim:.5f}" in text
        assert plan.bound.argument in text
        told = dialog.locator(".blocks section > div").all()
        blocks = [block.locator("button").all_inner_texts() for block in told]
        names = [treatment.name for treatment in plan.trial.treatments]
        assert blocks == [[names[i] for i in block] for block in plan.contents]
        dialog.get_by_role("button", name="T01").first.click()
        assert dialog.locator("[aria-pressed=true]").count() == sum(block.count(0) for block in plan.contents)
        page.keyboard.press("ArrowRight")
        assert page.locator("#plan-title").inner_text() == "Row 2"
        assert page.url.endswith("#row-2")
        page.keyboard.press("Escape")
        page.wait_for_function("location.hash === ''")
        assert page.evaluate("document.activeElement.textContent") == "2"
    with Visit(browser, file.with_name("sweep.html")) as visit:
        visit.page.goto(file.as_uri() + "#row-8")
        visit.page.reload()
        text = visit.page.locator("dialog[open]").inner_text()
        assert "line 12: never_share_block: [T01, T02]" in text
        assert "leave the line out" in text
    assert sweep.name == "oats"


HOSTILE = (
    "</script><script>alert(1)</script>",
    "<img src=x onerror=alert(2)>",
    "'\"&amp;<b>",
    "=1+1",
    "${alert(3)}",
)


def test_hostile_names_stay_text(browser: Any, tmp_path: Path) -> None:
    """Names that look like markup or script are shown as they were typed, and nothing of them runs."""
    names = ", ".join("'" + name.replace("'", "''") + "'" for name in HOSTILE)
    text = SWEEP.replace("treatments: 6", f"treatments: [{names}]").replace(
        "sweep: oats", f"sweep: '{HOSTILE[0]}'"
    )
    text = text.replace("  treatments: [5, 6]\n", "").replace("  free:\n", "  '<i>free</i>':\n")
    text = text.replace("[[T01, T02]]", f"[[{names.split(', ')[1]}, '=1+1']]")
    with Visit(browser, page_of(tmp_path, text)) as visit:
        page = visit.page
        assert page.title() == HOSTILE[0]
        assert page.locator("h1").inner_text() == HOSTILE[0]
        page.locator("#rows tbody button").first.click()
        shown = set(page.locator("dialog .plot").all_inner_texts())
        assert shown == set(HOSTILE)
        assert "<i>free</i>" in page.locator("dialog dl").inner_text()
        assert page.locator("img, i, main b b").count() == 0
        assert page.locator("script").count() == 2
        page.evaluate("document.querySelector('dialog').close()")
        figure = page.locator("figure svg").first
        figure.hover()
        page.mouse.move(0, 0)


def test_runs_its_own_script_alone(browser: Any, tmp_path: Path) -> None:
    """The page's policy names its script by digest: another one put into the file does not run."""
    file = page_of(tmp_path)
    whole = file.read_text()
    file.write_text(whole.replace("</main>", "</main><script>document.title = 'taken'</script>"))
    visit = Visit(browser, file)
    assert visit.page.title() == "oats"
    assert any("Content Security Policy" in trouble for trouble in visit.troubles)
    visit.context.close()


def test_light_dark_and_narrow(browser: Any, tmp_path: Path) -> None:
    """The page follows the system's shade, a button changes it, and a phone needs no sideways scrolling."""
    file = page_of(tmp_path)
    with Visit(browser, file, color_scheme="dark", viewport={"width": 360, "height": 740}) as visit:
        page = visit.page
        ground = "getComputedStyle(document.body).backgroundColor"
        assert page.evaluate(ground) == "rgb(20, 26, 24)"
        page.get_by_role("button", name="Light").click()
        assert page.evaluate(ground) == "rgb(255, 255, 255)"
        assert page.evaluate("document.documentElement.scrollWidth") <= 360
        page.locator("#rows tbody button").first.click()
        assert page.evaluate("document.querySelector('dialog').scrollWidth") <= 360


def test_prints_every_row(browser: Any, tmp_path: Path) -> None:
    """On paper all rows stand, also those that the screen shows only on demand; an open plan prints alone."""
    _, rows = swept()
    many = tuple(
        replace(row, row=replace(row.row, number=12 * times + row.row.number))
        for times in range(30)
        for row in rows
    )
    with Visit(browser, page_of(tmp_path, rows=many)) as visit:
        page = visit.page
        assert len(first_cells(visit)) == 300
        assert page.get_by_role("button", name="Show 60 more").is_visible()
        page.pdf(path=tmp_path / "all.pdf", prefer_css_page_size=True)
        text = "\n".join(sheet.extract_text() for sheet in PdfReader(tmp_path / "all.pdf").pages)
        assert {str(n) for n in range(1, 361)} <= set(re.findall(r"\d+", text))
        assert "Search" not in text
        page.locator("#rows tbody button").first.click()
        page.pdf(path=tmp_path / "one.pdf", prefer_css_page_size=True)
        sheets = PdfReader(tmp_path / "one.pdf").pages
        assert len(sheets) <= 2
        assert "Loss to blocks" not in sheets[0].extract_text()
        assert "T05" in sheets[0].extract_text()


@pytest.mark.parametrize("status", ["one row", "none planned", "one plot size"])
def test_small_and_empty_sweeps(browser: Any, tmp_path: Path, status: str) -> None:
    """One row, or none with a plan: the page stands, and draws no chart where there is nothing to draw."""
    _, rows = swept()
    chosen = {"one row": rows[:1], "none planned": rows[6:], "one plot size": rows[::3]}[status]
    with Visit(browser, page_of(tmp_path, rows=chosen)) as visit:
        assert len(first_cells(visit)) == len(chosen)
        assert visit.page.locator("#charts").is_visible() == (status != "none planned")
        visit.page.locator("#rows tbody button").last.click()
        assert visit.page.locator("dialog[open]").count() == 1


def test_lines_differ_without_colour(browser: Any, tmp_path: Path) -> None:
    """Each line has a mark and a dash of its own, so that it is told apart in grey."""
    with Visit(browser, page_of(tmp_path)) as visit:
        marks = visit.page.locator("#legend .found")
        assert marks.count() == 2
        assert len({marks.nth(i).get_attribute("d") for i in range(2)}) == 2
        dashes = visit.page.locator("#legend .line")
        assert len({dashes.nth(i).get_attribute("stroke-dasharray") for i in range(2)}) == 2


def luminance(colour: str) -> float:
    """Relative luminance (Web Content Accessibility Guidelines 2.1, definition of relative luminance)."""
    digits = colour if len(colour) == 6 else "".join(letter * 2 for letter in colour)
    parts = [int(digits[i : i + 2], 16) / 255 for i in (0, 2, 4)]
    lights = [part / 12.92 if part <= 0.04045 else ((part + 0.055) / 1.055) ** 2.4 for part in parts]
    return 0.2126 * lights[0] + 0.7152 * lights[1] + 0.0722 * lights[2]


def test_words_stand_out_from_their_ground() -> None:
    """Contrast of all words is at least 4.5 to 1 in both shades, of marks 3 to 1 (WCAG 2.1)."""
    style = (HERE / "sweep.css").read_text()
    for rule in re.findall(r"^:root[^{]*\{(.*?)\}", style, re.MULTILINE | re.DOTALL):
        colours = {name: luminance(value) for name, value in re.findall(r"--([\w-]+): #(\w+)", rule)}
        for ground in ("paper", "panel", "warning-tint"):
            for name in ("ink", "quiet", "accent", "warning", "s0", "s1", "s2", "s3", "s4", "s5"):
                low, high = sorted((colours[name], colours[ground]))
                least = 3 if name.startswith("s") else 4.5
                assert (high + 0.05) / (low + 0.05) >= least, (name, ground)
