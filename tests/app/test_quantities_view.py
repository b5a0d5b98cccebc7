"""Quantities on the page: figures against sums on paper, and fields for prices, tanks and flows."""

import json

import pytest

from explorer.app.ledger_view import LedgerView
from explorer.app.quantities_view import QuantitiesView
from explorer.app.state import Session
from explorer.scenario.files import open_scenario
from explorer.scenario.shipped import shipped

HAND = 1e-3
NAOH, CACO3 = 39.997, 100.087
"""g/mol, IUPAC 2021 (rounded)."""


def opened(name: str, kind: type = QuantitiesView):
    session = Session(open_scenario(shipped()[name]))
    session.solve_now()
    view = kind(session)
    view.opened()
    return view


@pytest.fixture
def view() -> QuantitiesView:
    return opened("moss")


def cells(view, key: str) -> list[str]:
    """Texts of a row, a cell's parts joined by blanks."""
    return [part.words() for part in view.view.shown(key).children]


def number(text: str) -> float:
    return float(text.replace("\u202f", "").split()[0])


@pytest.mark.parametrize("step", ["first_caustic", "last_caustic", "alum", "hypo"])
def test_pump_on_the_screen_is_that_of_the_sum_on_paper(view: QuantitiesView, step: str) -> None:
    """L/h = active substance (kg/d) / 24 / mass fraction / density, with the figures that are shown."""
    active = number(cells(view, f"use:{step}")[2])
    _, strength, density, _, now, *_ = map(str, cells(view, f"pump:{step}"))
    on_paper = active / 24 / (number(strength) / 100) / number(density)
    assert number(now) == pytest.approx(on_paper, rel=HAND)


def test_pump_of_caustic_is_that_of_dose_and_flow(view: QuantitiesView) -> None:
    """From the file alone: dose (mg/L) × flow (m³/h) / (mass fraction × density × 1000)."""
    raw = json.loads(shipped()["moss"].read_text(encoding="utf-8"))
    dose = next(step for step in raw["train"] if step["id"] == "last_caustic")["dose"]["value"]
    flow = raw["flow"]["value"] * 1000 / 24
    _, strength, density, _, now, *_ = cells(view, "pump:last_caustic")
    assert number(now) == pytest.approx(dose * flow / (number(strength) * number(density) * 10), rel=HAND)


def test_alkalinity_of_a_dose_on_the_screen_is_that_of_the_sum_on_paper() -> None:
    """Each mole of NaOH gives an equivalent: mg/L × (half of CaCO3) / NaOH."""
    view = opened("ember", LedgerView)
    table = next(
        part
        for part in view.view.nodes
        if part.properties.get("aria-label", "").startswith("Hand checks: the")
    )
    rows = [[cell.words() for cell in row.children] for row in table.walk() if row.tag == "tr"]
    said, by_hand, engine, _ = next(
        row for row in rows if row[0].startswith("Sodium hydroxide gives alkalinity")
    )
    dose = float(said.split("alkalinity: ")[1].split(" mg/L")[0])
    on_paper = dose * CACO3 / 2 / NAOH
    assert number(by_hand) == pytest.approx(on_paper, rel=HAND)
    assert number(engine) == pytest.approx(on_paper, rel=HAND)


def test_a_price_is_entered_and_taken_back(view: QuantitiesView) -> None:
    """Cost per ML and per year follow by arithmetic; one step of undo takes it back."""
    before = view.session.scenario.step("alum").price
    view.view.report("alum.price", "0,25")
    assert view.session.scenario.step("alum").price == 0.25
    row = cells(view, "use:alum")
    per_day = number(row[3]) * 0.25
    assert number(row[6]) == pytest.approx(per_day / 10, rel=HAND)
    assert number(row[7]) == pytest.approx(per_day * 365, rel=HAND)
    view.session.undo()
    assert view.session.scenario.step("alum").price == before


def test_currency_and_date_of_prices_are_words_of_the_user(view: QuantitiesView) -> None:
    """They stand in the headings, and belong to the scenario."""
    view.view.report("currency", "crowns")
    view.view.report("price_date", "May 2026")
    assert "crowns per ML" in view.view.nodes[0].words()
    kept = view.session.scenario.to_dict()
    assert (kept["currency"], kept["price_date"]) == ("crowns", "May 2026")


def test_a_tank_and_a_range_of_flows_are_entered_where_they_count(view: QuantitiesView) -> None:
    """Days of storage, least and most of the pumps, and their turndown."""
    view.view.report("last_caustic.tank", "10")
    view.view.report("low_flow", "5")
    view.view.report("high_flow", "15")
    row = cells(view, "pump:last_caustic")
    least, now, most = map(number, row[3:6])
    assert number(row[8]) == pytest.approx(10_000 / 24 / now, rel=HAND)
    assert most / least >= 3 * (1 - HAND)
    assert row[6].endswith(": 1")
    view.view.report("last_caustic.tank", "")
    assert cells(view, "pump:last_caustic")[8] == "—"


def test_what_cannot_be_is_refused_beside_its_field(view: QuantitiesView) -> None:
    """A price below nothing and a flow that is no number leave everything as it was."""
    before = view.session.scenario.to_dict()
    view.view.report("alum.price", "-1")
    view.view.report("low_flow", "much")
    words = view.view.nodes[0].words()
    assert "at least 0 per kg" in words and "“much” is not a number" in words
    assert view.session.scenario.to_dict() == before


def test_everything_is_saved_for_a_spreadsheet(view: QuantitiesView) -> None:
    """One line a dose, below a heading with units."""
    view.view.report("csv")
    first, *rest = view.session.offered.text.removeprefix("\ufeff").splitlines()
    assert first.startswith("Dose,Chemical,Amount,Unit") and "Pump [L/h]" in first
    assert len(rest) > len(view.session.point.dosing)
    assert view.session.offered.name == "moss-soft-coloured-upland-water-quantities.csv"


@pytest.mark.parametrize("name", shipped())
def test_every_shipped_scenario_has_its_quantities(name: str) -> None:
    """Tables where anything is dosed, a sentence where nothing is."""
    view = opened(name)
    words = view.view.nodes[0].words()
    assert ("Chemicals and cost" in words) == bool(view.session.point.dosing)
    assert view.session.point.dosing or "No chemical is dosed" in words
