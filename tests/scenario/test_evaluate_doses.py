"""Doses: what they add, what they cost, and that order does not matter while nothing leaves."""

from itertools import permutations

import numpy as np
import pytest

from explorer.scenario.evaluate import evaluate

SAME_PH = 1e-9


def closed(plant):
    return [
        plant.dosed("soda", "sodium_carbonate", 12, "mg/L"),
        plant.dosed("gas", "carbon_dioxide", 8, "mg/L"),
        plant.dosed("acid", "phosphoric_acid", 1, "mg/L as P"),
        plant.dosed("fluoride", "fluorosilicic_acid", 0.7, "mg/L as F"),
    ]


def test_the_order_of_doses_does_not_matter_in_closed_water(plant):
    """Every order of four doses gives the same pH to 1e-9."""
    steps = closed(plant)
    found = [
        float(evaluate(plant({"river": 60, "well": 40}, list(order))).readout("ph"))
        for order in permutations(steps)
    ]
    assert found == pytest.approx([found[0]] * len(found), abs=SAME_PH)


def test_a_dose_in_two_halves_is_the_whole_dose(plant):
    """Half the caustic before and half after another chemical changes nothing."""
    gas = plant.dosed("gas", "carbon_dioxide", 8, "mg/L")
    whole = plant({"well": 100}, [plant.dosed("caustic", "sodium_hydroxide", 20, "mg/L"), gas])
    halves = [plant.dosed(name, "sodium_hydroxide", 10, "mg/L") for name in ("first", "second")]
    split = plant({"well": 100}, [halves[0], gas, halves[1]])
    assert evaluate(split).readout("ph") == pytest.approx(float(evaluate(whole).readout("ph")), abs=SAME_PH)


def test_a_dose_before_blending_counts_by_the_share(plant):
    """40 mg/L into a quarter of the flow is 10 mg/L into the blend."""
    raw = plant.dict({"river": 75, "well": 25})
    raw["waters"][1]["train"] = [plant.dosed("caustic", "sodium_hydroxide", 40, "mg/L")]
    before = evaluate(plant.read(raw))
    after = evaluate(
        plant({"river": 75, "well": 25}, [plant.dosed("caustic", "sodium_hydroxide", 10, "mg/L")])
    )
    assert before.readout("ph") == pytest.approx(float(after.readout("ph")), abs=SAME_PH)


@pytest.mark.parametrize(
    ("value", "unit"),
    [
        (20, "mg/L"),
        (20 / 0.5, "mg/L as product"),
        (20 / 39.997, "mmol/L"),
        (20 * 50.043 / 39.997, "mg/L as CaCO3"),
    ],
)
def test_units_of_a_dose_do_not_change_the_answer(plant, value, unit):
    """20 mg/L of NaOH as product of 50 %, in mmol/L or as CaCO3 is the same dose."""
    plain = evaluate(plant({"well": 100}, [plant.dosed("caustic", "sodium_hydroxide", 20, "mg/L")]))
    other = evaluate(plant({"well": 100}, [plant.dosed("caustic", "sodium_hydroxide", value, unit)]))
    assert other.readout("ph") == pytest.approx(float(plain.readout("ph")), abs=1e-4)


@pytest.mark.parametrize(
    ("chemical", "dose", "unit", "change"),
    [
        ("aluminium_sulfate", 30, "mg/L", -30 * 0.505),
        ("ferric_chloride", 10, "mg/L as Fe", -10 * 2.69),
        ("sodium_hydroxide", 10, "mg/L", 10 * 1.251),
        ("calcium_hydroxide", 10, "mg/L", 10 * 1.351),
        ("carbon_dioxide", 10, "mg/L", 0.0),
        ("sulfuric_acid", 10, "mg/L", -10 * 1.020),
        ("sodium_hypochlorite", 2, "mg/L as Cl2", 2 * 0.706),
        ("chlorine", 2, "mg/L as Cl2", -2 * 0.706),
        ("phosphoric_acid", 1, "mg/L as P", -1.62),
        ("fluorosilicic_acid", 1, "mg/L as F", -2.63),
    ],
)
def test_hand_check_of_alkalinity_per_dose(plant, chemical, dose, unit, change):
    """Alkalinity moves by the trade's factor, mg CaCO3 per mg; common practice, printed to three figures."""
    outcome = evaluate(plant({"well": 100}, [plant.dosed("step", chemical, dose, unit)]))
    moved = float(outcome.readout("alkalinity") - outcome.readout("alkalinity", "blend"))
    # Metal that stays dissolved has not taken its alkalinity: 5.56 mg/L per mg/L Al, 2.69 per mg/L Fe.
    dissolved = 5.56 * outcome.readout("dissolved_aluminium") + 2.69 * outcome.readout("dissolved_iron")
    assert moved == pytest.approx(change + float(dissolved), abs=0.004 * abs(change))


def test_strength_matters_to_a_dose_of_product_only(plant):
    """Half the strength halves a dose stated as product; a dose of active substance stays."""
    for unit, factor in (("mg/L as product", 0.5), ("mg/L", 1.0)):
        scenario = plant({"well": 100}, [plant.dosed("caustic", "sodium_hydroxide", 20, unit, strength=50)])
        full, half = (
            evaluate(scenario, {"train.caustic.strength": strength}).dosing["caustic"].moles
            for strength in (50.0, 25.0)
        )
        assert float(half) == pytest.approx(factor * float(full))


def test_use_pump_rate_and_cost_by_hand(plant):
    """20 mg/L NaOH into 1000 m³/h, 50 % and 1.525 kg/L: 480 kg/d, as product 960 kg/d and 26.2 L/h."""
    train = [plant.dosed("caustic", "sodium_hydroxide", 20, "mg/L", price=0.5)]
    outcome = evaluate(plant({"well": 100}, train))
    dose = outcome.dosing["caustic"]
    assert float(dose.active_use) == pytest.approx(480, rel=1e-9)
    assert float(dose.product_use) == pytest.approx(960, rel=1e-9)
    assert float(dose.pump_rate) == pytest.approx(20 * 1000 / (0.5 * 1.5253 * 1000), rel=1e-3)
    assert float(dose.cost_per_day) == pytest.approx(480, rel=1e-9)
    assert outcome.readout("cost") == pytest.approx(20, rel=1e-9)


def test_cost_of_a_treated_source_counts_by_its_share(plant):
    """Chemicals worth 20 per ML into a quarter of the flow cost 5 per ML of blend."""
    raw = plant.dict({"river": 75, "well": 25})
    raw["waters"][1]["train"] = [plant.dosed("caustic", "sodium_hydroxide", 20, "mg/L", price=0.5)]
    outcome = evaluate(plant.read(raw))
    assert outcome.readout("cost", "caustic") == pytest.approx(20)
    assert outcome.readout("cost", "blend") == pytest.approx(5)
    assert np.isnan(outcome.readout("cost", "river"))


def test_chlorine_and_ammonia_react_where_waters_meet(plant):
    """A chloraminated and a chlorinated water: the blend has what the stoichiometry leaves."""
    raw = plant.dict({"river": 50, "well": 50})
    raw["waters"][0]["analyses"]["winter"] = plant.sheet("river", monochloramine=2, ammonia=0.2)
    raw["waters"][1]["analyses"]["winter"] = plant.sheet("well", free_chlorine=0.8)
    outcome = evaluate(plant.read(raw))
    # 0.1 mg/L N of free ammonia in the blend takes 0.506 mg/L Cl2, more than the 0.4 there are.
    assert outcome.readout("free_chlorine", "blend") == pytest.approx(0, abs=1e-9)
    assert outcome.readout("monochloramine", "blend") == pytest.approx(1.0 + 0.4, abs=1e-3)
    assert outcome.readout("ammonia", "blend") == pytest.approx(0.1 - 0.4 / 5.062, abs=1e-3)
    assert any("kinetics" in note.text for note in outcome.notes)


def test_chlorine_doses_react_with_ammonia_in_the_water(plant):
    """1 mg/L N and 5.06 mg/L Cl2 make monochloramine; beyond 7.6 to 1 free chlorine is left."""
    raw = plant.dict({"well": 100}, [plant.dosed("hypo", "sodium_hypochlorite", 5.06, "mg/L as Cl2")])
    raw["waters"][0]["analyses"]["winter"] = plant.sheet("well", ammonia=1.0)
    outcome = evaluate(plant.read(raw), {"train.hypo.dose": np.array([5.06, 7.6, 8.6])})
    assert outcome.readout("monochloramine") == pytest.approx([5.06, 0, 0], abs=0.02)
    assert outcome.readout("free_chlorine") == pytest.approx([0, 0, 1.0], abs=0.02)


def test_basicity_turned_as_an_array_equals_the_product_at_each_value(plant):
    """A coagulant between two basicities is their mixture, exactly."""
    values = np.array([0.0, 30.0, 85.0])
    scenario = plant({"well": 100}, [plant.dosed("pac", "polyaluminium_chloride", 2, "mg/L as Al")])
    at_once = evaluate(scenario, {"train.pac.basicity": values})
    for position, basicity in enumerate(values):
        train = [plant.dosed("pac", "polyaluminium_chloride", 2, "mg/L as Al", basicity=float(basicity))]
        single = evaluate(plant({"well": 100}, train))
        assert at_once.readout("ph")[position] == pytest.approx(float(single.readout("ph")), abs=1e-8)


def test_a_price_without_a_product_strength_is_said(plant):
    """Cost needs the mass of product; where it is not known, the cost is left out and a note says so."""
    own = [{"id": "brine", "molar_mass": 58.44, "adds": {"sodium": 1, "chloride": 1}}]
    train = [plant.dosed("salt", "brine", 10, "mg/L", price=1.0)]
    outcome = evaluate(plant({"well": 100}, train, chemicals=own))
    assert np.isnan(outcome.readout("cost"))
    assert any("cost is not counted" in note.text for note in outcome.notes)


def test_exhausted_alkalinity_is_flagged_and_a_later_alkali_mends_it(plant):
    """Soft water with too much alum has no pH to print; with caustic behind it has one again."""
    alum = plant.dosed("alum", "aluminium_sulfate", 60, "mg/L")
    bare = evaluate(plant({"moor": 100}, [alum]))
    assert np.isnan(bare.readout("ph"))
    assert "alkalinity exhausted" in str(bare.reasons())
    mended = evaluate(plant({"moor": 100}, [alum, plant.dosed("caustic", "sodium_hydroxide", 22, "mg/L")]))
    assert np.isnan(mended.readout("ph", "alum"))
    assert 5.5 < float(mended.readout("ph")) < 9
