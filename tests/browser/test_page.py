"""The page in a real browser: what is seen, turned, opened and saved."""

import json
from collections.abc import Callable
from pathlib import Path
from typing import Any

import pytest

from explorer.scenario.shipped import shipped

pytestmark = pytest.mark.browser


def enter(field: Any, text: str) -> None:
    field.fill(text)
    field.press("Enter")


def share(screen: Any, water: str) -> Any:
    return screen.page.get_by_role("textbox", name=f"Share of {water}")


def test_page_shows_title_tiles_verdict_and_four_plots(screen: Any) -> None:
    """The shipped demo is there with all its parts, without errors and without a request to elsewhere."""
    page = screen.page
    assert (
        page.get_by_role("textbox", name="Title of the scenario").input_value()
        == "Amber: river and wellfield"
    )
    assert page.locator(".tile").count() == 7
    assert "entered targets" in page.locator(".finding").inner_text()
    assert page.get_by_role("img").count() == 4
    assert page.title() == "Amber: river and wellfield – Blendwright"
    assert "closed to air" in page.locator("p.foot").inner_text()


def test_turning_a_share_moves_point_and_tiles_but_not_the_curve_over_it(screen: Any) -> None:
    """The swept share moves along the curve; what depends on it follows."""
    before, curve = screen.tile("pH"), screen.curves("ph")
    share(screen, "Granite Wellfield").fill("20")
    share(screen, "Granite Wellfield").press("Enter")
    screen.until(lambda: screen.tile("pH") != before, "another pH")
    assert screen.curves("ph") == curve
    assert screen.page.get_by_text("● not saved").is_visible()


def test_season_changes_the_curves(screen: Any) -> None:
    """Another season has other analyses, so all curves are new."""
    before = {plot: screen.curves(plot) for plot in ("ph", "species", "buffer", "chosen")}
    screen.page.get_by_role("button", name="summer").click()
    for plot, curve in before.items():
        screen.until(lambda plot=plot, curve=curve: screen.curves(plot) != curve, f"another curve in {plot}")


def test_dragging_in_one_plot_turns_the_dial_for_all(screen: Any) -> None:
    """The operating point follows the drag; the dial stands at the nearest step; one undo brings all back."""
    before = screen.tile("pH")
    screen.drag("buffer", 0.40, 0.75)
    screen.until(
        lambda: share(screen, "Granite Wellfield").input_value().startswith("75"), "75 % of the well"
    )
    screen.until(lambda: screen.tile("pH") != before, "another pH")
    screen.page.get_by_role("button", name="Undo").click()
    screen.until(lambda: share(screen, "Granite Wellfield").input_value().startswith("40"), "40 % again")
    screen.until(lambda: screen.tile("pH") == before, "the old pH")
    assert screen.page.get_by_role("button", name="Undo").is_disabled()


def test_tapping_a_plot_sets_the_dial(screen: Any) -> None:
    """A click is a drag of no length."""
    screen.page.mouse.click(*screen.point_at("chosen", 0.1))
    screen.until(
        lambda: share(screen, "Granite Wellfield").input_value().startswith("10"), "10 % of the well"
    )


def test_pointer_over_a_plot_sends_nothing(screen: Any) -> None:
    """Values under the pointer appear in all plots without asking the server."""
    page, sent = screen.page, []
    page.on("websocket", lambda socket: socket.on("framesent", lambda frame: sent.append(frame)))
    screen.open()
    page.wait_for_timeout(1200)
    sent.clear()
    labels = """() => [...Bokeh.documents[0]._all_models.values()]
        .filter((m) => m.type === "ColumnDataSource" && m.data.align && m.data.colour && m.data.text.length)
        .map((m) => Array.from(m.data.text)).flat()"""
    at_rest = page.evaluate(labels)
    for part in (0.2, 0.3, 0.4):
        page.mouse.move(*screen.point_at("ph", part))
        page.wait_for_timeout(80)
    over = page.evaluate(labels)
    assert len(over) > len(at_rest)
    assert sum(text.endswith(" %") and text[0].isdigit() for text in over) == 4
    assert sent == []


def test_another_dial_and_range_on_x(screen: Any) -> None:
    """Any dial can be swept; its range is typed, and a wrong range is refused beside the field."""
    page, before = screen.page, screen.curves("ph")
    page.get_by_title("The dial along the x axis").click()
    page.get_by_placeholder("Search dials").fill("temperature granite")
    page.keyboard.press("Enter")
    screen.until(lambda: screen.curves("ph") != before, "curves over another dial")
    assert "Temperature of Granite Wellfield" in page.get_by_title("The dial along the x axis").inner_text()
    stop = page.get_by_role("textbox", name="To, end of the sweep")
    stop.fill("warm")
    stop.press("Enter")
    screen.until(lambda: page.get_by_text("“warm” is not a number").count() == 1, "the refusal")


def test_species_as_logarithm_and_another_readout(screen: Any) -> None:
    """What the plots show is chosen above them and survives a reload, as the working copy does."""
    page = screen.page
    assert max(max(curve) for curve in screen.curves("species")) > 50
    page.get_by_role("button", name="log₁₀ of mol/L").click()
    screen.until(lambda: max(max(curve) for curve in screen.curves("species")) < 0, "logarithms")
    page.get_by_label("Family of species").select_option("chlorine")
    screen.until(lambda: len(screen.curves("species")) == 2, "two chlorine species")
    page.get_by_title("The readout of this plot").click()
    page.get_by_placeholder("Search readouts").fill("nitrate")
    page.keyboard.press("Enter")
    screen.until(lambda: max(screen.curves("chosen")[0]) == pytest.approx(29, abs=0.1), "nitrate")
    page.reload()
    screen.drawn()
    assert len(screen.curves("species")) == 2
    assert max(screen.curves("chosen")[0]) == pytest.approx(29, abs=0.1)


def test_a_plot_looks_at_any_place_of_the_plant(screen: Any) -> None:
    """Two plots choose where they look; elsewhere than in the finished water nothing has a target."""
    page = screen.page
    finished = screen.curves("chosen")
    page.get_by_title("Where in the plant").nth(1).click()
    page.get_by_placeholder("Search places").last.fill("granite")
    page.keyboard.press("Enter")
    screen.until(lambda: screen.curves("chosen") != finished, "the source water")
    (source,) = screen.curves("chosen")
    assert max(source) == pytest.approx(min(source)), "a source water does not know its share"
    assert page.get_by_title("Where in the plant").nth(1).inner_text() == "Granite Wellfield ▾"


def test_reload_keeps_the_working_copy_and_its_undo(screen: Any) -> None:
    """Nothing is lost on reload; leaving with unsaved changes asks first."""
    page, asked = screen.page, []
    page.on("dialog", lambda dialog: (asked.append(dialog.type), dialog.accept()))
    share(screen, "Granite Wellfield").fill("25")
    share(screen, "Granite Wellfield").press("Enter")
    page.get_by_text("● not saved").wait_for()
    page.reload()
    screen.drawn()
    assert asked == ["beforeunload"]
    assert share(screen, "Granite Wellfield").input_value().startswith("25")
    page.get_by_role("button", name="Undo").click()
    screen.until(lambda: share(screen, "Granite Wellfield").input_value().startswith("40"), "the old share")


def test_a_second_tab_has_a_scenario_of_its_own(new_screen: Callable[..., Any]) -> None:
    """Two people at the same server do not turn each other's dials."""
    first, second = new_screen(), new_screen()
    before = second.tile("pH")
    share(first, "Granite Wellfield").fill("90")
    share(first, "Granite Wellfield").press("Enter")
    first.until(lambda: first.tile("pH") != before, "another pH in the first tab")
    assert second.tile("pH") == before


def test_save_and_open_bring_back_the_same_file(screen: Any, tmp_path: Path) -> None:
    """Saving clears the unsaved mark; the opened file saves as the identical text."""
    page = screen.page
    share(screen, "Granite Wellfield").fill("33")
    share(screen, "Granite Wellfield").press("Enter")
    page.get_by_text("● not saved").wait_for()
    first = _saved(page, tmp_path / "first.json")
    screen.until(lambda: page.get_by_text("● not saved").count() == 0, "the mark to go")
    assert json.loads(first.read_text("utf-8"))["waters"][1]["share"] == 33
    page.get_by_role("button", name="Examples").click()
    page.get_by_role("button", name="Moss: soft coloured upland water").click()
    screen.until(lambda: page.title().startswith("Moss"), "another scenario")
    _open(page, first)
    screen.until(lambda: share(screen, "Granite Wellfield").input_value().startswith("33"), "the saved share")
    assert _saved(page, tmp_path / "second.json").read_bytes() == first.read_bytes()


def test_a_report_is_written_and_opens_as_its_scenario(screen: Any, tmp_path: Path) -> None:
    """One press writes the page; opened here, it brings back the share it was written with."""
    page = screen.page
    share(screen, "Granite Wellfield").fill("33")
    share(screen, "Granite Wellfield").press("Enter")
    page.get_by_text("● not saved").wait_for()
    with page.expect_download() as arriving:
        page.get_by_role("button", name="Report").click()
    report = tmp_path / "report.html"
    arriving.value.save_as(report)
    assert "Amber: river and wellfield" in report.read_text("utf-8")
    share(screen, "Granite Wellfield").fill("80")
    share(screen, "Granite Wellfield").press("Enter")
    _open(page, report)
    screen.until(
        lambda: share(screen, "Granite Wellfield").input_value().startswith("33"), "the reported share"
    )


@pytest.mark.parametrize(
    ("content", "sentence"),
    [
        ("not json", "bad.json was not opened: "),
        (
            '{"format": "blendwright-scenario", "version": 1, "title": "<img src=x onerror=alert(1)>"}',
            "missing",
        ),
    ],
)
def test_bad_file_is_refused_in_one_sentence_and_nothing_changes(
    screen: Any, tmp_path: Path, content: str, sentence: str
) -> None:
    """The last result stays on screen; dismissing the sentence clears the line."""
    page, before = screen.page, screen.tile("pH")
    bad = tmp_path / "bad.json"
    bad.write_text(content, "utf-8")
    _open(page, bad)
    alarm = page.locator(".alarm")
    alarm.wait_for()
    assert sentence in alarm.inner_text()
    assert "Traceback" not in alarm.inner_text()
    assert screen.tile("pH") == before
    assert page.title().startswith("Amber")
    page.get_by_role("button", name="Dismiss").click()
    screen.until(lambda: not alarm.is_visible(), "the sentence to go")


def test_too_large_file_never_leaves_the_browser(screen: Any, tmp_path: Path) -> None:
    """A file beyond the limit is refused before it can break the connection."""
    large = tmp_path / "large.json"
    large.write_bytes(b" " * 6_000_000)
    _open(screen.page, large)
    screen.page.locator(".alarm").wait_for()
    assert "larger than 5 MB" in screen.page.locator(".alarm").inner_text()


def test_dark_and_light_switch_without_reload_and_are_remembered(screen: Any) -> None:
    """Page and plots change together; the choice holds for the next visit."""
    page = screen.page
    card = "() => getComputedStyle(document.querySelector('#bar')).getPropertyValue('--card').trim()"
    assert page.evaluate(card) == "#ffffff"
    page.get_by_role("button", name="Dark colours").click()
    screen.until(lambda: page.evaluate(card) == "#192327", "the dark palette")
    labels = """() => [...Bokeh.documents[0]._all_models.values()]
        .find((model) => model.type === "LinearAxis").major_label_text_color"""
    screen.until(lambda: page.evaluate(labels) == "#a3b2b4", "dark plots")
    page.reload()
    screen.drawn()
    assert page.evaluate(card) == "#192327"
    screen.until(lambda: page.evaluate(labels) == "#a3b2b4", "dark plots after a reload")


def test_non_potable_scenario_carries_a_banner(screen: Any) -> None:
    """Water that nobody is to drink says so as long as it is shown."""
    page = screen.page
    page.get_by_role("button", name="Examples").click()
    page.get_by_role("button", name="Cinder", exact=False).click()
    page.get_by_text("Not drinking water").wait_for()


@pytest.mark.parametrize(("width", "height"), [(1280, 720), (1600, 900), (1920, 1080), (820, 1180)])
def test_nothing_overflows_sideways(new_screen: Callable[..., Any], width: int, height: int) -> None:
    """At meeting-room and tablet sizes the page has no horizontal scroll and all plots have height."""
    screen = new_screen(viewport={"width": width, "height": height})
    assert screen.page.evaluate("document.documentElement.scrollWidth") <= width
    for plot in ("ph", "species", "buffer", "chosen"):
        assert screen.frame(plot)["height"] >= 90


def test_text_from_a_file_stays_text(screen: Any, tmp_path: Path) -> None:
    """A name with markup is shown as it is written and runs nothing."""
    page = screen.page
    scenario = json.loads(_saved(page, tmp_path / "amber.json").read_text("utf-8"))
    hostile = '<img class=inj src=x onerror="window.__xss=1">'
    scenario["title"] = scenario["waters"][1]["name"] = hostile
    scenario["targets"][0]["basis"] = hostile
    path = tmp_path / "hostile.json"
    path.write_text(json.dumps(scenario), "utf-8")
    _open(page, path)
    screen.until(lambda: hostile in page.locator(".finding").inner_text(), "the name in the verdict")
    page.locator(".tile").first.hover()
    page.get_by_title("The dial along the x axis").click()
    page.wait_for_timeout(300)
    assert page.evaluate("window.__xss") is None
    assert page.locator(".inj").count() == 0


def _saved(page: Any, path: Path) -> Path:
    with page.expect_download() as download:
        page.get_by_role("button", name="Save", exact=True).click()
    download.value.save_as(path)
    return path


def _open(page: Any, path: Path) -> None:
    with page.expect_file_chooser() as chooser:
        page.get_by_role("button", name="Open", exact=True).click()
    chooser.value.set_files(path)


def test_file_dropped_on_the_page_is_opened(screen: Any) -> None:
    """Wherever it is let go."""
    text = shipped()["moss"].read_text("utf-8")
    data = screen.page.evaluate_handle(
        """text => { const data = new DataTransfer()
            data.items.add(new File([text], "moss.json", { type: "application/json" })); return data }""",
        text,
    )
    screen.page.dispatch_event("#main", "dragover", {"dataTransfer": data})
    screen.page.dispatch_event("#main", "drop", {"dataTransfer": data})
    screen.until(lambda: screen.page.title().startswith("Moss"), "the dropped scenario")


def test_ten_actions_are_undone_to_the_start(screen: Any, tmp_path: Path) -> None:
    """Title, season, shares, a dose, options and sweep: undo leads back to the identical file."""
    page = screen.page
    start = _saved(page, tmp_path / "start.json").read_bytes()
    enter(page.get_by_role("textbox", name="Title of the scenario"), "Another title")
    page.get_by_role("button", name="summer").click()
    for value in ("20", "35", "80"):
        enter(share(screen, "Granite Wellfield"), value)
        page.wait_for_timeout(900)
    enter(page.get_by_role("textbox", name="Dose of Sodium hypochlorite"), "2")
    page.get_by_role("button", name="Keep as option").click()
    enter(page.get_by_role("textbox", name="Name of the option"), "B")
    page.get_by_role("button", name="Compare with A B").wait_for()
    page.get_by_role("button", name="More for Fern River").click()
    page.get_by_role("menuitem", name="Duplicate").click()
    page.get_by_role("textbox", name="Share of Fern River (copy)").wait_for()
    enter(page.get_by_role("textbox", name="To, end of the sweep"), "60")
    page.get_by_role("button", name="winter").click()
    undo = page.locator("#bar button.glyph-undo")
    for _ in range(10):
        undo.click()
        page.wait_for_timeout(150)
    screen.until(undo.is_disabled, "nothing more to undo")
    assert _saved(page, tmp_path / "end.json").read_bytes() == start


@pytest.mark.parametrize(
    "name",
    ["\u202bمحطة المياه القديمة", "💧 Quelle 🏔️ né du rocher", "W" * 80, "a" * 40 + " " + "b" * 39],
)
def test_unusual_names_are_shown_and_break_nothing(screen: Any, tmp_path: Path, name: str) -> None:
    """Right-to-left, pictures, and the longest names: as text, inside the page."""
    page = screen.page
    scenario = json.loads(_saved(page, tmp_path / "amber.json").read_text("utf-8"))
    visible = name.lstrip("\u202b")
    scenario["waters"][1]["name"] = scenario["train"][0]["name"] = visible
    scenario["title"] = visible * 2
    path = tmp_path / "unusual.json"
    path.write_text(json.dumps(scenario), "utf-8")
    _open(page, path)
    page.get_by_role("button", name=visible, exact=True).first.wait_for()
    assert page.evaluate("document.documentElement.scrollWidth") <= 1280
    assert page.locator("#rail").evaluate("e => e.scrollWidth <= e.clientWidth")


def test_name_of_ten_thousand_characters_is_refused_in_a_sentence(screen: Any, tmp_path: Path) -> None:
    """The page stays as it was."""
    page = screen.page
    scenario = json.loads(_saved(page, tmp_path / "amber.json").read_text("utf-8"))
    scenario["waters"][1]["name"] = "x" * 10_000
    path = tmp_path / "long.json"
    path.write_text(json.dumps(scenario), "utf-8")
    _open(page, path)
    page.get_by_text("10000 characters are too many").wait_for()
    assert share(screen, "Granite Wellfield").is_visible()


def test_keys_of_the_page(screen: Any) -> None:
    """? lists the keys, numbers open views, arrows in a plot move the operating point."""
    page = screen.page
    page.locator("#main").focus()
    page.keyboard.press("?")
    page.get_by_role("dialog", name="Keys and first steps").wait_for()
    page.keyboard.press("Escape")
    page.mouse.click(*screen.point_at("ph", 0.4))
    screen.until(lambda: share(screen, "Granite Wellfield").input_value().startswith("40"), "40 %")
    before = float(share(screen, "Granite Wellfield").input_value())
    page.keyboard.press("Shift+ArrowRight")
    screen.until(
        lambda: float(share(screen, "Granite Wellfield").input_value()) == before + 10, "ten steps further"
    )
    page.keyboard.press("2")
    screen.until(
        lambda: page.get_by_role("tab", name="Window").get_attribute("aria-selected") == "true", "a view"
    )


def test_first_hint_is_dismissed_for_good(screen: Any) -> None:
    """A browser sees it once."""
    page = screen.page
    page.get_by_role("button", name="Understood").click()
    assert page.get_by_role("button", name="Understood").count() == 0
    page.reload()
    screen.drawn()
    assert page.get_by_role("button", name="Understood").count() == 0
