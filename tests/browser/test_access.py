"""The page for keyboards and screen readers, in every view."""

import itertools
from typing import Any

import pytest

pytestmark = pytest.mark.browser

_ALL = """
const all = (root) => [...root.querySelectorAll("*")].flatMap((element) =>
  [element, ...(element.shadowRoot ? all(element.shadowRoot) : [])])
"""

_NAMELESS = f"""() => {{
  {_ALL}
  const named = (element) => element.getAttribute("aria-label")?.trim() || element.title?.trim()
    || element.textContent.trim() || [...element.labels ?? []].some((label) => label.textContent.trim())
  return all(document).filter((element) => element.matches("button, input, select, textarea, summary")
    && element.checkVisibility() && element.type !== "hidden" && !named(element)).map((one) => one.outerHTML)
}}"""

_HEADINGS = f"""() => {{
  {_ALL}
  return all(document).filter((one) => /^H[1-6]$/.test(one.tagName) && one.checkVisibility())
    .map((one) => Number(one.tagName[1]))
}}"""

_FOCUS = """() => {
  let at = document.activeElement
  while (at?.shadowRoot?.activeElement) at = at.shadowRoot.activeElement
  if (!at || at === document.body) return null
  const style = getComputedStyle(at)
  // a slider marks its handle, whose style no script can read
  const seen = at.type === "range" || style.outlineStyle !== "none" || style.boxShadow !== "none"
  return { tag: at.tagName, name: at.getAttribute("aria-label") ?? at.textContent.slice(0, 40), seen }
}"""

VIEWS = ("Sweep", "Window", "Tolerance", "Titration", "Compare", "Ledger", "Basis")


def open_view(screen: Any, name: str) -> None:
    screen.page.get_by_role("tab", name=name, exact=True).click()
    screen.page.wait_for_timeout(1500)


def test_every_control_of_every_view_has_a_name(screen: Any) -> None:
    """What can be pressed or typed in is called something."""
    for view in VIEWS:
        open_view(screen, view)
        assert screen.page.evaluate(_NAMELESS) == [], view


def test_headings_go_down_one_level_at_a_time(screen: Any) -> None:
    """One first-level heading, and no level is passed over."""
    for view in VIEWS:
        open_view(screen, view)
        levels = screen.page.evaluate(_HEADINGS)
        assert levels.count(1) == 1, view
        assert all(later - earlier <= 1 for earlier, later in itertools.pairwise(levels)), view


def test_every_control_is_reached_by_tab_and_shows_its_focus(screen: Any) -> None:
    """From the top bar through the rail to tiles and views, each with a mark around it."""
    page, met = screen.page, []
    page.locator("body").click(position={"x": 2, "y": 2})
    for _ in range(80):
        page.keyboard.press("Tab")
        focus = page.evaluate(_FOCUS)
        if focus is None:
            break
        met.append(focus)
    unseen = [focus["name"] for focus in met if not focus["seen"] and focus["tag"] != "CANVAS"]
    assert unseen == []
    names = " | ".join(str(focus["name"]) for focus in met)
    for wanted in ("Open", "Share of Granite Wellfield", "Sweep"):
        assert wanted in names
