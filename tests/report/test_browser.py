"""The report in a browser, straight from the disk: complete without a network, and on paper."""

from collections.abc import Iterator
from pathlib import Path
from typing import Any

import pytest

from explorer.report import report_html
from tests.report.conftest import hostile_plant

pytestmark = pytest.mark.browser


@pytest.fixture
def opened(browser: Any, tmp_path: Path) -> Iterator[Any]:
    """Opens a page from a file; it must ask for nothing else and say nothing in the console."""
    context = browser.new_context(viewport={"width": 1280, "height": 720}, offline=True)
    page, asked, said = context.new_page(), [], []
    page.on("request", lambda request: asked.append(request.url))
    page.on("console", lambda message: said.append(message.text))
    page.on("pageerror", lambda error: said.append(str(error)))
    path = tmp_path / "report.html"

    def open_page(html: str) -> Any:
        path.write_text(html, encoding="utf-8")
        page.goto(path.as_uri())
        return page

    yield open_page
    assert asked == [path.as_uri()]
    assert said == []
    context.close()


@pytest.mark.parametrize("name", ["amber", "moss"])
def test_the_page_is_whole_without_a_network(opened, shipped_report, name):
    """Figures have a size, no part is wider than the page, at desk and at tablet width."""
    page = opened(shipped_report(name))
    for width in (1280, 768):
        page.set_viewport_size({"width": width, "height": 900})
        assert page.evaluate("document.documentElement.scrollWidth") == width
        for figure in page.locator("figure svg").all():
            box = figure.bounding_box()
            assert box["width"] > 250 and box["height"] > 150
    assert page.title() in page.locator("h1").inner_text()


def test_nothing_of_a_hostile_scenario_runs(opened, plant):
    """No image, no handler, no style of its own."""
    page = opened(report_html(hostile_plant(plant)))
    assert page.locator("img").count() == 0
    assert page.evaluate("document.scripts.length") == 1
    assert page.locator("h1").inner_text().startswith("<img src=x")


def test_a_table_is_saved_as_csv(opened, shipped_report):
    """The link beside it holds the file."""
    page = opened(shipped_report("amber"))
    with page.expect_download() as waiting:
        page.locator("#stages a.csv").click()
    assert waiting.value.suggested_filename == "stages.csv"
    text = Path(waiting.value.path()).read_text(encoding="utf-8-sig")
    assert text.splitlines()[1].startswith("Fern River,8.60,4.0,64.0")


@pytest.mark.parametrize("paper", ["A4", "Letter"])
def test_it_prints_on_either_paper(opened, shipped_report, paper, tmp_path):
    """On white whatever the screen has, without links and contents, within the width of the paper."""
    page = opened(shipped_report("moss"))
    page.emulate_media(media="print", color_scheme="dark")
    assert not page.locator("nav").is_visible()
    assert not page.locator("a.csv").first.is_visible()
    assert page.evaluate("getComputedStyle(document.body).backgroundColor") == "rgb(255, 255, 255)"
    inside = {"A4": 210 - 28, "Letter": 216 - 28}[paper] / 25.4 * 96
    page.set_viewport_size({"width": int(inside), "height": 900})
    assert page.evaluate("document.documentElement.scrollWidth") <= int(inside)
    assert page.pdf(format=paper).startswith(b"%PDF")
