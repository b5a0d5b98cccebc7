"""What a result rests on: assumptions and where the data are from."""

import pytest

from explorer.scenario.evaluate import evaluate
from explorer.scenario.files import open_scenario
from explorer.scenario.shipped import shipped
from explorer.studies.basis import ASSUMED, COMMON_PRACTICE, assumptions, held_values, provenance


def register(scenario) -> dict[str, tuple[str, str, str, str]]:
    return {
        found.what: (found.value, found.unit, found.basis, found.source)
        for found in assumptions(scenario, evaluate(scenario))
    }


def with_entries(plant, **entries):
    """A river water with some entries of its analysis changed."""
    raw = plant.dict({"river": 100})
    raw["waters"][0]["analyses"]["winter"] = plant.sheet("river", **entries)
    return plant.read(raw)


def test_an_assumed_entry_is_named_with_its_note(plant):
    """Value and unit as entered; the note says why."""
    silica = {"value": 5, "unit": "mg/L as SiO2", "assumed": True, "note": "typical of the region"}
    found = register(with_entries(plant, silica=silica))
    assert found["Silica of River"] == ("5", "mg/L as SiO2", "typical of the region", ASSUMED)


def test_a_non_detect_counts_as_half_its_limit(plant):
    """Common practice, and said so."""
    found = register(with_entries(plant, iron={"below": 0.02, "unit": "mg/L"}))
    basis = "half the limit of detection 0.02"
    assert found["Iron of River"] == ("0.01", "mg/L", basis, COMMON_PRACTICE)


def test_ions_that_are_not_in_the_analysis_count_as_none(plant):
    """They are listed, not passed over."""
    found = register(with_entries(plant, sulfate=None, nitrate=None))
    assert found["Sulfate, nitrate of River"] == ("0", "mg/L", "not in the analysis", ASSUMED)


def test_a_reading_temperature_that_nobody_stated(plant):
    """That of the water is used; a stated one is no assumption."""
    assert register(plant({"river": 100}))["Reading temperature of pH of River"][:2] == ("4", "°C")
    stated = register(with_entries(plant, ph={"value": 8.6, "read_at": 20}))
    assert not any(what.startswith("Reading temperature") for what in stated)


def test_the_usual_product_stands_in_for_an_entered_one(plant):
    """Strength and density with their sources; a strength that was entered is none."""
    dose = plant.dosed("caustic", "sodium_hydroxide", 8, "mg/L")
    found = register(plant({"river": 100}, [dose]))
    assert found["Product strength of Sodium hydroxide"][:3] == ("50", "%", "usual product, nothing entered")
    assert found["Density of Sodium hydroxide"][:3] == ("1.53", "kg/L", "at 50 %")
    entered = register(plant({"river": 100}, [{**dose, "strength": 25}]))
    assert "Product strength of Sodium hydroxide" not in entered
    assert entered["Density of Sodium hydroxide"][2] == "at 25 %"


def test_settings_left_as_they_are_count_where_they_matter(plant):
    """The air of a tower that goes part of the way; not where the carbon dioxide left is stated."""
    tower = {"id": "tower", "step": "air", "approach": 80}
    found = register(plant({"well": 100}, [tower]))
    assert found["CO2 in the air of Air contact"][:2] == ("420", "ppm")
    assert found["Altitude of Air contact"][:2] == ("0", "m")
    assert "CO2 in the air of Air contact" not in register(plant({"well": 100}, [{**tower, "co2_ppm": 400}]))
    stated = {"id": "tower", "step": "air", "co2": 3}
    assert not any("air of" in what for what in register(plant({"well": 100}, [stated])))


@pytest.mark.parametrize(("settle", "named"), [({}, False), ({"residual": 10}, True), ({"full": True}, True)])
def test_solids_are_assumed_only_where_some_may_form(plant, settle, named):
    """A clarifier that only takes floc says nothing of calcite."""
    found = register(plant({"well": 100}, [{"id": "clarifier", "step": "settle", **settle}]))
    assert ("Solids of Settling and filtration" in found) is named
    assert ("Settling and filtration" in found["Precipitation"][2]) is named


def test_a_closed_plant_says_so(plant):
    """Silent defaults are none."""
    assert register(plant({"well": 100}))["Contact with air"][2] == "no gas comes or goes"
    tower = {"id": "tower", "name": "Tower", "step": "air", "approach": 80}
    assert register(plant({"well": 100}, [tower]))["Contact with air"][2] == "except in Tower"


def test_the_solubility_of_floc_is_that_of_one_solid(plant):
    """Published values differ by orders of magnitude, so the one taken is named."""
    alum = plant.dosed("alum", "aluminium_sulfate", 30, "mg/L")
    found = register(plant({"river": 100}, [alum]))
    assert found["Solubility of aluminium floc"][0] == "10.8"
    assert "Solubility of iron floc" not in found


def test_steps_and_waters_out_of_service_assume_nothing(plant):
    """Only what runs counts."""
    dose = plant.dosed("caustic", "sodium_hydroxide", 8, "mg/L", on=False)
    raw = plant.dict({"river": 100, "well": 0}, [dose])
    raw["waters"][1]["on"] = False
    found = register(plant.read(raw))
    assert not any("Sodium hydroxide" in what or "Well" in what for what in found)


def test_every_analysis_of_every_season_has_a_balance_and_a_source():
    """Laboratory, date, file and person as entered."""
    found = list(provenance(open_scenario(shipped()["amber"])))
    assert [(one.water, one.season) for one in found] == [
        (water, season) for season in ("winter", "summer") for water in ("Fern River", "Granite Wellfield")
    ]
    assert {one.lab for one in found} == {"invented"}
    assert all(one.before == one.after and one.closed_with == "" for one in found)
    assert found[0].before.percent == pytest.approx(-1.0, abs=0.1)


def test_a_closed_balance_is_shown_before_and_after(plant):
    """With the ion that was adjusted, and by how much."""
    raw = plant.dict({"river": 100})
    raw["waters"][0]["analyses"]["winter"]["close_with"] = "sodium"
    (found,) = provenance(plant.read(raw))
    assert found.closed_with == "sodium"
    assert found.before.percent == pytest.approx(-1.0, abs=0.1)
    assert found.after.percent == pytest.approx(0.0, abs=1e-6)
    assert any("to close the charge balance" in remark for remark in found.remarks)


# ---- holds -------------------------------------------------------------------------------------------------


def held(plant, holds, train=()):
    scenario = plant({"river": 60, "well": 40}, list(train), holds=holds)
    outcome = evaluate(scenario)
    return outcome, held_values(scenario, outcome)


def test_every_hold_says_what_it_takes_within_which_limits(plant):
    """Doses of steps and other dials alike, doses first."""
    caustic = plant.held("caustic", "sodium_hydroxide", "ph", 8.2, 40, "mg/L")
    share = {"waters.well.share": {"readout": "nitrate", "value": 18, "stage": "blend", "low": 10}}
    outcome, (dose, blend) = held(plant, share, [caustic])
    assert (dose.dial, dose.unit, dose.limits) == ("Dose of Sodium hydroxide", "mg/L", "0 to 40")
    assert (dose.readout, dose.goal, dose.where) == ("pH", "8.20", "behind Sodium hydroxide")
    assert float(dose.takes) == pytest.approx(float(outcome.dosing["caustic"].value), rel=1e-3)
    assert (blend.dial, blend.limits, blend.where) == ("Share of Well", "10 to 100", "blend")
    assert (blend.goal, blend.state, blend.met) == ("18.0 mg/L", "met", True)
    assert float(blend.takes) == pytest.approx(float(outcome.stands("waters.well.share")), rel=1e-3)


def test_a_hold_that_cannot_be_reached_names_the_best_that_can(plant):
    """The value where the dial comes nearest."""
    share = {"waters.well.share": {"readout": "nitrate", "value": 90}}
    outcome, (hold,) = held(plant, share)
    assert not hold.met
    assert hold.state == f"cannot be reached: {float(outcome.readout('nitrate')):.1f} at best"


def test_a_hold_whose_place_is_out_of_service_rests(plant):
    """The dial stands as entered."""
    tower = {"id": "tower", "step": "air", "approach": 50, "on": False}
    share = {"waters.well.share": {"readout": "ph", "value": 8, "stage": "tower"}}
    _, (hold,) = held(plant, share, [tower])
    assert (hold.takes, hold.state) == ("40", "rests: out of service")
