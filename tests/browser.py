"""A real Chromium for pages that draw themselves."""

from __future__ import annotations

import os
import shutil
from collections.abc import Iterator
from contextlib import contextmanager
from pathlib import Path
from typing import Any

import pytest

NAMES = ("chromium", "chromium-browser", "google-chrome")


@contextmanager
def chromium() -> Iterator[Any]:
    """The browser of the machine, driven by playwright; without one the test is skipped, but never in CI."""
    found = next(filter(None, map(shutil.which, NAMES)), None)
    if found is None:
        assert not os.environ.get("CI"), "no Chromium here: apt-get install chromium"
        pytest.skip("no Chromium on this machine: apt-get install chromium")
    from playwright.sync_api import sync_playwright

    with sync_playwright() as driver:
        browser = driver.chromium.launch(executable_path=found, args=["--no-sandbox"])
        yield browser
        browser.close()


class Visit:
    """A page that is open, and whatever went wrong on it.

    Parameters
    ----------
    browser : of `chromium`
    file : the page
    options : of the browser's context, such as `color_scheme`
    """

    def __init__(self, browser: Any, file: Path, **options: Any) -> None:
        self.context = browser.new_context(**({"viewport": {"width": 1280, "height": 900}} | options))
        self.page = self.context.new_page()
        self.troubles: list[str] = []
        self.asked: list[str] = []
        self.page.on("pageerror", lambda error: self.troubles.append(str(error)))
        self.page.on(
            "console",
            lambda said: self.troubles.append(said.text) if said.type in ("error", "warning") else None,
        )
        self.page.on("dialog", lambda dialog: (self.troubles.append(dialog.message), dialog.dismiss()))
        self.page.on("request", lambda request: self.asked.append(request.url))
        self.page.goto(file.resolve().as_uri())

    def __enter__(self) -> Visit:
        return self

    def __exit__(self, *_: object) -> None:
        self.context.close()
        assert self.troubles == []
        assert all(url.startswith(("file:", "data:")) for url in self.asked), self.asked
