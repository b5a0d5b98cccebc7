"""Targets in a browser: a tile opens, its bounds are typed, the verdict follows."""

from typing import Any

import pytest

pytestmark = pytest.mark.browser


def test_target_is_entered_on_a_tile_by_keyboard(screen: Any) -> None:
    """Enter opens the form; it stays open while bounds are typed; a wrong one is refused beside its field."""
    page = screen.page
    page.locator(".tile[aria-label^='Buffer'] .edit").press("Enter")
    low = page.get_by_role("textbox", name="Lowest Buffer intensity")
    low.fill("0.7")
    low.press("Enter")
    screen.until(lambda: "of 4 entered" in page.locator(".finding").inner_text(), "the fourth target")
    assert "▼ below" in page.locator(".tile[aria-label^='Buffer']").inner_text()
    high = page.get_by_role("textbox", name="Highest Buffer intensity")
    high.fill("0.1")
    high.press("Enter")
    page.get_by_text("lowest 0.7 is above highest 0.1").wait_for()
    page.keyboard.press("Escape")
    screen.until(lambda: not low.is_visible(), "the form to close")
    page.get_by_role("button", name="Undo").click()
    screen.until(lambda: "of 3 entered" in page.locator(".finding").inner_text(), "three targets again")
