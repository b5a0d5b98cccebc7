"""Figures of the report against sums on paper: pumps, cost, storage and alkalinity, to 0.1 %."""

import json

import pytest

from explorer.report import report_html
from explorer.scenario.shipped import shipped
from tests.report.conftest import WRITTEN, rows, tree, words

HAND = 1e-3
NAOH, CACO3 = 39.997, 100.087
"""g/mol, IUPAC 2021 (rounded)."""


def number(text: str) -> float:
    return float(text.replace("\u202f", "").split()[0])


@pytest.fixture
def plain_plant(plant):
    """24 ML/d (15 to 36) with caustic and hypochlorite, priced, 5 m³ of each in store."""
    return plant(
        {"river": 100},
        [plant.dosed("soda", "sodium_hydroxide", 8, "mg/L", strength=50, price=0.4, tank=5),
         plant.dosed("hypo", "sodium_hypochlorite", 1.2, "mg/L as Cl2", price=0.3, tank=5)],
        low_flow={"value": 15, "unit": "ML/d"}, high_flow={"value": 36, "unit": "ML/d"},
        currency="credits", price_date="2026-03",
    )  # fmt: skip


@pytest.mark.parametrize(("name", "active"), [("Sodium hydroxide", 192.0), ("Sodium hypochlorite", 28.8)])
def test_pumps_tanks_and_cost_are_those_of_the_sum_on_paper(plain_plant, name, active):
    """kg/d = dose × 24 ML/d; L/h = kg/d / 24 / strength / density; days, price and range follow."""
    page = tree(report_html(plain_plant, written=WRITTEN))
    use = next(row for row in rows(page, "quantities") if row[0] == name)
    pump = next(row for row in rows(page, "quantities", 1) if row[0] == name)
    strength, density, now, least, most = map(number, pump[1:6])
    product = active / (strength / 100)
    assert number(use[2]) == pytest.approx(active, rel=HAND)
    assert number(use[3]) == pytest.approx(product, rel=HAND)
    assert now == pytest.approx(product / 24 / density, rel=HAND)
    assert (least, most) == (pytest.approx(now * 15 / 24, rel=HAND), pytest.approx(now * 1.5, rel=HAND))
    assert pump[6] == "2.4 : 1" and number(pump[8]) == pytest.approx(5000 / 24 / now, rel=HAND)
    assert number(use[6]) == pytest.approx(product * number(use[5]) / 24, rel=HAND)
    assert number(use[7]) == pytest.approx(product * number(use[5]) * 365, rel=HAND)


def test_price_date_and_range_of_flows_are_said(plain_plant):
    """Below the tables, in a sentence."""
    page = tree(report_html(plain_plant, written=WRITTEN))
    said = words(page.find(".//section[@id='quantities']"))
    assert "rices of 2026-03" in said and "flows of 625 to 1500 m³/h" in said


def test_alkalinity_of_the_blend_is_that_of_the_sum_on_paper(shipped_report):
    """Shares times alkalinities as entered: 0.6 × 64 + 0.4 × 272."""
    raw = json.loads(shipped()["amber"].read_text(encoding="utf-8"))
    parts = [
        water["share"] / 100 * water["analyses"]["winter"]["alkalinity"]["value"] for water in raw["waters"]
    ]
    lines = {row[0]: row for row in rows(tree(shipped_report("amber")), "ledger")}
    assert number(lines["Blend"][1]) == pytest.approx(sum(parts), rel=HAND)


def test_alkalinity_of_a_dose_is_that_of_the_sum_on_paper(plain_plant):
    """Each mole of NaOH gives an equivalent: mg/L × (half of CaCO3) / NaOH, by hand and by the engine."""
    page = tree(report_html(plain_plant, written=WRITTEN))
    said = next(
        words(line)
        for line in page.findall(".//section[@id='checks']//li")
        if "hydroxide gives" in words(line)
    )
    _, by_hand, engine = said.replace("; the engine has", " =").rsplit(" = ", 2)
    assert number(by_hand) == pytest.approx(8 * CACO3 / 2 / NAOH, rel=HAND)
    assert number(engine) == pytest.approx(8 * CACO3 / 2 / NAOH, rel=HAND)
