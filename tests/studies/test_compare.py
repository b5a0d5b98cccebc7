"""Compare: options, seasons and sources off side by side, only what differs."""

import numpy as np
import pytest

from explorer.scenario.editing import keep_option, move_step
from explorer.scenario.errors import ScenarioError
from explorer.scenario.evaluate import evaluate
from explorer.scenario.files import open_scenario
from explorer.scenario.shipped import shipped
from explorer.studies.compare import (
    HELD,
    INPUTS,
    READOUTS_SECTION,
    all_cases,
    compare,
    current_case,
    option_cases,
    overlay,
    season_cases,
    source_off_cases,
)

THREE = {"river": 50.0, "well": 30.0, "transfer": 20.0}


def dosed(plant, value=5.0, **more):
    return [plant.dosed("caustic", "sodium_hydroxide", value, "mg/L", **more)]


def with_option(plant, change, **parts):
    """A plant with one option that is the plant after a change."""
    scenario = plant({"river": 60, "well": 40}, dosed(plant), **parts)
    other = scenario.copy()
    change(other)
    keep_option(other, "Changed")
    scenario.options = other.options
    return scenario


def rows(made, section=INPUTS):
    return {row.key: row for row in made.section(section)}


# ---- cases -------------------------------------------------------------------------------------------------


def test_options_have_letters_in_their_order():
    """A, B, C as kept."""
    found = option_cases(open_scenario(shipped()["harbor"]))
    assert [case.title for case in found] == ["A Wells to chloramine", "B Import through breakpoint"]


def test_an_option_is_looked_at_in_the_season_of_the_scenario():
    """Like with like, where the option has that season."""
    scenario = open_scenario(shipped()["moss"])
    scenario.season = "summer"
    assert [case.season for case in option_cases(scenario)] == ["summer"]


def test_the_other_seasons_are_cases():
    """All but the one that is looked at."""
    scenario = open_scenario(shipped()["amber"])
    assert [case.name for case in season_cases(scenario)] == ["summer"]
    assert [case.name for case in season_cases(scenario, "summer")] == ["winter"]


def test_each_source_is_taken_off_in_turn(plant):
    """The others make up the flow in proportion: 50 and 30 of 80, 50 and 20 of 70, 30 and 20 of 50."""
    found = source_off_cases(plant(THREE))
    assert [case.name for case in found] == ["River off", "Well off", "Transfer off"]
    chloride = [float(evaluate(case.scenario).readout("chloride")) for case in found]
    river, well, transfer = 15, 38, 96
    assert chloride == pytest.approx(
        [0.6 * well + 0.4 * transfer, (5 * river + 2 * transfer) / 7, (5 * river + 3 * well) / 8]
    )


def test_the_scenario_itself_stays_as_it_is(plant):
    """Cases are copies."""
    scenario = plant(THREE)
    before = scenario.to_dict()
    source_off_cases(scenario)
    assert scenario.to_dict() == before


def test_with_flows_of_their_own_the_plant_gives_less(plant):
    """No share to redistribute; the note says so."""
    raw = plant.dict({"river": 60, "well": 40}, flow=None)
    for water, flow in zip(raw["waters"], (12, 8), strict=True):
        del water["share"]
        water["flow"] = {"value": flow, "unit": "ML/d"}
    first, _ = source_off_cases(plant.read(raw))
    assert first.note == "the others keep their flows"
    assert float(evaluate(first.scenario).stage().flow) == pytest.approx(8 / 0.024)


def test_the_only_source_cannot_be_off(plant):
    """One water, or one that alone flows: no cases."""
    assert source_off_cases(plant({"well": 100})) == []
    assert source_off_cases(plant({"well": 100, "river": 0})) == []


# ---- rows --------------------------------------------------------------------------------------------------


def test_equal_cases_have_no_rows(plant):
    """Nothing differs, nothing is shown."""
    assert compare([current_case(plant(THREE)), current_case(plant(THREE))]).rows == ()


def test_a_turned_dial_is_the_only_input_row(plant):
    """Label, unit and both values; untouched dials are not listed."""

    def more(scenario):
        scenario.step("caustic").dose = type(scenario.step("caustic").dose)(8, "mg/L")

    made = compare(all_cases(with_option(plant, more))[:2])
    (row,) = made.section(INPUTS)
    assert (row.key, row.label, row.unit) == ("train.caustic.dose", "Dose of Sodium hydroxide", "mg/L")
    assert row.texts == ("5", "8")
    assert row.values == (5, 8)


def test_another_unit_is_another_input(plant):
    """The same figure in another unit stands with its unit."""

    def change(scenario):
        scenario.step("caustic").dose = type(scenario.step("caustic").dose)(5, "mmol/L")

    row = rows(compare(all_cases(with_option(plant, change))[:2]))["train.caustic.dose"]
    assert row.unit == ""
    assert row.texts == ("5 mg/L", "5 mmol/L")


def test_words_are_compared_as_well_as_numbers(plant):
    """Another chemical, a step out of service."""

    def change(scenario):
        scenario.step("caustic").chemical = "potassium_hydroxide"
        scenario.waters[1].on = False

    found = rows(compare(all_cases(with_option(plant, change))[:2]))
    assert found["caustic.chemical"].texts == ("Sodium hydroxide", "Potassium hydroxide")
    assert found["waters.well.on"].texts == ("yes", "no")
    assert found["waters.well.share"].texts == ("40", "—")


def test_a_step_of_one_case_only_shows_that_and_its_dose(plant):
    """Not its strength and its other settings."""

    def change(scenario):
        scenario.train = []

    found = rows(compare(all_cases(with_option(plant, change))[:2]))
    assert set(found) == {"caustic.on", "train.caustic.dose"}
    assert found["caustic.on"].texts == ("yes", "—")


def test_another_order_of_the_same_steps_is_a_row(plant):
    """Order matters where something leaves, so it shows."""
    train = [*dosed(plant), {"id": "tower", "step": "air", "approach": 80}]
    scenario = plant({"well": 100}, train)
    other = scenario.copy()
    move_step(other, "tower", -1)
    (row,) = compare([current_case(scenario), current_case(other)]).section(INPUTS)
    assert row.label == "Order of steps"
    assert row.texts == ("Sodium hydroxide, Air contact", "Air contact, Sodium hydroxide")


def test_seasons_differ_in_their_analyses():
    """The season and every entry of the river that is not the same; the well is the same all year."""
    made = compare([current_case(s := open_scenario(shipped()["amber"])), *season_cases(s)])
    found = rows(made)
    assert found["season"].texts == ("winter", "summer")
    assert found["waters.river.analysis.temperature"].texts == ("4", "19")
    assert not [key for key in found if key.startswith("waters.well")]


def test_held_doses_are_results_not_inputs(plant):
    """The dose that holds pH 8 in the blend and without the well."""
    scenario = plant({"river": 60, "well": 40}, [plant.held("c", "sodium_hydroxide", "ph", 8.0, 80, "mg/L")])
    made = compare(all_cases(scenario))
    (row,) = made.section(HELD)
    doses = [float(evaluate(case.scenario).dosing["c"].value) for case in made.cases]
    assert row.values == pytest.approx(doses)
    assert "train.c.dose" not in rows(made)


def test_readouts_with_a_target_come_first_with_their_status(plant):
    """pH in range with the well, above without it."""
    targets = [{"readout": "ph", "low": 7.0, "high": 8.0}]
    made = compare(all_cases(plant({"river": 60, "well": 40}, targets=targets)))
    first = made.section(READOUTS_SECTION)[0]
    assert (first.key, first.label) == ("ph", "pH")
    assert first.statuses == ("in range", "in range", "above")


def test_readouts_that_print_the_same_are_left_out(plant):
    """More caustic does not change calcium or the temperature."""

    def more(scenario):
        scenario.step("caustic").dose = type(scenario.step("caustic").dose)(8, "mg/L")

    keys = rows(compare(all_cases(with_option(plant, more))[:2]), READOUTS_SECTION).keys()
    assert {"ph", "alkalinity", "sodium"} <= keys
    assert not {"calcium", "temperature", "nitrate"} & keys


def test_the_ccpp_is_said_in_words(plant):
    """Dissolves or precipitates, never a bare sign."""
    made = compare(all_cases(plant({"river": 60, "well": 40})), ["ccpp"])
    (row,) = made.section(READOUTS_SECTION)
    assert [text.split()[0] for text in row.texts] == ["dissolves", "precipitates", "precipitates"]


def test_a_case_without_an_answer_keeps_its_place_and_its_reason(plant):
    """Alum that exhausts the water that remains: a dash, and why."""
    raw = plant.dict({"well": 60, "moor": 40}, [plant.dosed("alum", "aluminium_sulfate", 40, "mg/L")])
    made = compare(all_cases(plant.read(raw)), ["ph"])
    (row,) = made.section(READOUTS_SECTION)
    assert row.texts[1] == "—"
    assert row.values[1] is None
    assert made.problems == ("", "alkalinity exhausted: add alkali first", "")


def test_an_unknown_readout_is_refused(plant):
    """One sentence."""
    with pytest.raises(ScenarioError, match='readouts: "taste" is not a readout'):
        compare(all_cases(plant(THREE)), ["taste"])


def test_the_table_has_a_column_for_every_case():
    """Heading with the titles; plain data hold the same."""
    made = compare(all_cases(open_scenario(shipped()["juniper"])))
    table = made.table()
    assert table[0][3:] == [case.title for case in made.cases]
    assert {len(row) for row in table} == {3 + len(made.cases)}
    assert len(made.to_dict()["rows"]) == len(table) - 1


# ---- overlay -----------------------------------------------------------------------------------------------


def test_the_sweeps_of_all_cases_share_one_axis():
    """Dial and range of the scenario's own sweep; with either source off there is no share to sweep."""
    scenario = open_scenario(shipped()["amber"])
    found = overlay(all_cases(scenario), points=11)
    assert [case.title for case, _ in found] == ["As it stands", "summer"]
    for _, swept in found:
        assert swept.address == "waters.well.share"
        assert swept.x == pytest.approx(np.linspace(0, 100, 11))
    summer = evaluate(scenario, {"waters.well.share": 50.0}, "summer").readout("ph")
    assert found[1][1].outcome.readout("ph")[5] == pytest.approx(float(summer), abs=1e-9)


def test_a_held_dial_is_compared_by_what_it_came_to(plant):
    """Not by where it was entered; what it holds is an input like others."""
    fixed = plant(THREE)
    held = plant(THREE, holds={"waters.well.share": {"readout": "nitrate", "value": 12}})
    keep_option(held, "Now")
    fixed.options = held.options
    made = compare([current_case(fixed), *option_cases(fixed)])
    (row,) = made.section(HELD)
    assert row.key == "waters.well.share" and row.values[0] == 30
    assert row.values[1] == pytest.approx(float(evaluate(held).stands("waters.well.share")))
    inputs = {row.key: row.texts for row in made.section(INPUTS)}
    assert inputs["waters.well.share.holds"][1] == "Nitrate"
    assert "waters.well.share" not in inputs
