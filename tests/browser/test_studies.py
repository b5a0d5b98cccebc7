"""Tabs, window, tolerances and band in a real browser."""

import re
from collections.abc import Callable
from importlib import import_module
from typing import Any

import pytest

pytestmark = pytest.mark.browser

COLUMNS = """
([figure, glyph, column]) => {
  for (const model of Bokeh.documents[0]._all_models.values())
    if (model.name === figure && model.type === "Figure")
      for (const renderer of model.renderers)
        if (renderer.glyph?.type === glyph && renderer.visible && column in renderer.data_source.data)
          { const found = Array.from(renderer.data_source.data[column]); if (found.length) return found }
  return []
}
"""
TIP = """() => {
  for (const model of Bokeh.documents[0]._all_models.values())
    if (model.type === "ColumnDataSource" && model.data.anchor) return model.data.text[0] ?? ""
  return ""
}"""


def column(screen: Any, figure: str, glyph: str, name: str) -> list[Any]:
    """A column behind a glyph of a plot, as the page has it; empty where there is none."""
    return screen.page.evaluate(COLUMNS, [figure, glyph, name])


def tip(screen: Any) -> str:
    """What is said at the pointer on the map."""
    return screen.page.evaluate(TIP)


LOCATION = """() => {
  for (const model of Bokeh.documents[0]._all_models.values())
    if (model.type === "Span" && model.editable) return model.location
}"""


def location(screen: Any) -> float:
    """Where the operating point stands on the x axis."""
    return screen.page.evaluate(LOCATION)


def tab(screen: Any, title: str) -> Any:
    return screen.page.get_by_role("tab", name=title, exact=True)


def share(screen: Any) -> Any:
    return screen.page.get_by_role("textbox", name=re.compile("^Share of Granite Wellfield"))


def mapped(screen: Any) -> None:
    """Wait until the map of the shipped demo is drawn to its end."""
    screen.until(lambda: len(column(screen, "window", "MultiPolygons", "hatch")) == 2, "two regions")
    screen.until(lambda: (screen.frame("window") or {}).get("height", 0) >= 90, "room for the map")


# ---- tabs ----------------------------------------------------------------------------------------------


def test_tabs_are_reached_by_mouse_and_arrow_keys(screen: Any) -> None:
    """One view is seen at a time; End goes to the last tab, the right arrow from there to the first."""
    page = screen.page
    tabs, dial = page.get_by_role("tab"), page.get_by_title("The dial along the x axis")
    assert page.get_by_role("tablist", name="Views").count() == 1
    assert tabs.first.get_attribute("aria-selected") == "true"
    tab(screen, "Window").click()
    mapped(screen)
    assert not dial.is_visible()
    tabs.nth(1).press("End")
    screen.until(lambda: tabs.last.get_attribute("aria-selected") == "true", "the last tab")
    page.keyboard.press("ArrowRight")
    screen.until(lambda: tabs.first.get_attribute("aria-selected") == "true", "the first tab")
    screen.until(dial.is_visible, "the sweep again")


def test_open_view_is_there_again_after_a_reload(screen: Any) -> None:
    """As the working copy is."""
    tab(screen, "Window").click()
    mapped(screen)
    screen.page.reload()
    screen.page.wait_for_function("window.Bokeh?.documents?.[0]?.is_idle")
    mapped(screen)
    assert tab(screen, "Window").get_attribute("aria-selected") == "true"


def test_closed_view_is_sent_nothing(screen: Any) -> None:
    """Curves of the sweep stay as they were while another view is open."""
    before = screen.curves("ph")
    tab(screen, "Ledger").click()
    summer = screen.page.get_by_role("button", name="summer", exact=True)
    summer.click()
    screen.until(lambda: summer.get_attribute("aria-pressed") == "true", "summer")
    screen.page.wait_for_timeout(500)
    assert screen.curves("ph") == before
    tab(screen, "Sweep").click()
    screen.until(lambda: screen.curves("ph") != before, "the curves of summer")


def test_tabs_may_be_changed_faster_than_views_are_filled(screen: Any) -> None:
    """The last one is the one that stays, and nothing is left behind in the console."""
    for title in ("Window", "Tolerance", "Window", "Sweep", "Tolerance", "Sweep", "Window"):
        tab(screen, title).click()
        screen.page.wait_for_timeout(60)
    mapped(screen)
    assert tab(screen, "Window").get_attribute("aria-selected") == "true"


# ---- window --------------------------------------------------------------------------------------------


def test_click_on_the_map_sets_both_dials_and_one_undo_brings_them_back(screen: Any) -> None:
    """The mark moves to the place; tiles and verdict follow."""
    page = screen.page
    tab(screen, "Window").click()
    mapped(screen)
    dose = page.get_by_role("textbox", name="Dose of Sodium hypochlorite")
    page.mouse.click(*screen.point_at("window", 0.1, 0.5))
    screen.until(lambda: share(screen).input_value().startswith("10"), "10 % of the well")
    screen.until(lambda: dose.input_value().startswith("1.5"), "half of the doses")
    screen.until(lambda: "Meets all" in page.locator(".finding").inner_text(), "a verdict of the clear part")
    undo = page.get_by_role("button", name="Undo")
    undo.click()
    screen.until(lambda: share(screen).input_value().startswith("40"), "40 % again")
    screen.until(lambda: dose.input_value().startswith("1.2"), "the old dose")
    assert undo.is_disabled()


def test_pointer_over_the_map_tells_values_and_the_missed_target(screen: Any) -> None:
    """Without asking the server; away from the map it says nothing."""
    page, sent = screen.page, []
    page.on("websocket", lambda socket: socket.on("framesent", lambda frame: sent.append(frame)))
    screen.open()
    tab(screen, "Window").click()
    mapped(screen)
    page.wait_for_timeout(1500)
    sent.clear()
    page.mouse.move(*screen.point_at("window", 0.4, 0.4))
    screen.until(lambda: "missed first: CaCO₃ potential" in tip(screen), "what is missed")
    assert "CaCO₃ potential: −8." in tip(screen) and "▼ below" in tip(screen)
    page.mouse.move(*screen.point_at("window", 0.05, 0.4))
    screen.until(lambda: "all targets met" in tip(screen), "the clear part")
    page.mouse.move(5, 5)
    screen.until(lambda: tip(screen) == "", "silence")
    assert sent == []


def test_another_dial_range_and_readout_make_another_map(screen: Any) -> None:
    """The axes are named after the dials; a wrong range is refused beside its field."""
    page = screen.page
    tab(screen, "Window").click()
    mapped(screen)
    up = page.get_by_title("The dial up the map")
    up.click()
    page.keyboard.type("ph granite")
    page.keyboard.press("Enter")
    screen.until(lambda: "pH of Granite Wellfield" in up.inner_text(), "another dial")
    page.get_by_title("Choose what the contours are of").click()
    page.keyboard.type("alkalinity")
    page.keyboard.press("Enter")
    legend = page.locator(".legend .marks")
    screen.until(lambda: "Alkalinity" in legend.inner_text(), "other contours")
    stop = page.get_by_role("textbox", name="To, end of the map across")
    stop.fill("far")
    stop.press("Enter")
    screen.until(lambda: page.get_by_text("“far” is not a number").count() == 1, "the refusal")


# ---- tolerances ----------------------------------------------------------------------------------------


def test_tolerance_view_brings_fan_chances_extremes_and_ranking(screen: Any) -> None:
    """Coarse at once, then everything."""
    page = screen.page
    tab(screen, "Tolerance").click()
    screen.until(lambda: len(column(screen, "fan", "Patches", "xs")) == 2, "a fan")
    screen.until(lambda: len(column(screen, "distribution", "Quad", "top")) > 5, "a distribution")
    assert page.get_by_text("All entered targets are met in").count() == 1
    screen.until(lambda: page.get_by_text("narrows that by").count() == 1, "the ranking")
    assert page.get_by_text("everything at its worst, here").count() == 1


def test_stop_ends_the_survey_and_it_can_go_on(screen: Any) -> None:
    """What was shown stands; going on begins anew."""
    page = screen.page
    tab(screen, "Tolerance").click()
    page.get_by_label("Samples").select_option("8192")
    stop = page.get_by_role("button", name="Stop", exact=True)
    stop.wait_for()
    assert page.get_by_role("progressbar").count() == 1
    stop.click()
    page.get_by_text("Stopped.").wait_for()
    screen.until(lambda: len(column(screen, "fan", "Patches", "xs")) == 2, "the fan that was shown")
    page.get_by_role("button", name="Go on").click()
    screen.until(lambda: page.get_by_text("Stopped.").count() == 0, "going on")
    stop.wait_for()


def test_tolerance_is_edited_in_its_table(screen: Any) -> None:
    """Typed like any number; what cannot be read is refused beside the field."""
    page = screen.page
    tab(screen, "Tolerance").click()
    page.get_by_role("button", name="The tolerances themselves").click()
    width = page.get_by_role("textbox", name="Half-width, pH of Granite Wellfield")
    width.fill("much")
    width.press("Enter")
    screen.until(lambda: page.get_by_text("“much” is not a number").count() == 1, "the refusal")
    width.fill("0,02")
    width.press("Enter")
    screen.until(lambda: width.input_value() == "0.02", "the new width")
    page.get_by_text("● not saved").wait_for()
    page.get_by_role("button", name="What the tolerances do").click()
    screen.until(lambda: len(column(screen, "fan", "Patches", "xs")) == 2, "a fan")


@pytest.mark.parametrize(("width", "height"), [(820, 1180), (1280, 720), (1920, 1080)])
def test_window_and_tolerances_do_not_overflow_sideways(
    new_screen: Callable[..., Any], width: int, height: int
) -> None:
    """They fit a tablet and a meeting room, and the plots have height."""
    screen = new_screen(viewport={"width": width, "height": height})
    for title, plot in (("Window", "window"), ("Tolerance", "fan")):
        tab(screen, title).click()
        screen.until(lambda plot=plot: (screen.frame(plot) or {}).get("height", 0) >= 90, f"the {plot} plot")
        assert screen.page.evaluate("document.documentElement.scrollWidth") <= width


# ---- band ----------------------------------------------------------------------------------------------


def test_band_lies_around_the_curves_and_can_be_switched_off(screen: Any) -> None:
    """It comes by itself after the page."""
    for plot in ("ph", "buffer", "chosen"):
        screen.until(lambda plot=plot: len(column(screen, plot, "Patches", "xs")) == 1, f"a band in {plot}")
    screen.page.get_by_label("Band of outcomes around the curves").select_option("0")
    screen.until(lambda: column(screen, "ph", "Patches", "xs") == [], "no band")


def test_view_that_another_page_opened_first_opens_here_too(new_screen: Callable[..., Any]) -> None:
    """Both pages were loaded before either opened it."""
    first, second = new_screen(), new_screen()
    for screen in (second, first):
        tab(screen, "Window").click()
        mapped(screen)


# ---- left and come back to ---------------------------------------------------------------------------------


@pytest.mark.parametrize(
    ("title", "there"),
    [
        ("Window", lambda screen: len(column(screen, "window", "MultiPolygons", "hatch")) == 2),
        ("Titration", lambda screen: screen.curves("titration-ph")),
        ("Compare", lambda screen: screen.curves("overlay")),
        ("Basis", lambda screen: screen.page.get_by_text("Data and charge balance").count() == 1),
    ],
)
def test_study_that_is_come_back_to_is_not_calculated_again(
    screen: Any,
    title: str,
    there: Callable[[Any], Any],
    monkeypatch: pytest.MonkeyPatch,
) -> None:
    """What it showed stands at once; in another season it is calculated anew."""
    runs: list[str] = []
    counted(monkeypatch, runs)
    tab(screen, title).click()
    screen.until(lambda: there(screen), "the study")
    screen.page.wait_for_timeout(800)
    before = len(runs)
    assert before > 0
    for _ in range(2):
        tab(screen, "Ledger").click()
        screen.page.get_by_text("The lines add up").wait_for()
        tab(screen, title).click()
        screen.until(lambda: there(screen), "the study as it was")
    screen.page.wait_for_timeout(900)
    assert len(runs) == before
    tab(screen, "Ledger").click()
    summer = screen.page.get_by_role("button", name="summer", exact=True)
    summer.click()
    screen.until(lambda: summer.get_attribute("aria-pressed") == "true", "summer")
    tab(screen, title).click()
    screen.until(lambda: len(runs) > before, "a new calculation")
    screen.until(lambda: there(screen), "the study of the summer")


def counted(monkeypatch: pytest.MonkeyPatch, runs: list[str]) -> None:
    """Note every calculation of a study that a view begins."""
    for module, name in (
        ("window_view", "window"),
        ("titration_view", "worked_out"),
        ("compare_view", "compare"),
        ("basis_view", "gathered"),
    ):
        place = import_module(f"explorer.app.{module}")
        monkeypatch.setattr(place, name, noting(getattr(place, name), runs))


def noting(original: Callable[..., Any], runs: list[str]) -> Callable[..., Any]:
    """The same function, which notes that it was called."""

    def noted(*arguments: Any, **more: Any) -> Any:
        runs.append(original.__name__)
        return original(*arguments, **more)

    return noted


# ---- holds -------------------------------------------------------------------------------------------------


def test_share_is_held_seen_and_released(screen: Any) -> None:
    """The mark beside the dial opens the form; held, the dial is at rest and the plots stay with it."""
    page = screen.page
    page.get_by_role("button", name="Hold a readout with this dial: Share of Granite Wellfield").click()
    held = page.get_by_role("textbox", name="Held calcium carbonate precipitation potential")
    held.fill("much")
    held.press("Enter")
    screen.until(lambda: page.get_by_text("“much” is not a number").count() == 1, "the refusal")
    page.get_by_role("button", name="Hold", exact=True).click()
    screen.until(lambda: page.get_by_text("a field above has to be mended first").count() == 1, "no hold yet")
    held.fill("-7")
    held.press("Enter")
    page.get_by_role("button", name="Hold", exact=True).click()
    page.get_by_text("holds CCPP −7.0").wait_for()
    screen.until(lambda: screen.tile("Calcium carbonate") == "−7.0", "the held potential")
    assert share(screen).is_disabled()
    part = float(share(screen).input_value()) / 100
    place = location(screen)
    assert place == pytest.approx(100 * part, abs=0.01)
    screen.drag("ph", part, 0.8)
    page.get_by_text("release the hold to set it by hand").wait_for()
    screen.until(lambda: location(screen) == pytest.approx(place, abs=0.01), "the point back in its place")
    page.get_by_role("button", name="This dial holds CCPP").click()
    page.get_by_role("button", name="Release").click()
    screen.until(lambda: not share(screen).is_disabled(), "the dial by hand")
    assert float(share(screen).input_value()) == pytest.approx(100 * part, abs=0.01)
    page.get_by_role("button", name="Undo").click()
    page.get_by_text("holds CCPP −7.0").wait_for()
    page.get_by_role("button", name="Undo").click()
    screen.until(lambda: share(screen).input_value().startswith("40"), "the share as it was")
    assert page.get_by_text("holds CCPP").count() == 0


def test_dose_and_share_are_held_by_the_same_form(screen: Any) -> None:
    """Both together; what cannot be reached is told with the best that can; the basis lists both."""
    page = screen.page
    for dial, value in (("Share of Granite Wellfield", "-6"), ("Dose of Sodium hypochlorite", "9.5")):
        page.get_by_role("button", name=f"Hold a readout with this dial: {dial}").click()
        held = page.get_by_role("textbox", name=re.compile("^Held "))
        held.fill(value)
        held.press("Enter")
        page.get_by_role("button", name="Hold", exact=True).click()
        page.get_by_role("button", name="Hold", exact=True).wait_for(state="detached")
    page.get_by_text("▲ cannot be reached").first.wait_for()
    assert page.get_by_role("textbox", name=re.compile("^Dose of Sodium hypochlorite")).is_disabled()
    tab(screen, "Basis").click()
    table = page.get_by_role("region", name="Holds: what is computed, and what it holds")
    table.wait_for()
    rows = table.get_by_role("row").all_inner_texts()
    assert any("Dose of Sodium hypochlorite" in row and "pH 9.50" in row for row in rows)
    assert any("Share of Granite Wellfield" in row and "−6.0 mg/L as CaCO3" in row for row in rows)


# ---- tolerances that are more than a half-width ------------------------------------------------------------


def test_distribution_sides_unit_and_common_cause_are_entered_in_the_table(screen: Any) -> None:
    """Each in its column; the picture follows; errors that move others say so."""
    page = screen.page
    tab(screen, "Tolerance").click()
    page.get_by_role("button", name="The tolerances themselves").click()
    line = page.get_by_role("row", name="pH of Granite Wellfield")
    line.get_by_label("Distribution").select_option("normal")
    line.get_by_label("One or both sides").select_option("sides")
    upwards = line.get_by_role("textbox", name="Width upwards")
    upwards.fill("0.3")
    upwards.press("Enter")
    line.get_by_label("Unit").select_option("%")
    screen.until(lambda: upwards.input_value().startswith("4.1"), "the widths in percent of 7.25")
    for label in ("pH of Granite Wellfield", "pH of Fern River"):
        word = page.get_by_role("textbox", name=f"Together as, {label}")
        word.fill("one meter")
        word.press("Enter")
    screen.until(lambda: page.get_by_text("moves along: pH of Fern River").count() == 1, "the common cause")
    adder = page.get_by_role("button", name="+ Add a dial")
    adder.click()
    page.keyboard.type("flow of the blend")
    page.keyboard.press("Enter")
    moved = page.get_by_role("row", name="Flow of the blend").get_by_text("moves along: dose of Sodium")
    moved.wait_for()
    page.get_by_role("button", name="What the tolerances do").click()
    screen.until(lambda: len(column(screen, "fan", "Patches", "xs")) == 2, "a fan")
    asked = page.get_by_role("textbox", name="How near ")
    asked.fill("0.5")
    asked.press("Enter")
    screen.until(lambda: page.get_by_text("(now −8.5)").count() == 1, "how far a dial may be off")
