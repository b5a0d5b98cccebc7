"""Hostile text: markup and a formula in every text field of a scenario are text on every surface."""

import json
import re
from collections.abc import Iterator
from html.parser import HTMLParser
from pathlib import Path
from typing import Any

import pytest

from explorer.report import report_html
from explorer.scenario.csv_text import csv_text
from explorer.scenario.files import ScenarioError, read_scenario
from explorer.studies.sweep import sweep
from tests.browser.conftest import Screen
from tests.serving import running

HOSTILE = '=1+1<img class=inj src=x onerror="window.__xss=1">'
SEASON = '<b class=inj onclick="window.__xss=1">winter'
SAVED = Path(__file__).resolve().parents[1] / "scenario" / "saved" / "version_1.json"
VIEWS = ("Sweep", "Window", "Tolerance", "Titration", "Compare", "Ledger", "Quantities", "Basis")


def texts(part: Any, path: tuple = ()) -> Iterator[tuple]:
    """Where texts stand in a file."""
    if isinstance(part, str):
        yield path
    elif isinstance(part, dict | list):
        for key, value in part.items() if isinstance(part, dict) else enumerate(part):
            yield from texts(value, (*path, key))


def put(raw: Any, path: tuple, text: str) -> str:
    """Put a text into a file; what stood there."""
    for key in path[:-1]:
        raw = raw[key]
    old, raw[path[-1]] = raw[path[-1]], text
    return old


@pytest.fixture(scope="module")
def hostile() -> tuple[dict[str, Any], set[str]]:
    """The file with everything in it, hostile text wherever it may stand, and the names of those fields."""
    text = SAVED.read_text(encoding="utf-8")
    season = json.loads(text)["season"]
    # the name of a season stands in several places, which have to agree
    old, new = (json.dumps(name, ensure_ascii=False) for name in (season, SEASON))
    raw = json.loads(text.replace(old, new))
    # what only takes time and has no text
    del raw["holds"]
    raw["tolerances"] = dict(list(raw["tolerances"].items())[:1])
    for part in (raw, *(option["scenario"] for option in raw["options"])):
        if part.get("sweep"):
            part["sweep"] |= {"points": 5}
    read_scenario(json.dumps(raw))
    fields = set()
    for path in list(texts(raw)):
        old = put(raw, path, HOSTILE)
        try:
            read_scenario(json.dumps(raw))
        except ScenarioError:
            put(raw, path, old)
        else:
            fields.add(next(str(key) for key in reversed(path) if isinstance(key, str)))
    return raw, fields


class Page(HTMLParser):
    """Tags and attributes of a page, and its text."""

    def __init__(self, page: str) -> None:
        super().__init__(convert_charrefs=True)
        self.classes: set[str] = set()
        self.attributes: set[str] = set()
        self.words: list[str] = []
        self.feed(page)

    def handle_starttag(self, tag: str, attrs: list[tuple[str, str | None]]) -> None:
        self.attributes |= {name for name, _ in attrs}
        self.classes |= set((dict(attrs).get("class") or "").split())

    def handle_data(self, data: str) -> None:
        self.words.append(data)


def test_the_fields_that_take_any_text_are_known(hostile: tuple[dict[str, Any], set[str]]) -> None:
    """A field of free text is looked at below, whatever it is called; these at least are among them."""
    fields = hostile[1]
    assert {"title", "note", "name", "basis", "lab"} <= fields


def test_a_report_shows_it_as_text(hostile: tuple[dict[str, Any], set[str]]) -> None:
    """No element and no attribute comes of it, and the words are there."""
    page = Page(report_html(read_scenario(json.dumps(hostile[0]))))
    assert "inj" not in page.classes
    assert not [name for name in page.attributes if name.startswith("on")]
    assert any(HOSTILE in words for words in page.words)
    assert any(SEASON[:12] in words for words in page.words)


def test_a_table_for_a_spreadsheet_has_no_formula(hostile: tuple[dict[str, Any], set[str]]) -> None:
    """Nothing that begins as a formula stands at the beginning of a cell."""
    made = csv_text(sweep(read_scenario(json.dumps(hostile[0]))).table(["ph"]))
    assert not re.search(r'(^|,)"?[=+@]', made, re.MULTILINE)
    assert csv_text([[HOSTILE]]).lstrip('"').startswith("'=")


@pytest.mark.browser
def test_the_page_shows_it_as_text(
    hostile: tuple[dict[str, Any], set[str]], browser: Any, tmp_path: Path
) -> None:
    """All views, menus, the meeting view and a look at the plots: nothing runs, no element comes of it."""
    path = tmp_path / "=1+1<img class=inj src=x onerror=alert(1)>.json"
    path.write_text(json.dumps(hostile[0]), encoding="utf-8")
    with running(path) as url:
        context = browser.new_context(viewport={"width": 1280, "height": 720})
        screen = Screen(context.new_page(), url)
        screen.page.on("dialog", lambda dialog: screen.errors.append(f"dialog {dialog.message}"))
        page = screen.page
        page.goto(url)
        screen.until(lambda: "img class=inj" in page.title(), "the opened file")
        for name in VIEWS:
            page.get_by_role("tab", name=name, exact=True).click()
            page.wait_for_timeout(700)
            for button in page.locator("main button[popovertarget], #bar button[popovertarget]").all():
                if button.is_visible() and button.is_enabled():
                    button.click()
                    page.keyboard.press("Escape")
            for x, y in ((600, 450), (700, 500), (1000, 450)):
                page.mouse.move(x, y)
            assert page.evaluate("window.__xss") is None
            assert page.locator(".inj").count() == 0, name
        page.get_by_role("button", name="Meeting view").click()
        page.wait_for_timeout(700)
        assert page.evaluate("window.__xss") is None
        assert page.locator(".inj").count() == 0
        assert screen.foreign == [] and screen.errors == []
        context.close()
