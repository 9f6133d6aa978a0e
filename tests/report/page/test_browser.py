"""The page in a real browser, headless Chromium: quiet, self-contained, readable on screen and paper.

Nothing here skips: without the browser these tests fail.
"""

from __future__ import annotations

import re
import shutil
from collections.abc import Iterator
from pathlib import Path

import pytest
from playwright.sync_api import Browser, Page, ViewportSize, sync_playwright

from optimizer.record import read_board
from optimizer.report.page import compose, to_html
from optimizer.report.page.blocks import Page as Composed
from optimizer.report.page.board import compose_board
from optimizer.review.board import reopen_board
from optimizer.review.board_dossier import gather_board
from optimizer.review.dossier import Dossier, Place
from tests.report.page.made import LONG, case
from tests.review.made_board import saved_board

pytestmark = pytest.mark.browser

NARROW, WIDE = ViewportSize(width=360, height=740), ViewportSize(width=1280, height=900)
PAPER = {"A4": 680, "Letter": 702}  # px between the margins at 96 px an inch: 180 mm and 185.9 mm
POINTS = {"A4": (595, 842), "Letter": (612, 792)}
OVERFLOW = "document.documentElement.scrollWidth - document.documentElement.clientWidth"
CONTRAST = """
() => {
  const channel = v => { v /= 255; return v <= 0.04045 ? v / 12.92 : ((v + 0.055) / 1.055) ** 2.4 };
  const light = c => { const [r, g, b] = c.match(/[0-9.]+/g).map(Number);
                       return 0.2126 * channel(r) + 0.7152 * channel(g) + 0.0722 * channel(b) };
  const ground = e => { for (; e; e = e.parentElement) { const c = getComputedStyle(e).backgroundColor;
                        if (c !== 'rgba(0, 0, 0, 0)') return c } return 'rgb(255, 255, 255)' };
  const seen = {};
  for (const e of document.querySelectorAll('body *')) {
    const own = [...e.childNodes].some(n => n.nodeType === 3 && n.textContent.trim());
    if (!own || e.closest('.skip')) continue;
    const style = getComputedStyle(e);
    const [a, b] = [light(e instanceof SVGElement ? style.fill : style.color), light(ground(e))];
    const ratio = (Math.max(a, b) + 0.05) / (Math.min(a, b) + 0.05);
    if (ratio < 4.5) seen[`${e.tagName} ${e.className.baseVal ?? e.className}`] = ratio.toFixed(2);
  }
  return seen;
}
"""


@pytest.fixture(scope="module")
def browser() -> Iterator[Browser]:
    path = shutil.which("chromium")
    assert path is not None, "chromium is not installed"
    with sync_playwright() as playwright:
        browser = playwright.chromium.launch(executable_path=path)
        yield browser
        browser.close()


@pytest.fixture(scope="module")
def files(
    tmp_path_factory: pytest.TempPathFactory, full: Dossier, hostile: Dossier, dossier: Dossier
) -> dict[str, Path]:
    """The pages as files: as it is, with every finding, with awkward names, with endless ones."""
    folder = tmp_path_factory.mktemp("pages")
    names = {"photodiode": LONG, "opamp": LONG[:-1]}
    endless = case(folder / "endless", names=names).weighed(tuple(names.values()))
    pages = {"plain": compose(dossier), "full": compose(full), "hostile": compose(hostile)}
    pages |= {"endless": compose(endless), "board": board_page(folder / "board")}
    for name, each in pages.items():
        (folder / f"{name}.html").write_text(to_html(each), "utf-8")
    return {name: folder / f"{name}.html" for name in pages}


def board_page(folder: Path) -> Composed:
    """The page on a board's plan."""
    path = saved_board(folder)
    opened = reopen_board(read_board(path), path)
    return compose_board(gather_board(opened, Place(path.name, "board.toml", "review.html")))


CASES = pytest.mark.parametrize("name", ["plain", "full", "hostile", "endless", "board"])


@CASES
@pytest.mark.parametrize("scheme", ["light", "dark"])
def test_it_is_quiet_and_fetches_nothing(
    browser: Browser, files: dict[str, Path], name: str, scheme: str
) -> None:
    with browser.new_context(viewport=WIDE, color_scheme=scheme) as context:  # type: ignore[arg-type]
        page = context.new_page()
        said: list[str] = []
        asked: list[str] = []
        page.on("console", lambda message: said.append(message.text))
        page.on("pageerror", lambda error: said.append(str(error)))
        page.on("dialog", lambda dialog: said.append(dialog.message))
        page.on("request", lambda request: asked.append(request.url))
        page.goto(files[name].as_uri())
        page.wait_for_load_state("networkidle")
        assert said == []
        assert [url for url in asked if not url.startswith("data:")] == [files[name].as_uri()]


@CASES
@pytest.mark.parametrize("viewport", [NARROW, WIDE], ids=["360 px", "1280 px"])
def test_it_does_not_scroll_sideways(
    browser: Browser, files: dict[str, Path], name: str, viewport: ViewportSize
) -> None:
    with browser.new_context(viewport=viewport) as context:
        page = opened(context.new_page(), files[name])
        assert page.evaluate(OVERFLOW) <= 0
        open_all(page)
        assert page.evaluate(OVERFLOW) <= 0


@CASES
@pytest.mark.parametrize("paper", ["A4", "Letter"])
def test_it_prints_whole(browser: Browser, files: dict[str, Path], name: str, paper: str) -> None:
    with browser.new_context(viewport=ViewportSize(width=PAPER[paper], height=900)) as context:
        page = opened(context.new_page(), files[name])
        pdf = page.pdf(format=paper)
        assert pdf.startswith(b"%PDF-")
        boxes = [list(map(float, box.split())) for box in re.findall(rb"/MediaBox \[([^]]+)\]", pdf)]
        assert boxes
        for box in boxes:
            assert box == pytest.approx([0.0, 0.0, *POINTS[paper]], abs=1.0)
        page.emulate_media(media="print")
        assert page.evaluate(OVERFLOW) <= 0
        cut = "e => e.scrollWidth > e.clientWidth + 1"
        regions = page.locator(".scroll").element_handles()
        assert not [one.get_attribute("aria-label") for one in regions if one.evaluate(cut)]


def test_paper_shows_the_formulas_even_where_they_were_closed(
    browser: Browser, files: dict[str, Path]
) -> None:
    with browser.new_context(viewport=WIDE) as context:
        page = opened(context.new_page(), files["full"])
        page.evaluate("document.querySelectorAll('details').forEach(e => e.open = false)")
        formula = page.locator(".formula").first
        assert not formula.is_visible()
        page.emulate_media(media="print")
        assert formula.evaluate("e => e.getBoundingClientRect().height") > 0
        assert not page.locator("details.data").first.is_visible()


def test_it_needs_no_script(browser: Browser, files: dict[str, Path]) -> None:
    with browser.new_context(viewport=WIDE, java_script_enabled=False) as context:
        page = opened(context.new_page(), files["full"])
        assert page.get_by_role("heading", level=1).inner_text() == "light gate, receive channel"
        page.get_by_text("The numbers of this drawing").first.click()
        assert page.get_by_role("table", name="Gains and response over frequency").is_visible()


@pytest.mark.parametrize("scheme", ["light", "dark"])
def test_text_stands_out_from_its_ground(browser: Browser, files: dict[str, Path], scheme: str) -> None:
    """At least 4.5 to 1 everywhere: Web Content Accessibility Guidelines 2.2, success criterion 1.4.3."""
    with browser.new_context(viewport=WIDE, color_scheme=scheme) as context:  # type: ignore[arg-type]
        page = opened(context.new_page(), files["full"])
        assert page.evaluate(CONTRAST) == {}


def test_dark_and_light_differ_and_paper_is_light(browser: Browser, files: dict[str, Path]) -> None:
    ground = "getComputedStyle(document.body).backgroundColor"
    with browser.new_context(viewport=WIDE, color_scheme="dark") as context:
        page = opened(context.new_page(), files["full"])
        dark = page.evaluate(ground)
        page.emulate_media(media="print")
        assert page.evaluate(ground) == "rgb(255, 255, 255)"
        page.emulate_media(media="screen", color_scheme="light")
        assert page.evaluate(ground) not in (dark, "rgb(255, 255, 255)")


def test_the_keyboard_reaches_skip_link_regions_and_formulas(
    browser: Browser, files: dict[str, Path]
) -> None:
    focused = "document.activeElement.className + ' ' + document.activeElement.tagName"
    with browser.new_context(viewport=NARROW) as context:
        page = opened(context.new_page(), files["full"])
        page.keyboard.press("Tab")
        assert page.evaluate(focused) == "skip A"
        assert page.locator(".skip").bounding_box()["x"] >= 0  # type: ignore[index]
        page.keyboard.press("Enter")
        assert page.url.endswith("#decision")
        stops = []
        for _ in range(120):
            page.keyboard.press("Tab")
            stops.append(page.evaluate(focused).strip())
        visible = page.locator(".scroll:visible").count()
        assert stops.count("scroll DIV") >= visible
        assert stops.count("SUMMARY") > 30
        region = page.get_by_role("region", name="Table: Every graded target")
        region.focus()
        page.keyboard.press("ArrowRight")
        assert scrolled(page)


def test_the_browser_hears_every_drawing_by_its_numbers(browser: Browser, files: dict[str, Path]) -> None:
    with browser.new_context(viewport=WIDE) as context:
        page = opened(context.new_page(), files["full"])
        drawings = page.get_by_role("img")
        assert drawings.count() == page.locator("figure").count() == 8
        assert page.get_by_role("img", name=re.compile(r"Budget of .* \d+ %")).count() == 1
        assert page.get_by_role("navigation", name="Sections").count() == 1
        assert page.get_by_role("region", name="Compliance").count() == 1


def scrolled(page: Page) -> bool:
    """Whether the focused region moves within a few seconds: the browser glides."""
    for _ in range(100):
        if page.evaluate("document.activeElement.scrollLeft") > 0:
            return True
        page.wait_for_timeout(50)
    return False


def opened(page: Page, file: Path) -> Page:
    page.goto(file.as_uri())
    return page


def open_all(page: Page) -> None:
    page.evaluate("document.querySelectorAll('details').forEach(e => e.open = true)")
