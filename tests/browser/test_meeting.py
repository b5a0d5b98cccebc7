"""The meeting view in a browser: large, complete on one screen, and left with Esc."""

from collections.abc import Callable
from typing import Any

import pytest

pytestmark = pytest.mark.browser

SIZE = "(e) => parseFloat(getComputedStyle(e).fontSize) * (e.currentCSSZoom ?? 1)"


@pytest.mark.parametrize(("width", "height"), [(1280, 720), (1920, 1080)])
def test_meeting_view_is_large_and_fits_the_screen(
    new_screen: Callable[..., Any], width: int, height: int
) -> None:
    """Type is 1.4 times as large, nothing overflows, and the plot has room."""
    screen = new_screen(viewport={"width": width, "height": height})
    page = screen.page
    before = {part: page.locator(part).first.evaluate(SIZE) for part in (".tile .value", ".finding")}
    page.get_by_role("button", name="Meeting view").click()
    page.get_by_role("button", name="Leave meeting view").wait_for()
    for part, size in before.items():
        assert page.locator(part).first.evaluate(SIZE) >= 1.4 * size
    assert not page.locator("#rail").is_visible()
    screen.until(lambda: screen.frame("ph")["height"] >= 0.2 * height, "a large plot")
    assert page.evaluate("document.documentElement.scrollWidth") <= width
    main = page.locator("#main")
    assert main.evaluate("e => e.scrollHeight <= e.clientHeight + 1")
    screen.until(
        lambda: "winter · 6.8 °C" in page.locator("#strip .now").inner_text(), "season and temperature"
    )


def test_dials_on_the_strip_and_in_the_large_plot(screen: Any) -> None:
    """A drag in the enlarged plot ends where the pointer is; Esc leads back to the desk."""
    page = screen.page
    page.get_by_role("button", name="Meeting view").click()
    page.get_by_role("button", name="Show the plot of Buffer").click()
    screen.until(lambda: screen.frame("buffer")["height"] > 130, "the large plot")
    page.wait_for_timeout(300)
    screen.drag("buffer", 0.4, 0.7)
    share = page.locator("#strip").get_by_role("textbox", name="Share of Granite Wellfield")
    screen.until(lambda: share.input_value().startswith("70"), "70 % of the well")
    share.fill("20")
    share.press("Enter")
    page.locator("#strip").get_by_title("Add a dial to the strip").click()
    page.get_by_placeholder("Search dials").last.wait_for()
    page.keyboard.type("dose")
    page.keyboard.press("Enter")
    page.locator("#strip").get_by_role("slider", name="Dose of Sodium hypochlorite").wait_for()
    page.locator("#main").focus()
    page.keyboard.press("Escape")
    page.locator("#rail").wait_for()
    assert (
        page.locator("#rail").get_by_role("textbox", name="Share of Granite Wellfield").input_value()
        == "20.0"
    )
