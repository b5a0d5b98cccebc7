"""Quantities: product, pumps, tanks, solids and money, each against hand arithmetic to 0.1 %."""

import numpy as np
import pytest

from explorer.scenario.errors import ScenarioError
from explorer.scenario.evaluate import evaluate
from explorer.scenario.files import open_scenario
from explorer.scenario.shipped import shipped
from explorer.studies.quantities import quantities

HAND = 1e-3


@pytest.fixture(scope="module")
def hypo(plant):
    """24 ML/d (1000 m³/h) with 1.2 mg/L of chlorine from 10.4 % hypochlorite of 1.2 kg/L at 0.30 a kg."""
    dose = plant.dosed("hypo", "sodium_hypochlorite", 1.2, "mg/L as Cl2", price=0.3)
    return plant({"well": 100}, [dose], currency="credits", price_date="2026-03")


def only(made):
    (dose,) = made.doses
    return dose


def test_active_substance_is_dose_times_flow(hypo):
    """1.2 g/m³ × 24 000 m³/d = 28.8 kg/d as Cl2; × 365 = 10.51 t/year."""
    dose = only(quantities(hypo))
    assert (dose.basis, dose.unit, dose.held) == ("Cl2", "mg/L as Cl2", False)
    assert dose.active_kg_per_day == pytest.approx(28.8, rel=HAND)
    assert dose.active_t_per_year == pytest.approx(10.512, rel=HAND)


def test_product_is_active_substance_over_strength(hypo):
    """28.8 / 0.104 = 276.9 kg/d; / 1.2 kg/L / 24 h = 9.615 L/h."""
    dose = only(quantities(hypo))
    assert dose.product_kg_per_day == pytest.approx(276.92, rel=HAND)
    assert dose.product_t_per_year == pytest.approx(101.08, rel=HAND)
    assert (dose.strength, dose.density) == (10.4, pytest.approx(1.2))
    assert dose.rate == pytest.approx(9.6154, rel=HAND)


def test_a_tank_lasts_its_volume_over_the_rate(hypo):
    """5 m³ / (9.615 L/h × 24 h) = 21.67 days."""
    assert only(quantities(hypo, tanks={"hypo": 5})).storage == pytest.approx(21.667, rel=HAND)
    assert np.isnan(only(quantities(hypo)).storage)


def test_cost_a_day_a_megalitre_and_a_year(hypo):
    """276.9 kg × 0.30 = 83.08 a day; / 24 ML = 3.462; × 365 = 30 323."""
    made = quantities(hypo)
    assert made.cost_per_day == pytest.approx(83.077, rel=HAND)
    assert made.cost_per_ml == pytest.approx(3.4615, rel=HAND)
    assert made.cost_per_year == pytest.approx(30_323, rel=HAND)
    assert (made.currency, made.price_date) == ("credits", "2026-03")


def test_another_strength_changes_product_not_substance(plant):
    """Caustic at 25 % (1.274 kg/L) against 50 %: twice the product, the same NaOH."""
    strong, weak = (
        only(quantities(plant({"well": 100}, [plant.dosed("c", "sodium_hydroxide", 10, "mg/L", strength=s)])))
        for s in (50, 25)
    )
    assert weak.active_kg_per_day == pytest.approx(240, rel=HAND)
    assert strong.active_kg_per_day == pytest.approx(240, rel=HAND)
    assert weak.product_kg_per_day == pytest.approx(960, rel=HAND)
    assert weak.rate == pytest.approx(960 / 1.274 / 24, rel=HAND)


def test_a_dose_in_a_part_of_the_flow_takes_that_part(plant):
    """A quarter of the blend, and half of that through the side stream: an eighth of 24 ML/d."""
    raw = plant.dict({"river": 75, "well": 25})
    side = {"id": "side", "step": "side_stream", "fraction": 50, "train": []}
    side["train"] = [plant.dosed("c", "sodium_hydroxide", 16, "mg/L", price=1)]
    raw["waters"][1]["train"] = [side]
    dose = only(quantities(plant.read(raw)))
    assert dose.active_kg_per_day == pytest.approx(16 * 3, rel=HAND)
    assert dose.cost_per_ml == pytest.approx(16 / 8 / 0.5, rel=HAND)


def test_a_pump_follows_the_flow(hypo):
    """600 to 1500 m³/h: 5.77 to 14.42 L/h, one to 2.5."""
    dose = only(quantities(hypo, low_flow=600, high_flow=1500))
    assert dose.lowest_rate == pytest.approx(5.7692, rel=HAND)
    assert dose.highest_rate == pytest.approx(14.423, rel=HAND)
    assert dose.turndown == pytest.approx(2.5, rel=HAND)


def test_a_pump_follows_the_seasons_too(plant):
    """A hold that needs more in one season widens what the pump must give, at the same flow."""
    raw = plant.dict({"well": 100}, [plant.held("c", "sodium_hydroxide", "ph", 8.0, 80, "mg/L")])
    raw["seasons"] = ["winter", "summer"]
    raw["waters"][0]["analyses"]["summer"] = plant.sheet("well", ph=7.6)
    scenario = plant.read(raw)
    dose = only(quantities(scenario))
    rates = [float(evaluate(scenario, season=season).dosing["c"].pump_rate) for season in raw["seasons"]]
    assert dose.lowest_rate == pytest.approx(min(rates))
    assert dose.highest_rate == pytest.approx(max(rates))
    assert dose.turndown == pytest.approx(max(rates) / min(rates))
    assert dose.turndown > 1.5


def test_a_pump_that_stands_still_in_a_season_has_no_turndown(plant):
    """No ratio to zero; a note says so."""
    raw = plant.dict({"well": 100}, [plant.held("c", "sodium_hydroxide", "ph", 7.6, 80, "mg/L")])
    raw["seasons"] = ["winter", "summer"]
    raw["waters"][0]["analyses"]["summer"] = plant.sheet("well", ph=7.9)
    made = quantities(plant.read(raw))
    assert np.isnan(only(made).turndown)
    assert any("stands still" in note.text for note in made.notes)


def test_solids_of_alum_are_its_hydroxide(plant):
    """30 mg/L of alum is 2.724 mg/L Al; what does not stay dissolved makes 2.89 mg of hydroxide a mg."""
    scenario = plant({"well": 100}, [plant.dosed("alum", "aluminium_sulfate", 30, "mg/L")])
    made = quantities(scenario)
    (solid,) = made.solids
    left = float(evaluate(scenario).readout("dissolved_aluminium"))
    assert solid.name == "Aluminium hydroxide"
    assert solid.concentration == pytest.approx((2.7238 - left) * 2.8910, rel=HAND)
    assert solid.kg_per_day == pytest.approx(solid.concentration * 24, rel=HAND)
    assert made.solids_kg_per_day == pytest.approx(solid.kg_per_day)
    assert any("turbidity" in note.text for note in made.notes)


def test_softening_sludge_is_counted_by_solid():
    """Quartz: calcium carbonate of the softened part, in kg a day of the whole flow."""
    scenario = open_scenario(shipped()["quartz"])
    (solid,) = quantities(scenario).solids
    assert (solid.key, solid.name) == ("calcite", "Calcium carbonate")
    lost = float(evaluate(scenario).readout("calcium")) - 118 - 0.85 * 306 * 40.078 / 74.092
    assert solid.kg_per_day == pytest.approx(-lost * 100.086 / 40.078 * 18, rel=HAND)


def test_without_flow_only_the_cost_of_a_megalitre_is_known(plant):
    """And a note says why."""
    dose = plant.dosed("hypo", "sodium_hypochlorite", 1.2, "mg/L as Cl2", price=0.3)
    made = quantities(plant({"well": 100}, [dose], flow=None))
    assert made.cost_per_ml == pytest.approx(3.4615, rel=HAND)
    assert np.isnan(made.cost_per_day)
    assert np.isnan(only(made).rate)
    assert made.notes[0].text == "no flow is given: only amounts per ML are known"


def test_a_dry_product_has_no_pump_rate(plant):
    """Lime by weight; a tank of it says nothing, and a note says that."""
    made = quantities(
        plant({"well": 100}, [plant.dosed("lime", "calcium_oxide", 10, "mg/L")]), tanks={"lime": 4}
    )
    dose = only(made)
    assert np.isnan(dose.rate)
    assert np.isnan(dose.storage)
    assert dose.product_kg_per_day == pytest.approx(240 / 0.9, rel=HAND)
    assert any("a tank says nothing" in note.text for note in made.notes)


def test_a_missing_price_is_named(plant):
    """The cost of the others stands, with a note."""
    train = [
        plant.dosed("hypo", "sodium_hypochlorite", 1.2, "mg/L as Cl2", price=0.3),
        plant.dosed("caustic", "sodium_hydroxide", 10, "mg/L"),
    ]
    made = quantities(plant({"well": 100}, train))
    assert made.cost_per_ml == pytest.approx(3.4615, rel=HAND)
    assert "no price is entered for Sodium hydroxide: the cost is without it" in [n.text for n in made.notes]


def test_the_date_of_the_prices_is_asked_for(plant):
    """A price without a date is worth a word."""
    dose = plant.dosed("hypo", "sodium_hypochlorite", 1.2, "mg/L as Cl2", price=0.3)
    notes = quantities(plant({"well": 100}, [dose])).notes
    assert "the date of the prices is not given" in [note.text for note in notes]


@pytest.mark.parametrize(
    ("asked", "sentence"),
    [
        ({"tanks": {"lime": 3}}, r'tanks: "lime" is not a dose step in service'),
        ({"low_flow": 1200}, "flow: 1200 to 1000 m³/h does not hold the flow"),
        ({"high_flow": 500}, "flow: 1000 to 500 m³/h does not hold the flow"),
        ({"low_flow": 0}, "flow: 0 to 1000 m³/h does not hold the flow"),
    ],
)
def test_what_does_not_fit_is_one_sentence(hypo, asked, sentence):
    """Tanks of no dose, and flow ranges beside the flow."""
    with pytest.raises(ScenarioError, match=f"^{sentence}"):
        quantities(hypo, **asked)


def test_plain_data_hold_none_for_what_is_not_known(hypo):
    """Figures by name."""
    data = quantities(hypo).to_dict()
    assert data["doses"][0]["rate"] == pytest.approx(9.6154, rel=HAND)
    assert data["doses"][0]["storage"] is None


def test_the_scenario_says_tanks_and_the_range_of_flows(plant):
    """5 m³ and 15 to 36 ML/d around 24 ML/d: 21.67 days, 6.01 to 14.42 L/h, a turndown of 2.4."""
    dose = plant.dosed("hypo", "sodium_hypochlorite", 1.2, "mg/L as Cl2", tank=5)
    made = quantities(
        plant({"well": 100}, [dose], low_flow={"value": 15, "unit": "ML/d"},
              high_flow={"value": 1500, "unit": "m³/h"})
    )  # fmt: skip
    found = only(made)
    assert (made.low_flow, made.high_flow) == (pytest.approx(625), pytest.approx(1500))
    assert (found.tank, found.storage) == (5, pytest.approx(21.667, rel=HAND))
    assert found.lowest_rate == pytest.approx(9.6154 * 15 / 24, rel=HAND)
    assert found.highest_rate == pytest.approx(9.6154 * 36 / 24, rel=HAND)
    assert found.turndown == pytest.approx(2.4, rel=HAND)


def test_a_range_that_the_flow_has_left_is_widened(plant):
    """The flow is turned beyond the range that was entered: the pumps must follow it all the same."""
    made = quantities(
        plant({"well": 100}, low_flow={"value": 30, "unit": "ML/d"}, high_flow={"value": 36, "unit": "ML/d"})
    )
    assert (made.low_flow, made.high_flow) == (pytest.approx(1000), pytest.approx(1500))


def test_the_rows_of_a_spreadsheet_have_every_figure(plant):
    """A line a dose, their sum, and below them the solids; what is not known is an empty cell."""
    alum = plant.dosed("alum", "aluminium_sulfate", 30, "mg/L", price=0.2)
    clear = {"id": "clear", "step": "settle", "residual": 1000}
    made = quantities(plant({"river": 100}, [alum, clear], currency="credits", price_date="2026-03"))
    heading, dose, every, _, below, *solids = made.table()
    assert len(dose) == len(every) == len(heading)
    named = dict(zip(heading, dose, strict=True))
    assert named["Active [kg/d]"] == pytest.approx(720, rel=HAND)
    assert named["Tank [m³]"] is None and named["Prices of"] == "2026-03"
    assert named["Per ML [credits]"] == dict(zip(heading, every, strict=True))["Per ML [credits]"]
    assert below[0] == "Dry solids formed" and solids[0][0] == "Aluminium hydroxide"
