"""The page in headless Chromium: no console message, no request, figures drawn, accessible, two widths."""

from __future__ import annotations

import shutil
from collections.abc import Iterator
from dataclasses import dataclass
from pathlib import Path
from typing import Any

import pytest
from axe_playwright_python.sync_playwright import Axe
from playwright.sync_api import Browser, Page, sync_playwright

from reports.page import write_page
from tests.reportcase import Fake, fakes, make_run

pytestmark = pytest.mark.browser

ARGS = [
    "--headless",
    "--no-sandbox",
    "--disable-gpu",
    "--disable-background-networking",
    "--disable-component-update",
    "--disable-dev-shm-usage",
]
SIZES = {"wide": 1400, "narrow": 420}
EVIL = ("<img src=x onerror=window.hit=1>", "</script><script>window.hit=1</script>", '"><b>x</b>')


@pytest.fixture(scope="module")
def browser() -> Iterator[Browser]:
    with sync_playwright() as play:
        browser = play.chromium.launch(executable_path=shutil.which("chromium"), args=ARGS)
        yield browser
        browser.close()


@pytest.fixture(scope="module")
def report(tmp_path_factory: pytest.TempPathFactory) -> Path:
    path = tmp_path_factory.mktemp("page") / "report.html"
    write_page(make_run(fakes(5)), path)
    return path


def open_page(browser: Browser, path: Path, width: int) -> tuple[Page, list[str]]:
    page = browser.new_page(viewport={"width": width, "height": 900})
    said: list[str] = []
    page.on("console", lambda message: said.append(message.text))
    page.on("pageerror", lambda error: said.append(str(error)))
    page.on("request", lambda request: said.append(request.url) if not _local(request.url) else None)
    page.goto(path.as_uri())
    page.wait_for_selector("html[data-ready]")
    return page, said


def _local(url: str) -> bool:
    return url.startswith(("file:", "data:", "blob:"))


def scroll_through(page: Page) -> None:
    height = page.evaluate("document.documentElement.scrollHeight")
    for top in range(0, height, 700):
        page.evaluate(f"window.scrollTo({{top: {top}, behavior: 'instant'}})")
        page.wait_for_timeout(30)
    page.wait_for_function("[...document.querySelectorAll('.plot')].every(p => p.dataset.drawn)")


@dataclass
class Opened:
    """A page that was scrolled through, how many figures were drawn at first, and what the browser said."""

    page: Page
    width: int
    at_first: int
    said: list[str]


@pytest.fixture(scope="module", params=SIZES)
def opened(request: pytest.FixtureRequest, browser: Browser, report: Path) -> Iterator[Opened]:
    width = SIZES[request.param]
    page, said = open_page(browser, report, width)
    at_first = page.locator(".plot[data-drawn]").count()
    scroll_through(page)
    yield Opened(page, width, at_first, said)
    assert said == []
    page.close()


def test_figures_are_drawn_as_they_come_into_view(opened: Opened) -> None:
    total = opened.page.locator(".plot").count()
    assert opened.at_first < total
    assert opened.page.locator(".plot .main-svg").count() >= total
    assert opened.said == []
    assert opened.page.evaluate("document.documentElement.scrollWidth") <= opened.width


def test_the_page_is_accessible(opened: Opened) -> None:
    found: Any = Axe().run(opened.page)
    assert found.response["violations"] == [], found.generate_report()


def test_the_reader_chooses_the_candidate_shown_in_detail(opened: Opened) -> None:
    page = opened.page
    before = page.evaluate("document.getElementById('f-bands').data[0].x")
    page.select_option("#c-bands", "3")
    assert {s.input_value() for s in page.locator("select.choose").all()} == {"3"}
    assert set(page.locator(".chosen").all_inner_texts()) == {"double infrared film"}
    assert page.locator("#bands .one:visible").count() == 1
    assert "double infrared film" in page.locator("#bands .one:visible").inner_text()
    assert page.evaluate("document.getElementById('f-bands').data[0].x") != before
    assert opened.said == []


def test_a_key_hides_and_shows_its_line(opened: Opened) -> None:
    page = opened.page
    lines = "[...document.getElementById('f-dli').data].filter(t => t.visible === true).length"
    assert page.evaluate(lines) == 6
    key = page.locator("figure:has(#f-dli) .toggle").nth(2)
    key.click()
    assert key.get_attribute("aria-pressed") == "false"
    assert page.evaluate(lines) == 5
    key.click()
    assert page.evaluate(lines) == 6
    assert opened.said == []


def test_printing_draws_every_figure_and_opens_every_table(browser: Browser, report: Path) -> None:
    page, said = open_page(browser, report, 1400)
    pdf = page.pdf(format="A4")
    assert pdf.startswith(b"%PDF")
    assert page.locator(".plot:not([data-drawn])").count() == 0
    assert page.locator("details:not([open])").count() == 0
    assert said == []
    page.close()


def test_names_that_users_type_do_nothing(browser: Browser, tmp_path: Path) -> None:
    path = tmp_path / "report.html"
    write_page(make_run(tuple(Fake(name) for name in EVIL), title=EVIL[1]), path)
    page, said = open_page(browser, path, 1400)
    scroll_through(page)
    page.select_option("#c-bands", "1")
    page.locator("figure:has(#f-dli) .toggle").nth(1).click()
    shown = "[...document.getElementById('f-dli').data].filter(t => t.visible === true).length"
    assert page.evaluate(shown) == 3
    assert page.evaluate("window.hit") is None
    assert page.locator(".plot img, .plot b").count() == 0
    assert page.title() == EVIL[1]
    assert said == []
    page.close()
