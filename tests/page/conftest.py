"""The browser that the tests of this folder share, and the pages that they look at."""

from __future__ import annotations

import shutil
from collections.abc import Iterator
from pathlib import Path

import pytest

_NAMES = ("chromium", "chromium-browser", "google-chrome", "chrome")


@pytest.fixture(scope="session")
def browser() -> Iterator[object]:
    """Chromium of the system, driven by Playwright; the tests are skipped where one is missing."""
    found = next((path for name in _NAMES if (path := shutil.which(name))), None)
    if found is None:
        pytest.skip("no chromium on this machine: install it (Debian: apt-get install chromium)")
    pytest.importorskip(
        "playwright", reason="Playwright is not installed: pip install 'contactlogic[browser]'"
    )
    from playwright.sync_api import sync_playwright

    with sync_playwright() as engine:
        # Without a sandbox of its own, which root in a container cannot have: the pages are ours.
        running = engine.chromium.launch(executable_path=found, args=["--no-sandbox"])
        yield running
        running.close()


class Seen:
    """A page that is open, and what it did beyond showing itself."""

    def __init__(self, tab, path: Path) -> None:
        self.tab = tab
        self.asked: list[str] = []
        self.faults: list[str] = []
        tab.on("request", lambda request: self.asked.append(request.url))
        tab.on("pageerror", lambda error: self.faults.append(str(error)))
        tab.on("console", lambda said: self.faults.append(said.text))
        tab.on("dialog", lambda dialog: (self.faults.append("a dialog opened"), dialog.dismiss()))
        tab.set_default_timeout(10_000)
        tab.goto(path.as_uri())
        self.own = path.as_uri()

    def drawing(self, index: int = 0):
        """The live drawing of one design."""
        return self.tab.locator(".live").nth(index)

    def state(self, index: int = 0) -> dict[str, object]:
        """What a live drawing shows, read from the page as it stands."""
        return self.drawing(index).evaluate(_READ)


# What can be seen or heard: table, lamps, wires by their width, blades by their ends, buttons.
_READ = """root => ({
  loads: Object.fromEntries([...root.querySelectorAll("table.loads tr[data-load]")].map(
    line => [line.querySelector("th").textContent, line.querySelector(".is").textContent])),
  wanted: Object.fromEntries([...root.querySelectorAll("table.loads tr[data-load]")].map(
    line => [line.querySelector("th").textContent, line.querySelector(".wanted").textContent])),
  lamps: [...root.querySelectorAll("svg .lamp")].map(
    lamp => [Number(lamp.dataset.load), lamp.textContent]),
  heavy: [...new Set([...root.querySelectorAll("svg line.wire")].filter(
    line => parseFloat(getComputedStyle(line).strokeWidth) > 3).map(
    line => Number(line.dataset.net)))].sort((a, b) => a - b),
  thin: [...new Set([...root.querySelectorAll("svg line.wire[data-net]")].filter(
    line => parseFloat(getComputedStyle(line).strokeWidth) < 2).map(
    line => Number(line.dataset.net)))].sort((a, b) => a - b),
  blades: [...root.querySelectorAll("svg .blade")].map(
    blade => [Number(blade.dataset.relay),
              `${blade.getAttribute("x2")},${blade.getAttribute("y2")}`,
              blade.dataset.released, blade.dataset.operated]),
  pressed: Object.fromEntries([...root.querySelectorAll("button.relay")].map(
    button => [button.querySelector(".name").textContent, button.getAttribute("aria-pressed")])),
  said: root.querySelector(".state").textContent,
})"""


@pytest.fixture
def opened(browser, tmp_path: Path) -> Iterator[object]:
    """A function that opens a page's text in a tab of its own and checks on it at the end."""
    seen: list[Seen] = []

    def show(text: str) -> Seen:
        path = tmp_path / f"page-{len(seen)}.html"
        path.write_text(text, encoding="utf-8")
        seen.append(Seen(browser.new_page(viewport={"width": 1200, "height": 900}), path))
        return seen[-1]

    yield show
    for each in seen:
        each.tab.close()
        assert each.faults == []
        assert [url for url in each.asked if not url.startswith(("data:", each.own))] == []
