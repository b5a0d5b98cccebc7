"""The rail in a browser: waters and steps set, typed, added, removed and moved the way a person does it."""

import re

import pytest

pytest.importorskip("playwright.sync_api")
from playwright.sync_api import Locator, Page, expect

expect.set_options(timeout=15_000)

pytestmark = pytest.mark.browser


@pytest.fixture
def page(screen) -> Page:
    """The page with the shipped demo."""
    return screen.page


HOSTILE = '<img src=x onerror="window.__xss=1">'


def water(page: Page, name: str) -> Locator:
    """The card of a water."""
    return page.locator("#rail .waters > .card").filter(has=page.get_by_role("button", name=name, exact=True))


def step(page: Page, name: str) -> Locator:
    """The card of a step of the common train."""
    return page.locator("#rail .flow > li").filter(has=page.get_by_role("button", name=name, exact=True))


def choose(page: Page, menu: str, act: str) -> None:
    """Open the menu of a card and press one of its lines."""
    page.get_by_role("button", name=f"More for {menu}").click()
    page.get_by_role("menuitem", name=act, exact=True).click()


def enter(field: Locator, text: str) -> None:
    field.fill(text)
    field.press("Enter")


def pick(page: Page, button: str, words: str) -> None:
    """Open a searchable list, type, and take what is found first."""
    page.get_by_role("button", name=button).click()
    page.keyboard.type(words)
    page.keyboard.press("Enter")


def test_share_by_slider_moves_water_and_number(page: Page) -> None:
    """Arrow keys on a share slider change share, flow and the other water, in the page."""
    slider = page.get_by_role("slider", name="Share of Granite Wellfield")
    before = float(slider.input_value())
    slider.focus()
    for _ in range(10):
        slider.press("ArrowRight")
    share = page.get_by_role("textbox", name="Share of Granite Wellfield")
    expect(share).to_have_value(f"{before + 5:.1f}")
    expect(page.get_by_role("textbox", name="Share of Fern River")).to_have_value(f"{95 - before:.1f}")
    expect(water(page, "Granite Wellfield")).to_contain_text("9.0 ML/d")


def test_share_by_dragging(page: Page) -> None:
    """A dragged handle ends where it is let go, and the number says so."""
    slider = page.get_by_role("slider", name="Share of Granite Wellfield")
    box = slider.bounding_box()
    page.mouse.move(box["x"] + 0.4 * box["width"], box["y"] + box["height"] / 2)
    page.mouse.down()
    for part in range(40, 81, 2):
        page.mouse.move(box["x"] + part / 100 * box["width"], box["y"] + box["height"] / 2)
    page.mouse.up()
    reached = float(slider.input_value())
    assert 75 < reached < 85
    expect(page.get_by_role("textbox", name="Share of Granite Wellfield")).to_have_value(f"{reached:.1f}")
    assert float(slider.input_value()) == reached


def test_share_by_number_with_a_decimal_comma(page: Page) -> None:
    """A typed share moves the slider."""
    enter(page.get_by_role("textbox", name="Share of Granite Wellfield"), "33,5")
    expect(page.get_by_role("slider", name="Share of Granite Wellfield")).to_have_value("33.5")
    expect(page.get_by_role("textbox", name="Share of Granite Wellfield")).to_have_value("33.5")


def test_bad_value_shows_its_message_and_recovers(page: Page) -> None:
    """The sentence stands beside the field, announced; a good value clears it."""
    field = page.get_by_role("textbox", name="Share of Granite Wellfield")
    enter(field, "150")
    card = water(page, "Granite Wellfield")
    expect(card.get_by_role("alert").filter(has_text="0 to 100 %")).to_be_visible()
    expect(field).to_have_value("150")
    expect(field).to_have_attribute("aria-invalid", "true")
    expect(page.get_by_role("textbox", name="Share of Fern River")).to_have_value("60.0")
    enter(field, "50")
    expect(field).not_to_have_attribute("aria-invalid", "true")
    expect(page.get_by_role("textbox", name="Share of Fern River")).to_have_value("50.0")


def test_escape_takes_back_what_was_typed(page: Page) -> None:
    """Escape in a field restores the shown value without asking the server."""
    field = page.get_by_role("textbox", name="Share of Granite Wellfield")
    field.fill("7")
    field.press("Escape")
    expect(field).to_have_value("40.0")


def test_adding_and_removing_a_water(page: Page) -> None:
    """A new water opens with its analysis; removed, the shares add up again."""
    pick(page, "+ Add a source water", "new")
    expect(page.get_by_role("textbox", name="Share of New water")).to_have_value("0.0")
    expect(page.get_by_role("textbox", name="pH", exact=True)).to_be_visible()
    enter(page.get_by_role("textbox", name="Share of New water"), "20")
    expect(page.get_by_role("textbox", name="Share of Fern River")).to_have_value("48.0")
    choose(page, "New water", "Remove")
    expect(page.get_by_role("textbox", name="Share of New water")).to_have_count(0)
    expect(page.get_by_role("textbox", name="Share of Fern River")).to_have_value("60.0")


def test_adding_turning_and_removing_a_dose(page: Page) -> None:
    """A chemical found by its formula joins the line; its dose moves the pH of the finished water."""
    finished = page.locator("#rail .flow > li.end")
    before = finished.inner_text()
    pick(page, "+ Add a treatment step", "naoh")
    enter(page.get_by_role("textbox", name="Dose of Sodium hydroxide"), "12")
    expect(step(page, "Sodium hydroxide")).to_contain_text("alk +15")
    expect(finished).not_to_have_text(before)
    choose(page, "Sodium hydroxide", "Remove")
    expect(step(page, "Sodium hydroxide")).to_have_count(0)
    expect(finished).to_have_text(before, use_inner_text=True)


def test_search_in_the_list_of_steps(page: Page) -> None:
    """Only what has the typed words is left; nothing found is said."""
    page.get_by_role("button", name="+ Add a treatment step").click()
    search = page.get_by_role("textbox", name="Search chemicals and steps")
    search.fill("phosphate disod")
    found = page.get_by_role("dialog").locator("button:visible")
    expect(found).to_have_count(1)
    expect(found).to_contain_text("Disodium phosphate")
    search.fill("unobtainium")
    expect(page.get_by_text("Nothing here has these words.").locator("visible=true")).to_have_count(1)
    page.keyboard.press("Escape")
    expect(search).to_be_hidden()


def test_reordering_steps(page: Page) -> None:
    """A step moved up stands before the other, and its menu stays within reach of the keyboard."""
    pick(page, "+ Add a treatment step", "carbon dioxide")
    names = page.locator("#rail .flow > li .open .name")
    expect(names).to_have_text(["Sodium hypochlorite", "Carbon dioxide"])
    choose(page, "Carbon dioxide", "Move up")
    expect(names).to_have_text(["Carbon dioxide", "Sodium hypochlorite"])


def test_a_step_is_dragged_along_its_line(page: Page) -> None:
    """By the dot before its card; one undo brings it back, Escape lets it stay."""
    pick(page, "+ Add a treatment step", "carbon dioxide")
    pick(page, "+ Add a treatment step", "air contact")
    names = page.locator("#rail .flow > li .open .name")
    expect(names).to_have_text(["Sodium hypochlorite", "Carbon dioxide", "Air contact"])

    def drag(name: str, onto: str) -> None:
        grip, goal = step(page, name).locator(".grip"), step(page, onto)
        grip.scroll_into_view_if_needed()
        start, end = grip.bounding_box(), goal.bounding_box()
        page.mouse.move(start["x"] + 10, start["y"] + 15)
        page.mouse.down()
        page.mouse.move(start["x"] + 10, end["y"] + end["height"] / 2, steps=5)

    drag("Sodium hypochlorite", "Air contact")
    page.mouse.move(0, 2, steps=2)
    page.keyboard.press("Escape")
    page.mouse.up()
    expect(names).to_have_text(["Sodium hypochlorite", "Carbon dioxide", "Air contact"])
    drag("Air contact", "Sodium hypochlorite")
    page.mouse.up()
    expect(names).to_have_text(["Air contact", "Sodium hypochlorite", "Carbon dioxide"])
    page.get_by_role("button", name="Undo").click()
    expect(names).to_have_text(["Sodium hypochlorite", "Carbon dioxide", "Air contact"])


def test_analysis_value_non_detect_and_unit(page: Page) -> None:
    """An entry is corrected, given as below a limit, and shown in another unit."""
    page.get_by_role("button", name="Granite Wellfield", exact=True).click()
    calcium = page.get_by_role("textbox", name="Calcium, mg/L")
    enter(calcium, "290")
    expect(water(page, "Granite Wellfield").locator(".details")).to_contain_text("▲ poor")
    enter(calcium, "116")
    expect(water(page, "Granite Wellfield").locator(".details")).to_contain_text("−0.9 % good")
    nitrate = page.get_by_role("textbox", name="Nitrate")
    enter(nitrate.first, "<0,5")
    expect(nitrate.first).to_have_value("<0.5")
    page.get_by_role("combobox", name="Unit of Alkalinity").select_option("mmol/L")
    expect(page.get_by_role("textbox", name="Alkalinity, mmol/L")).to_have_value(re.compile(r"5\.435"))
    page.get_by_role("combobox", name="Unit of Alkalinity").select_option("mg/L as CaCO3")
    expect(page.get_by_role("textbox", name="Alkalinity, mg/L as CaCO3")).to_have_value("272")


def test_renaming_with_a_hostile_name(page: Page) -> None:
    """The name field has the focus; markup in a name is shown as written and runs nothing."""
    choose(page, "Granite Wellfield", "Rename")
    expect(page.get_by_role("textbox", name="Name", exact=True)).to_be_focused()
    page.keyboard.press("Control+A")
    page.keyboard.type(HOSTILE)
    page.keyboard.press("Enter")
    expect(page.locator("#rail .waters .name").nth(1)).to_have_text(HOSTILE)
    page.wait_for_timeout(300)
    assert page.evaluate("window.__xss") is None


def test_typing_is_not_disturbed_by_results(page: Page) -> None:
    """Results that arrive while a value is being typed leave the half-typed text alone."""
    page.get_by_role("button", name="Granite Wellfield", exact=True).click()
    calcium = page.get_by_role("textbox", name="Calcium, mg/L")
    calcium.focus()
    page.keyboard.press("Control+A")
    page.keyboard.type("12")
    page.evaluate(
        """() => { const find = (root) => [...root.querySelectorAll('*')].flatMap((e) =>
             [...(e.matches('.slider') ? [e] : []), ...(e.shadowRoot ? find(e.shadowRoot) : [])]);
           const slider = find(document)[0]; slider.value = 30;
           slider.dispatchEvent(new Event('input', {bubbles: true})) }"""
    )
    expect(page.get_by_role("textbox", name="Share of Fern River")).to_have_value("30.0")
    page.keyboard.type("5")
    expect(calcium).to_have_value("125")


def test_everything_in_the_rail_has_a_name(page: Page) -> None:
    """Every slider, field, list and button of the rail, with cards open, is named for screen readers."""
    page.get_by_role("button", name="Granite Wellfield", exact=True).click()
    page.get_by_role("button", name="More about pH").click()
    name = "e => (e.ariaLabel || e.closest('label')?.textContent || e.textContent).trim()"
    for role in ("slider", "textbox", "combobox", "button", "checkbox"):
        for element in page.locator("#rail").get_by_role(role).all():
            assert element.evaluate(name), role


def test_open_card_fits_the_rail(page: Page) -> None:
    """Nothing in the rail is wider than the rail, with a card open, at the narrowest desktop width."""
    page.get_by_role("button", name="Granite Wellfield", exact=True).click()
    page.get_by_role("button", name="More about pH").click()
    rail = page.locator("#rail")
    assert rail.evaluate("e => e.scrollWidth <= e.clientWidth")
    edge = rail.bounding_box()
    for card in page.locator("#rail .card").all():
        box = card.bounding_box()
        assert box["x"] + box["width"] <= edge["x"] + edge["width"]
        assert card.evaluate("e => e.scrollWidth <= e.clientWidth + 1")


def test_adding_a_water_by_pasting_an_analysis(page: Page) -> None:
    """Lines from a spreadsheet are previewed, one is corrected, and the water is there with its figures."""
    pick(page, "+ Add a source water", "pasted")
    area = page.get_by_role("textbox", name="Lines of the analysis")
    area.fill(
        "Parameter\tUnit\tResult\npH\t\t7,9\nAlk\tmg/L CaCO3\t150\nKalk\tmg/l\t60\n" + HOSTILE + "\tNTU\t0,4"
    )
    page.get_by_role("button", name="Read the lines").click()
    expect(page.get_by_text(HOSTILE)).to_be_visible()
    page.get_by_role("combobox", name="Kalk is").select_option("calcium")
    page.get_by_role("button", name="Take over 3 entries").click()
    expect(page.get_by_role("textbox", name="Calcium, mg/L")).to_have_value("60")
    expect(page.get_by_role("textbox", name="Share of New water")).to_have_value("0.0")
    page.get_by_role("button", name="Undo").click()
    expect(page.get_by_role("textbox", name="Share of New water")).to_have_count(0)
    assert page.evaluate("window.__xss") is None
