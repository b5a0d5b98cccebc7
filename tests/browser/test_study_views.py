"""Titration, compare, ledger, basis and measured points in a real browser."""

import json
import re
from collections.abc import Callable
from pathlib import Path
from typing import Any

import pytest

from explorer.scenario.shipped import shipped

pytestmark = pytest.mark.browser

HOSTILE = '<img class=inj src=x onerror="window.__xss=1">'


def tab(screen: Any, name: str) -> None:
    screen.page.get_by_role("tab", name=name, exact=True).click()


def cells(screen: Any, table: str) -> list[str]:
    """Texts of all rows of the table with this name."""
    rows = screen.page.get_by_role("region", name=table).get_by_role("row")
    return rows.all_inner_texts()


def test_titration_shows_curve_and_diagram(screen: Any) -> None:
    """The curve rises from acid to base; species are added by family and named on their curves."""
    page = screen.page
    tab(screen, "Titration")
    screen.until(lambda: screen.curves("titration-ph"), "a titration curve")
    (ph,) = screen.curves("titration-ph")
    assert ph[0] < 5 and ph[-1] > 9.5 and ph == sorted(ph)
    before = len(screen.curves("diagram"))
    page.get_by_title("Families of species shown").click()
    page.locator("#families label", has_text="Free chlorine").click()
    screen.until(lambda: len(screen.curves("diagram")) == before + 2, "two chlorine species")


def test_titration_of_another_water_with_another_chemical(screen: Any) -> None:
    """Water, chemical and unit are chosen over the plots."""
    page = screen.page
    tab(screen, "Titration")
    screen.until(lambda: screen.curves("titration-ph"), "a titration curve")
    (before,) = screen.curves("titration-ph")
    page.get_by_title("The water that is titrated").click()
    page.get_by_placeholder("Search places").locator("visible=true").fill("granite")
    page.keyboard.press("Enter")
    screen.until(lambda: screen.curves("titration-ph")[0] != before, "another curve")
    page.get_by_title("What is added where the dose is positive").click()
    button = page.get_by_title("What is added where the dose is positive")
    search = page.get_by_role("dialog", name=button.inner_text()).get_by_role("textbox")
    search.fill("calcium hydroxide")
    search.press("Enter")
    screen.until(lambda: "Calcium hydroxide" in button.inner_text(), "calcium hydroxide")
    page.get_by_label("Unit of the dose").select_option("mg/L")
    stop = page.get_by_role("textbox", name="To, end of the doses")
    screen.until(lambda: float(stop.input_value()) > 20, "a range in mg/L")


def test_measured_points_are_pasted_into_the_sweep(screen: Any, tmp_path: Path) -> None:
    """A line that cannot be read is named; mended points lie over the curve; a CSV file does as well."""
    page = screen.page
    page.get_by_title("Measured points laid over the plots").click()
    panel = page.get_by_role("dialog", name="Measured points")
    panel.get_by_role("textbox", name="Name of the points").fill("Plant")
    paste = panel.get_by_role("textbox", name="Points: dial value")
    paste.fill("0 8.5\n50 seven")
    panel.get_by_role("button", name="Add the points").click()
    screen.until(lambda: "line 2" in panel.inner_text(), "the line at fault")
    paste.fill("0 8.5\n50 7.4")
    panel.get_by_role("button", name="Add the points").click()
    screen.until(lambda: "Plant: the model is" in panel.inner_text(), "the comparison")
    assert paste.input_value() == ""
    sheet = tmp_path / "jar test.csv"
    sheet.write_text("share,pH\n20,7.8\n", encoding="utf-8")
    panel.get_by_label("CSV file with points").set_input_files(sheet)
    screen.until(lambda: "jar test: the model is" in panel.inner_text(), "the points of the file")
    page.keyboard.press("Escape")
    screen.until(lambda: page.get_by_text("2 measured, model").count() == 1, "bias and scatter over the plot")


def test_compare_keeps_an_option_and_shows_what_differs(screen: Any) -> None:
    """Kept here, a dial turned, both side by side with their curves."""
    page = screen.page
    tab(screen, "Compare")
    strip = page.get_by_role("group", name="What is compared")
    strip.wait_for()
    keep = page.locator(".controls").get_by_role("button", name="Keep as option")
    keep.click()
    name = page.locator(".controls").get_by_role("textbox", name="Name of the option")
    name.fill("Agreed")
    name.press("Enter")
    screen.until(
        lambda: any("A Agreed" in row for row in cells(screen, "Comparison, only what differs")), "option A"
    )
    share = page.get_by_role("textbox", name="Share of Granite Wellfield")
    share.fill("80")
    share.press("Enter")

    def shares() -> bool:
        rows = cells(screen, "Comparison, only what differs")
        return any("Share of Granite" in row and "80" in row and "40" in row for row in rows)

    screen.until(shares, "both shares")
    screen.until(lambda: screen.curves("overlay"), "curves")


def test_ledger_adds_up_and_is_saved_for_a_spreadsheet(screen: Any, tmp_path: Path) -> None:
    """Sources, doses and their sum; three hand checks; a CSV file of it all."""
    page = screen.page
    tab(screen, "Ledger")
    screen.until(lambda: page.get_by_text("The lines add up").count() == 1, "the closed ledger")
    assert any("Fern River, 60 % of the blend" in row for row in cells(screen, "Ledger, amounts per litre"))
    assert len(cells(screen, "Hand checks: the arithmetic")) == 1 + 3
    page.get_by_role("button", name="Per day at the present flow").click()
    screen.until(
        lambda: page.get_by_role("region", name="Ledger, amounts a day").count() == 1, "amounts a day"
    )
    with page.expect_download() as arriving:
        page.get_by_role("button", name=re.compile("Save the ledger as CSV")).click()
    arriving.value.save_as(tmp_path / "ledger.csv")
    text = (tmp_path / "ledger.csv").read_text(encoding="utf-8-sig")
    assert text.startswith("Where,What,Alkalinity [kg/d as CaCO3]")


def test_basis_is_searched(screen: Any) -> None:
    """Sections with a hit unfold and show it alone; without words all is as before."""
    page = screen.page
    tab(screen, "Basis")
    search = page.get_by_role("textbox", name="Search the basis")
    search.wait_for()
    constants = page.locator("details", has_text="Constants and their sources")
    assert constants.get_attribute("open") is None
    search.fill("struvite")
    screen.until(lambda: constants.get_attribute("open") is not None, "the constants, unfolded")
    shown = [row for row in constants.get_by_role("row").all() if row.is_visible()]
    assert any("MgNH" in row.inner_text() for row in shown) and len(shown) < 10
    search.fill("no such words anywhere")
    assert page.get_by_text("Nothing here has these words.", exact=True).last.is_visible()
    search.fill("")
    screen.until(lambda: constants.get_attribute("open") is None, "the constants, folded")


@pytest.mark.parametrize(("width", "height"), [(1280, 720), (820, 1180)])
def test_no_view_overflows_sideways(new_screen: Callable[..., Any], width: int, height: int) -> None:
    """What is wide scrolls inside of its place, on a tablet too."""
    screen = new_screen(viewport={"width": width, "height": height})
    for name in ("Titration", "Compare", "Ledger", "Basis"):
        tab(screen, name)
        screen.page.wait_for_timeout(900)
        assert screen.page.evaluate("document.documentElement.scrollWidth <= window.innerWidth")


def test_text_from_a_file_stays_text_in_every_view(screen: Any, tmp_path: Path) -> None:
    """Names, notes and units are shown as they are written; nothing of them runs."""
    page = screen.page
    raw = json.loads(shipped()["juniper"].read_text(encoding="utf-8"))
    raw["title"] = raw["note"] = HOSTILE
    for water in raw["waters"]:
        water["name"] = HOSTILE
        for step in water.get("train", []):
            step["name"] = HOSTILE
        for analysis in water["analyses"].values():
            analysis["provenance"] = {"lab": HOSTILE, "note": HOSTILE}
    for target in raw["targets"]:
        target["basis"] = HOSTILE
    for option in raw["options"]:
        option["name"] = option["note"] = HOSTILE
    raw["measured"] = [{"name": HOSTILE, "dial": "waters.linen.share", "readout": "ph", "points": [[50, 8]]}]
    path = tmp_path / "hostile.json"
    path.write_text(json.dumps(raw), encoding="utf-8")
    page.locator("input[type=file]").first.set_input_files(path)
    screen.until(lambda: "img class=inj" in page.title(), "the opened file")
    for name in ("Titration", "Compare", "Ledger", "Basis", "Sweep"):
        tab(screen, name)
        page.wait_for_timeout(1200)
    page.get_by_role("button", name="Measured (1)").click()
    page.wait_for_timeout(300)
    assert page.evaluate("window.__xss") is None
    assert page.locator("img.inj").count() == 0


def test_a_plot_is_saved_as_picture_drawing_and_figures(screen: Any, tmp_path: Path) -> None:
    """One menu beside the plot; the picture is made in the page, of the drawing."""
    page = screen.page
    for kind, starts in (("PNG", b"\x89PNG"), ("SVG", b"<svg"), ("CSV", "\ufeffShare of".encode())):
        page.get_by_role("button", name="Save the plot: pH").click()
        with page.expect_download() as arriving:
            page.get_by_role("menuitem", name=kind).locator("visible=true").click()
        path = tmp_path / arriving.value.suggested_filename
        assert path.name == f"amber-river-and-wellfield-sweep-ph.{kind.lower()}"
        arriving.value.save_as(path)
        assert path.read_bytes().startswith(starts)


def test_sheets_flow_over_the_pages_of_a_print(screen: Any) -> None:
    """Ledger and basis are printed whole, their tables neither cut nor scrolled; plots keep one page."""
    page, shown = screen.page, "() => document.querySelector('#main > .views').scrollHeight"
    tab(screen, "Basis")
    screen.until(lambda: page.get_by_text("Constants and their sources").count() == 1, "the basis")
    page.evaluate("window.dispatchEvent(new Event('beforeprint'))")
    page.emulate_media(media="print")
    assert page.evaluate("document.documentElement.hasAttribute('data-flowing')")
    assert page.evaluate(shown) > 1000
    clipped = """() => {
      const found = [], look = (root) => { for (const part of root.querySelectorAll('*')) {
        if (part.shadowRoot) look(part.shadowRoot)
        if (!part.checkVisibility() || !part.matches('.scroll, .sections, .pane')) continue
        const scrolls = getComputedStyle(part).overflowY !== 'visible'
        if (scrolls && part.scrollHeight > part.clientHeight + 2) found.push(part.className)
      } }
      look(document.querySelector('#main > .views'))
      return found
    }"""
    assert page.evaluate(clipped) == []
    page.emulate_media(media="screen")
    tab(screen, "Sweep")
    screen.until(
        lambda: page.evaluate("""() => {
          window.dispatchEvent(new Event('beforeprint'))
          return !document.documentElement.hasAttribute('data-flowing')
        }"""),
        "plots, which do not flow",
    )
