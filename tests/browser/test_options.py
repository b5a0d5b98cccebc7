"""Options and seasons in a browser: kept, compared, gone back to, the way a person does it in a meeting."""

from typing import Any

import pytest

pytestmark = pytest.mark.browser


def share(screen: Any) -> Any:
    return screen.page.get_by_role("textbox", name="Share of Granite Wellfield")


def enter(field: Any, text: str) -> None:
    field.fill(text)
    field.press("Enter")


def test_option_is_kept_compared_and_returned_to(screen: Any) -> None:
    """Keep, turn, read the difference, go back; the chosen option is still chosen after a reload."""
    page = screen.page
    page.get_by_role("button", name="Keep as option").click()
    enter(page.get_by_role("textbox", name="Name of the option"), "Base")
    page.get_by_role("button", name="Compare with A Base").wait_for()
    enter(share(screen), "15")
    change = page.locator(".tile[aria-label^='pH'] .change")
    screen.until(lambda: change.inner_text().startswith("+"), "a difference to the option")
    page.on("dialog", lambda dialog: dialog.accept())
    page.reload()
    screen.drawn()
    assert page.get_by_role("button", name="Compare with A Base").get_attribute("aria-pressed") == "true"
    page.get_by_role("button", name="More for option A Base").click()
    page.get_by_role("menuitem", name="Go back to A Base").click()
    screen.until(lambda: share(screen).input_value().startswith("40"), "the kept share")


def test_escape_takes_back_the_question_for_a_name(screen: Any) -> None:
    """Nothing is kept and the chip is there again."""
    page = screen.page
    page.get_by_role("button", name="Keep as option").click()
    page.get_by_role("textbox", name="Name of the option").press("Escape")
    page.get_by_role("button", name="Keep as option").wait_for()
    assert page.get_by_role("button", name="Compare with A").count() == 0


def test_season_is_added_and_removed_after_a_question(screen: Any) -> None:
    """A season starts as a copy; its removal has to be confirmed."""
    page = screen.page
    page.get_by_role("button", name="More for the seasons").click()
    page.get_by_role("menuitem", name="Add a season like winter").click()
    enter(page.get_by_role("textbox", name="Name of the new season"), "spring")
    # More than two seasons give way to a list where the bar is narrow.
    seasons = page.get_by_role("combobox", name="Season")
    screen.until(lambda: seasons.count() and seasons.input_value() == "spring", "the new season")
    page.get_by_role("button", name="More for the seasons").click()
    page.get_by_role("menuitem", name="Remove spring").click()
    page.get_by_role("button", name="Remove", exact=True).click()
    page.get_by_role("button", name="winter", exact=True).wait_for()
    assert page.get_by_text("spring").count() == 0
