"""Held doses: solved to the readout, kept under their ceiling, honest where they cannot be met."""

import numpy as np
import pytest

from explorer.scenario.evaluate import evaluate

SHARES = np.linspace(0, 100, 11)
HELD_PH = 1e-6


@pytest.mark.parametrize(
    ("chemical", "goal", "unit", "ceiling"),
    [
        ("sodium_hydroxide", 8.3, "mg/L", 80),
        ("calcium_hydroxide", 8.3, "mg/L", 80),
        ("sodium_carbonate", 8.3, "mg/L", 900),
        ("carbon_dioxide", 6.8, "mg/L", 300),
        ("sulfuric_acid", 6.8, "mg/L", 300),
        ("hydrochloric_acid", 6.8, "mg/L as product", 800),
        ("phosphoric_acid", 6.5, "mg/L as P", 300),
    ],
)
def test_a_held_ph_is_met_with_any_chemical(plant, chemical, goal, unit, ceiling):
    """Whatever the chemical moves (alkalinity, carbon, ionic strength), the pH comes out to 1e-6."""
    scenario = plant({"river": 50, "well": 50}, [plant.held("step", chemical, "ph", goal, ceiling, unit)])
    outcome = evaluate(scenario, {"waters.well.share": SHARES})
    met = outcome.dosing["step"].met
    assert met[2:].all()
    assert outcome.readout("ph")[met] == pytest.approx(goal, abs=HELD_PH)


def test_a_held_dose_is_the_fixed_dose_that_gives_the_same_ph(plant):
    """Dosing the amount that the hold found reproduces its pH."""
    hold = plant({"well": 100}, [plant.held("caustic", "sodium_hydroxide", "ph", 8.2, 60, "mg/L")])
    found = float(evaluate(hold).doses["caustic"][0])
    fixed = plant({"well": 100}, [plant.dosed("caustic", "sodium_hydroxide", found, "mg/L")])
    assert evaluate(fixed).readout("ph") == pytest.approx(8.2, abs=HELD_PH)


@pytest.mark.parametrize(
    ("readout", "goal", "chemical", "unit"),
    [
        ("alkalinity", 300.0, "sodium_bicarbonate", "mg/L"),
        ("calcium", 130.0, "calcium_chloride", "mg/L"),
        ("ccpp", 20.0, "sodium_hydroxide", "mg/L"),
        ("si_calcite", 0.5, "calcium_hydroxide", "mg/L"),
        ("free_chlorine", 0.7, "sodium_hypochlorite", "mg/L as Cl2"),
        ("larson_ratio", 0.5, "sodium_chloride", "mg/L"),
    ],
)
def test_any_readout_can_be_held(plant, readout, goal, chemical, unit):
    """Not only pH: totals, saturation, precipitation potential and ratios too."""
    outcome = evaluate(plant({"well": 100}, [plant.held("step", chemical, readout, goal, 200, unit)]))
    assert outcome.readout(readout) == pytest.approx(goal, abs=1e-6 * max(1.0, abs(goal)))


def test_free_chlorine_is_held_beyond_the_breakpoint(plant):
    """With ammonia in the water the hold passes the breakpoint to leave the wanted residual."""
    raw = plant.dict(
        {"well": 100}, [plant.held("hypo", "sodium_hypochlorite", "free_chlorine", 0.5, 20, "mg/L as Cl2")]
    )
    raw["waters"][0]["analyses"]["winter"] = plant.sheet("well", ammonia=0.5)
    outcome = evaluate(plant.read(raw))
    assert outcome.readout("free_chlorine") == pytest.approx(0.5, abs=1e-6)
    # 7.59 mg Cl2 per mg N at the breakpoint (common practice 7.6), and the residual.
    assert float(outcome.doses["hypo"][0]) == pytest.approx(0.5 * 7.59 + 0.5, abs=0.01)


def test_a_hold_beyond_its_ceiling_stays_there_and_says_so(plant):
    """The dose stops at the ceiling, the pH is the one really reached, a note counts the points."""
    scenario = plant(
        {"river": 50, "well": 50}, [plant.held("caustic", "sodium_hydroxide", "ph", 8.3, 20, "mg/L")]
    )
    outcome = evaluate(scenario, {"waters.well.share": np.array([20.0, 100.0])})
    assert outcome.dosing["caustic"].met.tolist() == [True, False]
    assert outcome.doses["caustic"][0][1] == 20
    assert 7.25 < outcome.readout("ph")[1] < 8.29
    (note,) = [note for note in outcome.notes if note.where == "train.caustic"]
    assert note.level == "caution"
    assert "cannot be brought to 8.30" in note.text
    assert "1 of 2 points" in note.text


def test_a_hold_that_is_passed_without_a_dose_doses_nothing(plant):
    """Caustic cannot lower a pH: no dose, and a note."""
    outcome = evaluate(
        plant({"river": 100}, [plant.held("caustic", "sodium_hydroxide", "ph", 8.0, 20, "mg/L")])
    )
    assert float(outcome.doses["caustic"][0]) == 0
    assert outcome.readout("ph") == pytest.approx(8.6, abs=1e-8)
    assert any("is above 8.00 without any of it" in note.text for note in outcome.notes)


def test_goal_and_ceiling_are_dials(plant):
    """A sweep over the held pH gives the titration curve of the water."""
    scenario = plant({"well": 100}, [plant.held("caustic", "sodium_hydroxide", "ph", 8.0, 200, "mg/L")])
    goals = np.linspace(7.5, 10, 6)
    outcome = evaluate(scenario, {"train.caustic.hold.value": goals})
    assert outcome.readout("ph") == pytest.approx(goals, abs=HELD_PH)
    assert (np.diff(outcome.doses["caustic"][0]) > 0).all()
    low = evaluate(scenario, {"train.caustic.hold.ceiling": np.array([5.0, 200.0])})
    assert low.dosing["caustic"].met.tolist() == [False, True]


def test_a_hold_behind_exhausted_alkalinity_finds_its_dose(plant):
    """The search passes through waters without enough alkalinity to the one that has."""
    train = [
        plant.dosed("alum", "aluminium_sulfate", 60, "mg/L"),
        plant.held("caustic", "sodium_hydroxide", "ph", 6.3, 60, "mg/L"),
    ]
    outcome = evaluate(plant({"moor": 100}, train))
    assert outcome.readout("ph") == pytest.approx(6.3, abs=HELD_PH)


def test_a_coagulant_can_hold_a_ph(plant):
    """Alum dosed down to pH 6.8: the floc takes the alkalinity."""
    train = [plant.held("alum", "aluminium_sulfate", "ph", 6.8, 400, "mg/L")]
    outcome = evaluate(plant({"well": 100}, train))
    assert outcome.readout("ph") == pytest.approx(6.8, abs=HELD_PH)


def test_a_point_without_water_has_no_dose(plant):
    """Where the analysis is impossible there is nothing to dose into: nan, not the ceiling."""
    scenario = plant({"river": 100}, [plant.held("caustic", "sodium_hydroxide", "ph", 9.0, 20, "mg/L")])
    outcome = evaluate(scenario, {"waters.river.analysis.ph": np.array([8.6, 12.0])})
    assert np.isfinite(outcome.doses["caustic"][0]).tolist() == [True, False]
    assert outcome.reasons()[1] == "no water has the entered analysis"


def test_a_ceiling_far_beyond_all_chemistry_does_no_harm(plant):
    """With a ceiling at which no equilibrium exists the dose is found all the same."""
    train = [plant.held("caustic", "sodium_hydroxide", "ccpp", 20.0, 1e9, "mg/L")]
    outcome = evaluate(plant({"river": 50, "well": 50}, train), {"waters.well.share": SHARES})
    assert outcome.readout("ccpp") == pytest.approx(20.0, abs=1e-5)


def test_a_readout_that_only_a_dose_brings_into_being_can_be_held(plant):
    """Without calcium there is no saturation index to start from; enough calcium chloride makes one."""
    raw = plant.dict({"well": 100}, [plant.held("salt", "calcium_chloride", "si_calcite", 0.0, 900, "mg/L")])
    raw["waters"][0]["analyses"]["winter"] = plant.sheet("well", calcium=None, ph=7.6)
    assert evaluate(plant.read(raw)).readout("si_calcite") == pytest.approx(0.0, abs=1e-6)


def test_a_hold_of_something_that_cannot_be_says_so(plant):
    """Acid never raises the Langelier index, and in the end there is none: no dose, and the note."""
    train = [plant.held("acid", "sulfuric_acid", "langelier_index", 2.0, 1000, "mg/L")]
    outcome = evaluate(plant({"well": 100}, train))
    assert float(outcome.doses["acid"][0]) == 0
    assert any("is below 2.00 without any of it" in note.text for note in outcome.notes)
