"""From nothing to a scenario of one's own: the path that the README describes, press by press."""

from pathlib import Path
from typing import Any

import pytest

pytest.importorskip("playwright.sync_api")
from playwright.sync_api import expect

from explorer.scenario.evaluate import evaluate
from explorer.scenario.files import open_scenario

expect.set_options(timeout=15_000)

pytestmark = pytest.mark.browser

FIELDS = {
    "Temperature, °C": "temperature",
    "pH": "ph",
    "Alkalinity, mg/L as CaCO3": "alkalinity",
    "Calcium, mg/L": "calcium",
}


class Hand:
    """A person at the page; ``presses`` counts clicks, fields entered and texts typed."""

    def __init__(self, page: Any) -> None:
        self.page, self.presses = page, 0

    def press(self, role: str, name: str, exact: bool = True) -> None:
        self.page.get_by_role(role, name=name, exact=exact).locator("visible=true").first.click()
        self.presses += 1

    def enter(self, name: str, text: str) -> None:
        field = self.page.get_by_role("textbox", name=name, exact=True).locator("visible=true")
        field.fill(text)
        field.press("Enter")
        self.presses += 1

    def analysis(self, *values: str) -> None:
        for name, value in zip(FIELDS, values, strict=True):
            self.enter(name, value)


def test_two_waters_and_a_dose_are_entered_and_saved(screen: Any, tmp_path: Path) -> None:
    """Eighteen presses; the file that is saved gives the result that was on the screen."""
    page, hand = screen.page, Hand(screen.page)
    hand.press("button", "Examples")
    hand.press("button", "New scenario", exact=False)
    expect(page.get_by_role("textbox", name="pH", exact=True)).to_be_visible()
    hand.enter("Title of the scenario", "Hill and plain")
    hand.analysis("8", "7.8", "60", "22")

    hand.press("button", "+ Add a source water")
    hand.press("button", "A new water", exact=False)
    expect(page.get_by_role("textbox", name="Share of New water")).to_have_count(2)
    hand.analysis("12", "7.3", "240", "95")
    page.get_by_role("textbox", name="Share of New water").nth(1).fill("30")
    page.keyboard.press("Enter")
    hand.presses += 1
    expect(page.get_by_role("textbox", name="Share of New water").first).to_have_value("70.0")

    hand.press("button", "+ Add a treatment step")
    page.keyboard.type("naoh")
    page.keyboard.press("Enter")
    hand.presses += 1
    hand.enter("Dose of Sodium hydroxide, mg/L", "5")
    expect(page.locator("#rail .flow")).to_contain_text("alk +6.3")
    with page.expect_download() as arriving:
        hand.press("button", "Save")
    path = tmp_path / arriving.value.suggested_filename
    arriving.value.save_as(path)

    assert path.name == "hill-and-plain.json"
    scenario = open_scenario(path)
    first, second = (water.analyses["all year"].entries for water in scenario.waters)
    assert [first[key].value for key in FIELDS.values()] == [8, 7.8, 60, 22]
    assert [second[key].value for key in FIELDS.values()] == [12, 7.3, 240, 95]
    assert [water.share for water in scenario.waters] == [70, 30]
    assert screen.tile("pH") == f"{float(evaluate(scenario).readout('ph')):.2f}"
    assert hand.presses == 18
