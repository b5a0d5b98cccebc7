"""Dials: every scalar input has an address, bounds and a unit, and can be turned in place."""

import pytest

from explorer.scenario.dials import dials, get_value, turn, turn_together
from explorer.scenario.errors import ScenarioError
from explorer.scenario.evaluate import evaluate

THREE = {"river": 50, "well": 30, "transfer": 20}


@pytest.fixture
def scenario(plant):
    raw = plant.dict(
        THREE,
        [
            plant.dosed("hypo", "sodium_hypochlorite", 1.2, "mg/L as Cl2", price=0.4),
            plant.held("caustic", "sodium_hydroxide", "ph", 8.0, 40, "mg/L"),
            plant.dosed("pac", "polyaluminium_chloride", 2, "mg/L as Al"),
            {
                "id": "contactor",
                "step": "side_stream",
                "fraction": 50,
                "train": [{"id": "bed", "step": "limestone", "approach": 90}],
            },
            {"id": "tower", "step": "air", "approach": 80},
            {"id": "heater", "step": "temperature", "temperature": {"value": 50, "unit": "°F"}},
        ],
    )
    raw["waters"][1]["train"] = [plant.dosed("lime", "calcium_hydroxide", 5, "mg/L")]
    raw["waters"][1]["analyses"]["winter"]["iron"] = {"below": 0.02, "unit": "mg/L"}
    return plant.read(raw)


def shares(scenario):
    return [water.share for water in scenario.waters]


@pytest.mark.parametrize(
    ("address", "value", "unit", "label"),
    [
        ("flow", 24, "ML/d", "Flow of the blend"),
        ("waters.well.share", 30, "%", "Share of Well"),
        ("waters.well.analysis.ph", 7.25, "", "pH of Well"),
        ("waters.well.analysis.calcium", 116, "mg/L", "Calcium of Well"),
        ("waters.well.analysis.iron", 0.01, "mg/L", "Iron of Well"),
        ("waters.well.train.lime.dose", 5, "mg/L", "Dose of Calcium hydroxide"),
        ("train.hypo.dose", 1.2, "mg/L as Cl2", "Dose of Sodium hypochlorite"),
        ("train.hypo.price", 0.4, "per kg", "Price of Sodium hypochlorite"),
        ("train.caustic.hold.value", 8.0, "", "pH held by Sodium hydroxide"),
        ("train.caustic.hold.ceiling", 40, "mg/L", "Ceiling of Sodium hydroxide"),
        ("train.caustic.strength", 50, "%", "Product strength of Sodium hydroxide"),
        ("train.pac.basicity", 50, "%", "Basicity of Polyaluminium chloride"),
        ("train.contactor.fraction", 50, "%", "Fraction of Side stream"),
        ("train.contactor.train.bed.approach", 90, "%", "Approach to saturation of Limestone contactor"),
        ("train.tower.co2_ppm", 420, "ppm", "CO2 in the air of Air contact"),
        ("train.heater.temperature", 50, "°F", "Temperature of Temperature"),
    ],
)
def test_every_input_is_a_dial(scenario, address, value, unit, label):
    """Address, value as entered, unit and a label in plain words."""
    dial = dials(scenario)[address]
    assert (dial.value, dial.unit, dial.label) == (value, unit, label)
    assert dial.low <= dial.value
    assert dial.high is None or dial.value <= dial.high
    assert dial.step > 0


def test_a_value_that_is_not_entered_is_no_dial(scenario):
    """No price entered, no dial for it; a held dose has no dose to turn."""
    found = dials(scenario)
    assert "train.caustic.price" not in found
    assert "train.caustic.dose" not in found
    assert "waters.well.analysis.boron" not in found


def test_bounds_come_in_the_unit_of_the_dial(scenario):
    """0 to 60 °C is 32 to 140 °F."""
    dial = dials(scenario)["train.heater.temperature"]
    assert (dial.low, dial.high) == pytest.approx((32, 140))


def test_every_dial_turned_to_its_own_value_leaves_the_results_alone(scenario):
    """Turning and evaluating agree with giving the dial to the evaluation."""
    for address, dial in dials(scenario).items():
        value = dial.value * 1.01 if dial.high is None or dial.value * 1.01 <= dial.high else dial.value
        turned = scenario.copy()
        turn(turned, address, value)
        assert get_value(turned, address) == pytest.approx(value, rel=1e-12), address
        there = float(evaluate(turned).readout("ph"))
        assert there == pytest.approx(float(evaluate(scenario, {address: value}).readout("ph")), abs=1e-8), (
            address
        )


def test_turning_keeps_the_unit_and_writes_whole_numbers_plainly(scenario):
    """60.0 is stored as 60, in the unit as entered."""
    turn(scenario, "train.hypo.dose", 2.0)
    assert scenario.step("hypo").to_dict()["dose"] == {"value": 2, "unit": "mg/L as Cl2"}


def test_a_turned_scenario_can_be_saved_and_read(scenario, plant):
    """Shares in proportion still add to 100 for the reader of files."""
    turn(scenario, "waters.well.share", 33.3)
    again = plant.read(scenario.to_dict())
    assert again.to_dict() == scenario.to_dict()


def test_a_non_detect_that_is_turned_becomes_a_value(scenario):
    """Below 0.02 counts as 0.01; turned to 0.015 it is entered as such."""
    turn(scenario, "waters.well.analysis.iron", 0.015)
    entry = scenario.water("well").analyses["winter"].entries["iron"]
    assert (entry.value, entry.below) == (0.015, None)


def test_turning_the_temperature_keeps_the_reading_of_the_ph(scenario):
    """The water is warmed; the temperature at which its pH was read is written down."""
    turn(scenario, "waters.well.analysis.temperature", 25)
    assert scenario.water("well").analyses["winter"].entries["ph"].read_at == 11
    assert float(evaluate(scenario).readout("ph", "well")) < 7.24


def test_an_analysis_address_means_the_chosen_season(plant):
    """The same address turns winter or summer."""
    raw = plant.dict({"river": 100}, seasons=["winter", "summer"])
    raw["waters"][0]["analyses"]["summer"] = plant.sheet("river", ph=8.3)
    scenario = plant.read(raw)
    turn(scenario, "waters.river.analysis.ph", 8.1, season="summer")
    assert get_value(scenario, "waters.river.analysis.ph") == 8.6
    assert get_value(scenario, "waters.river.analysis.ph", "summer") == 8.1


# ---- shares ------------------------------------------------------------------------------------------------


def test_the_others_give_way_in_proportion(scenario):
    """Well to 65 %: 50 and 20 become 25 and 10."""
    turn(scenario, "waters.well.share", 65)
    assert shares(scenario) == pytest.approx([25, 65, 10])


def test_the_others_come_in_equally_from_zero(plant):
    """From 100 % down to 40 the two idle waters get 30 each."""
    scenario = plant({"river": 100, "well": 0, "transfer": 0})
    turn(scenario, "waters.river.share", 40)
    assert shares(scenario) == [40, 30, 30]


def test_the_balance_water_gives_way_alone(plant):
    """The third share stays; beyond what the balance water has there is nothing to take."""
    scenario = plant(THREE, balance_water="river")
    turn(scenario, "waters.well.share", 65)
    assert shares(scenario) == [15, 65, 20]
    assert dials(scenario)["waters.well.share"].high == 80
    with pytest.raises(ScenarioError, match="allowed 0 to 80 %"):
        turn(scenario, "waters.well.share", 90)
    assert shares(scenario) == [15, 65, 20]


def test_turning_the_balance_water_itself_moves_the_others(plant):
    """It cannot give way to itself."""
    scenario = plant(THREE, balance_water="river")
    turn(scenario, "waters.river.share", 75)
    assert shares(scenario) == pytest.approx([75, 15, 10])


def test_shares_always_add_to_the_whole(scenario):
    """After many turns the sum is still 100 to the last digit the file is checked for."""
    for step in range(200):
        turn(scenario, f"waters.{['river', 'well', 'transfer'][step % 3]}.share", (7.3 * step) % 100)
    assert sum(shares(scenario)) == pytest.approx(100, abs=1e-9)


def test_shares_turned_together_both_become_what_they_are_given(scenario):
    """One after the other, the second would move the first."""
    turn_together(scenario, {"waters.river.share": 20, "waters.well.share": 35, "train.hypo.dose": 2})
    assert shares(scenario) == pytest.approx([20, 35, 45])
    assert get_value(scenario, "train.hypo.dose") == 2


@pytest.mark.parametrize(
    ("given", "sentence"),
    [
        ({"river": 70, "well": 40}, "110 % together do not go; allowed at most 100"),
        ({"river": 70, "well": 101}, "share: 101 is out of range"),
        ({"river": 70, "brook": 10}, "is not a dial of this scenario"),
    ],
)
def test_shares_that_cannot_go_together_are_refused(scenario, given, sentence):
    """More than the whole, or a water that is not there; nothing is turned."""
    with pytest.raises(ScenarioError) as refused:
        turn_together(scenario, {f"waters.{water}.share": value for water, value in given.items()})
    assert sentence in str(refused.value)
    assert shares(scenario) == [50, 30, 20]


def test_a_water_out_of_service_has_no_share_to_turn_but_keeps_it(scenario):
    """The dial shows the share of what flows; the idle water gets its own back."""
    scenario.water("transfer").on = False
    assert "waters.transfer.share" not in dials(scenario)
    assert get_value(scenario, "waters.well.share") == pytest.approx(37.5)
    turn(scenario, "waters.well.share", 50)
    assert shares(scenario) == pytest.approx([40, 40, 20])


def test_the_only_water_keeps_the_whole_share(plant):
    """Nothing can take over from it."""
    with pytest.raises(ScenarioError, match="only water in service"):
        turn(plant({"river": 100}), "waters.river.share", 50)


# ---- refusals ----------------------------------------------------------------------------------------------


@pytest.mark.parametrize(
    ("address", "value", "words"),
    [
        ("waters.well.share", 101, "waters.well.share: 101 is out of range; allowed 0 to 100 %"),
        ("waters.well.analysis.ph", 15, "waters.well.analysis.ph: 15 is not a pH; allowed 0 to 14"),
        (
            "waters.well.analysis.calcium",
            -1,
            "waters.well.analysis.calcium: -1 mg/L is out of range; allowed 0 or more",
        ),
        ("train.hypo.dose", -0.1, "train.hypo.dose: -0.1 mg/L as Cl2 is out of range; allowed 0 or more"),
        ("train.contactor.train.bed.approach", 130, "allowed 0 to 100 %"),
        ("train.hypo.dose", float("nan"), "train.hypo.dose: NaN is not a number"),
        ("train.heater.temperature", 200, "train.heater.temperature: 200 °F is out of range"),
    ],
)
def test_a_value_that_is_not_allowed_is_refused(scenario, address, value, words):
    """One sentence with the address and what is allowed; the scenario stays as it was."""
    before = scenario.to_dict()
    with pytest.raises(ScenarioError) as refusal:
        turn(scenario, address, value)
    assert words in str(refusal.value)
    assert "\n" not in str(refusal.value)
    assert scenario.to_dict() == before


def test_an_unknown_address_comes_with_the_nearest(scenario):
    """A slip of the pen is met with the address that was probably meant."""
    with pytest.raises(ScenarioError, match=r'"train\.hypo\.dos" .*perhaps train\.hypo\.dose'):
        turn(scenario, "train.hypo.dos", 1)
