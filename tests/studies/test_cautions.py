"""Cautions, and the tests that a result still needs."""

import re

import pytest

from explorer.scenario.evaluate import evaluate
from explorer.scenario.files import open_scenario
from explorer.scenario.shipped import shipped
from explorer.studies.cautions import EXCLUDED, hazards, next_tests, standing_cautions


def asked_of(scenario) -> str:
    return "\n".join(f"{test.what} ({test.why})" for test in next_tests(scenario, evaluate(scenario)))


def test_cautions_go_with_every_result(plant):
    """Local codes, the regulator, licensed practice; certified products where somebody drinks the water."""
    said = " ".join(standing_cautions(plant({"river": 100})))
    for word in ("estimates", "licensed", "Local codes", "regulator's approval", "certified"):
        assert word in said
    assert "certified" not in " ".join(standing_cautions(plant({"river": 100}, potable=False)))
    assert not re.search(r"\bsafe\b|compliant", said)


def test_what_is_left_out_is_said():
    """Kinetics, lead and copper, by-products, biology."""
    assert {"Kinetics", "Lead and copper", "By-products and decay", "Biology"} <= {
        what for what, _ in EXCLUDED
    }


def test_hazards_of_each_chemical_once_with_all_its_places(plant):
    """In the order of the train; steps out of service store nothing."""
    scenario = plant(
        {"river": 100},
        [
            plant.dosed("first", "sodium_hydroxide", 8, "mg/L", name="First caustic"),
            plant.dosed("hypo", "sodium_hypochlorite", 1, "mg/L as Cl2"),
            plant.dosed("last", "sodium_hydroxide", 2, "mg/L", name="Last caustic"),
            plant.dosed("acid", "hydrochloric_acid", 2, "mg/L", on=False),
        ],
    )
    found = hazards(scenario, evaluate(scenario))
    assert [(one.chemical, one.steps) for one in found] == [
        ("Sodium hydroxide", ("First caustic", "Last caustic")),
        ("Sodium hypochlorite", ("Sodium hypochlorite",)),
    ]
    assert any("chlorine gas" in caution for caution in found[1].cautions)


@pytest.mark.parametrize("name", shipped())
def test_every_scenario_ends_in_tests_with_real_material(name):
    """Whatever is calculated, pipe or equipment has the last word."""
    said = asked_of(open_scenario(shipped()[name]))
    assert "Coupons" in said


def test_tests_follow_from_what_is_in_the_plant():
    """Coagulant, weak buffer and chlorine in Moss; a contactor in Dune; chloramine in Harbor."""
    moss, dune, harbor = (asked_of(open_scenario(shipped()[name])) for name in ("moss", "dune", "harbor"))
    assert "Jar tests" in moss and "low ionic strength" in moss and "Chlorine demand" in moss
    assert "what the phosphate does" in moss
    assert "Pilot run" in dune and "Jar tests" not in dune and "Bench blends" not in dune
    assert "chloramine" in harbor and "Bench blends of Harbor Transfer and Pebble Wells" in harbor


def test_a_doubtful_analysis_asks_for_a_new_one():
    """With its charge balance and what is allowed."""
    said = asked_of(open_scenario(shipped()["faulty_analyses"]))
    assert "A new, complete analysis of Granite, calcium entered as hardness" in said
    assert "+35.0 %" in said


def test_what_was_assumed_of_a_water_asks_to_be_measured(plant):
    """By its name; products and equipment are no measurements."""
    raw = plant.dict({"river": 100}, [plant.dosed("caustic", "sodium_hydroxide", 8, "mg/L")])
    silica = {"value": 5, "unit": "mg/L as SiO2", "assumed": True}
    raw["waters"][0]["analyses"]["winter"] = plant.sheet("river", silica=silica)
    said = asked_of(plant.read(raw))
    assert "silica of River" in said and "strength" not in said
