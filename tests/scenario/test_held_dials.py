"""Held dials: any dial computed so that readouts anywhere in the plant meet values, several together."""

import numpy as np
import pytest

from explorer.scenario.dials import dials, turn
from explorer.scenario.editing import remove_step, remove_water, tidy
from explorer.scenario.errors import ScenarioError
from explorer.scenario.evaluate import evaluate

TOWER = {"id": "tower", "step": "air", "approach": 50}
SHARES = np.linspace(0, 100, 11)


def bypass(plant, **parts):
    """Water past a limestone bed and through it."""
    bed = {"id": "bed", "step": "limestone", "approach": 90}
    aside = {"id": "aside", "step": "side_stream", "fraction": 50, "train": [bed]}
    return plant({"moor": 100}, [plant.dosed("gas", "carbon_dioxide", 20, "mg/L"), aside], **parts)


def softened(plant, train, holds):
    return plant({"river": 100}, train, holds=holds)


def lime_and_gas(plant):
    return [
        plant.dosed("gas", "carbon_dioxide", 0, "mg/L"),
        plant.dosed("lime", "calcium_hydroxide", 0, "mg/L"),
    ]


def forward(scenario, outcome):
    """The plant again, the held dials turned by hand to what was found."""
    return evaluate(scenario, {address: held.value for address, held in outcome.held.items()})


# ---- one dial ----------------------------------------------------------------------------------------------


@pytest.mark.parametrize(
    ("train", "address", "hold"),
    [
        ([TOWER], "train.tower.approach", {"readout": "co2", "value": 6}),
        ([TOWER], "train.tower.approach", {"readout": "ph", "value": 7.8}),
        ([], "waters.well.share", {"readout": "nitrate", "value": 15}),
        ([], "waters.well.analysis.temperature", {"readout": "temperature", "value": 9}),
        ([{"id": "heat", "step": "temperature", "temperature": {"value": 10, "unit": "°C"}}],
         "train.heat.temperature", {"readout": "si_calcite", "value": 0.1}),
        ([{"id": "tower", "step": "air", "co2": 5}],
         "train.tower.co2", {"readout": "ccpp", "value": 5, "high": 40}),
    ],
)  # fmt: skip
def test_any_dial_can_be_held(plant, train, address, hold):
    """Gas exchange, a share, a temperature, a measured value: the readout comes out as wanted."""
    scenario = plant({"river": 40, "well": 60}, train, holds={address: hold})
    outcome = evaluate(scenario)
    assert float(outcome.readout(hold["readout"])) == pytest.approx(hold["value"], abs=1e-6)
    assert bool(outcome.held[address].met)
    again = forward(scenario, outcome)
    assert float(again.readout(hold["readout"])) == pytest.approx(hold["value"], abs=1e-6)


def test_a_fraction_is_held(plant):
    """How much passes the limestone bed for an alkalinity of 12 mg/L."""
    scenario = bypass(plant, holds={"train.aside.fraction": {"readout": "alkalinity", "value": 12}})
    outcome = evaluate(scenario)
    assert float(outcome.readout("alkalinity")) == pytest.approx(12, abs=1e-6)
    assert 0 < float(outcome.held["train.aside.fraction"].value) < 100
    assert outcome.held["train.aside.fraction"].unit == "%"


def test_a_dose_is_held_to_the_finished_water(plant):
    """Not behind its own step but behind what comes after: caustic before hypochlorite, pH after both."""
    train = [
        plant.dosed("caustic", "sodium_hydroxide", 0, "mg/L"),
        plant.dosed("hypo", "sodium_hypochlorite", 3, "mg/L as Cl2"),
    ]
    holds = {"train.caustic.dose": {"readout": "ph", "value": 8.2, "high": 60}}
    outcome = evaluate(plant({"well": 100}, train, holds=holds))
    assert float(outcome.readout("ph")) == pytest.approx(8.2, abs=1e-7)
    dose, unit, held = outcome.doses["caustic"]
    assert (unit, held) == ("mg/L", True)
    assert float(dose) == float(outcome.held["train.caustic.dose"].value)
    assert outcome.doses["hypo"][2] is False


def test_a_readout_is_held_at_any_stage(plant):
    """Behind the first of two doses."""
    train = [
        plant.dosed("gas", "carbon_dioxide", 10, "mg/L"),
        plant.dosed("caustic", "sodium_hydroxide", 10, "mg/L"),
    ]
    holds = {"train.gas.dose": {"readout": "ph", "value": 6.8, "stage": "gas", "high": 100}}
    outcome = evaluate(plant({"well": 100}, train, holds=holds))
    assert float(outcome.readout("ph", "gas")) == pytest.approx(6.8, abs=1e-7)
    assert float(outcome.readout("ph")) > 6.85


def test_the_first_of_two_places_is_taken(plant):
    """The blend dissolves in between: CCPP passes −2 twice along the share, the lower share is taken."""
    scenario = plant({"river": 50, "well": 50}, holds={"waters.well.share": {"readout": "ccpp", "value": -2}})
    outcome = evaluate(scenario)
    dense = evaluate(scenario, {"waters.well.share": np.linspace(0, 100, 2001)}).readout("ccpp")
    passes = np.flatnonzero(np.diff(np.sign(dense + 2)))
    assert len(passes) == 2
    assert float(outcome.held["waters.well.share"].value) == pytest.approx(passes[0] / 20, abs=0.05)


def test_the_range_of_a_hold_chooses_the_place(plant):
    """From 50 % upwards, the other place is the first one."""
    hold = {"readout": "ccpp", "value": -2, "low": 50}
    outcome = evaluate(plant({"river": 50, "well": 50}, holds={"waters.well.share": hold}))
    assert float(outcome.held["waters.well.share"].value) > 50
    assert float(outcome.readout("ccpp")) == pytest.approx(-2, abs=1e-6)


def test_a_narrow_dip_is_not_missed(plant):
    """Only near the bottom of the dip does CCPP fall so low: the look goes on around the nearest value."""
    scenario = plant({"river": 50, "well": 50})
    dense = evaluate(scenario, {"waters.well.share": np.linspace(0, 100, 2001)}).readout("ccpp")
    hold = {"readout": "ccpp", "value": float(dense.min()) + 0.01}
    outcome = evaluate(plant({"river": 50, "well": 50}, holds={"waters.well.share": hold}))
    assert bool(outcome.held["waters.well.share"].met)


def test_a_hold_inside_a_hold(plant):
    """The pH to which caustic doses, itself held so that the finished water precipitates 4 mg/L."""
    scenario = plant(
        {"well": 100},
        [plant.held("caustic", "sodium_hydroxide", "ph", 7.5, 60, "mg/L")],
        holds={"train.caustic.hold.value": {"readout": "ccpp", "value": 25, "low": 7.3, "high": 9}},
    )
    outcome = evaluate(scenario)
    assert float(outcome.readout("ccpp")) == pytest.approx(25, abs=1e-4)


# ---- several dials -----------------------------------------------------------------------------------------


@pytest.mark.parametrize(("readout", "goal"), [("ccpp", 4.0), ("ph", 8.0), ("si_calcite", 0.3)])
def test_two_doses_that_need_each_other(plant, readout, goal):
    """Lime and carbon dioxide to an alkalinity and a saturation, for every pH of the source; turned by hand
    to the doses found, the plant gives both."""
    holds = {
        "train.gas.dose": {"readout": readout, "value": goal, "high": 200},
        "train.lime.dose": {"readout": "alkalinity", "value": 120, "high": 200},
    }
    scenario = softened(plant, lime_and_gas(plant), holds)
    outcome = evaluate(scenario, {"waters.river.analysis.ph": np.linspace(7.2, 8.6, 8)})
    assert all(held.met.all() for held in outcome.held.values())
    again = evaluate(
        scenario,
        {
            "waters.river.analysis.ph": np.linspace(7.2, 8.6, 8),
            **{address: held.value for address, held in outcome.held.items()},
        },
    )
    assert again.readout(readout) == pytest.approx(np.full(8, goal), abs=1e-5)
    assert again.readout("alkalinity") == pytest.approx(np.full(8, 120.0), abs=1e-5)


@pytest.mark.parametrize("readouts", [("ccpp", "alkalinity"), ("ph", "ccpp"), ("si_calcite", "calcium")])
def test_whatever_two_doses_give_is_found_again(plant, readouts):
    """Random doses of lime and carbon dioxide; held to what they give, doses that give the same are found."""
    random = np.random.default_rng(6)
    doses = {f"train.{step}.dose": random.uniform(0, 120, 100) for step in ("gas", "lime")}
    given = evaluate(plant({"permeate": 100}, lime_and_gas(plant)), doses)
    wanted = {address: given.readout(key) for address, key in zip(doses, readouts, strict=True)}
    holds = {
        address: {"readout": key, "value": 0, "high": 120}
        for address, key in zip(doses, readouts, strict=True)
    }
    scenario = plant({"permeate": 100}, lime_and_gas(plant), holds=holds)
    outcome = evaluate(scenario, {f"{address}.hold.value": goal for address, goal in wanted.items()})
    for (address, goal), key in zip(wanted.items(), readouts, strict=True):
        assert outcome.held[address].met.all()
        assert outcome.readout(key) == pytest.approx(goal, abs=1e-4)


def test_three_dials_together(plant):
    """Share, lime and carbon dioxide to nitrate, alkalinity and pH."""
    holds = {
        "waters.well.share": {"readout": "nitrate", "value": 15},
        "train.gas.dose": {"readout": "ph", "value": 8.0, "high": 200},
        "train.lime.dose": {"readout": "alkalinity", "value": 180, "high": 200},
    }
    outcome = evaluate(plant({"river": 50, "well": 50}, lime_and_gas(plant), holds=holds))
    for address, hold in holds.items():
        assert bool(outcome.held[address].met), address
        assert float(outcome.readout(hold["readout"])) == pytest.approx(hold["value"], abs=1e-5)


# ---- what cannot be reached --------------------------------------------------------------------------------


def test_what_cannot_be_reached_comes_as_near_as_it_can_and_says_so(plant):
    """No tower brings the carbon dioxide below that of air: the approach stands at its end."""
    scenario = plant({"well": 100}, [TOWER], holds={"train.tower.approach": {"readout": "co2", "value": 0.2}})
    outcome = evaluate(scenario)
    held = outcome.held["train.tower.approach"]
    assert float(held.value) == 100
    assert not held.met
    (note,) = [note for note in outcome.notes if note.where == "train.tower.approach"]
    assert note.level == "caution"
    assert note.text == (
        "Carbon dioxide cannot be brought to 0.20 mg/L in the finished water: the dial stands where it comes"
        " nearest"
    )


def test_the_nearest_place_may_lie_inside(plant):
    """CCPP of the blend never falls to −40: the share stands at the bottom of the dip."""
    hold = {"readout": "ccpp", "value": -40}
    outcome = evaluate(plant({"river": 50, "well": 50}, holds={"waters.well.share": hold}))
    scenario = plant({"river": 50, "well": 50})
    dense = evaluate(scenario, {"waters.well.share": np.linspace(0, 100, 2001)}).readout("ccpp")
    assert float(outcome.readout("ccpp")) == pytest.approx(dense.min(), abs=0.02)


def test_of_two_dials_one_at_its_limit_lets_the_other_go_on(plant):
    """The lime ends at its limit short of the alkalinity; the gas still keeps the CCPP."""
    holds = {
        "train.gas.dose": {"readout": "ccpp", "value": 4, "high": 200},
        "train.lime.dose": {"readout": "alkalinity", "value": 120, "high": 20},
    }
    outcome = evaluate(softened(plant, lime_and_gas(plant), holds))
    assert float(outcome.held["train.lime.dose"].value) == pytest.approx(20)
    assert [bool(outcome.held[address].met) for address in holds] == [True, False]


def test_points_where_it_is_met_are_told_from_others(plant):
    """Along a sweep: the count of points that miss the goal stands in the note."""
    scenario = plant(
        {"river": 50, "well": 50}, [TOWER], holds={"train.tower.approach": {"readout": "co2", "value": 5}}
    )
    outcome = evaluate(scenario, {"waters.well.share": SHARES})
    met = outcome.held["train.tower.approach"].met
    assert met.tolist() == [False, False] + [True] * 9
    assert outcome.readout("co2")[met] == pytest.approx(5, abs=1e-6)
    assert any("2 of 11 points" in note.text for note in outcome.notes)


def test_a_point_without_an_answer_stays_without(plant):
    """Where the analysis is impossible the dial stands as entered; the reason is that of the analysis."""
    scenario = plant(
        {"river": 100}, [TOWER], holds={"train.tower.approach": {"readout": "co2", "value": 1.5}}
    )
    outcome = evaluate(scenario, {"waters.river.analysis.ph": np.array([8.0, 12.0])})
    assert outcome.held["train.tower.approach"].met.tolist() == [True, False]
    assert outcome.held["train.tower.approach"].value[1] == 50
    assert outcome.reasons()[1] == "no water has the entered analysis"


# ---- with other dials --------------------------------------------------------------------------------------


def test_a_dial_that_is_turned_is_not_held(plant):
    """A sweep of the held dial shows what it does."""
    scenario = plant({"well": 100}, [TOWER], holds={"train.tower.approach": {"readout": "co2", "value": 5}})
    outcome = evaluate(scenario, {"train.tower.approach": np.array([0.0, 100.0])})
    assert outcome.held == {}
    assert outcome.readout("co2")[0] > 20 > outcome.readout("co2")[1]


def test_the_held_value_is_a_dial(plant):
    """It can be turned, swept and named; of another shape than other dials."""
    scenario = plant(
        {"river": 50, "well": 50}, [TOWER], holds={"train.tower.approach": {"readout": "co2", "value": 5}}
    )
    address = "train.tower.approach.hold.value"
    dial = dials(scenario)[address]
    assert (dial.value, dial.unit) == (5, "mg/L")
    assert dial.label == "Carbon dioxide held by approach to equilibrium of Air contact"
    turn(scenario, address, 6)
    assert scenario.holds["train.tower.approach"].value == 6
    goals = np.array([[4.0], [6.0]])
    outcome = evaluate(scenario, {address: goals, "waters.well.share": np.array([40.0, 60.0, 80.0])})
    assert outcome.readout("co2") == pytest.approx(np.broadcast_to(goals, (2, 3)), abs=1e-6)


def test_a_hold_on_a_stage_out_of_service_rests(plant):
    """The dial stands as entered, and a note says so."""
    train = [TOWER, plant.dosed("caustic", "sodium_hydroxide", 5, "mg/L", on=False)]
    hold = {"readout": "ph", "value": 8, "stage": "caustic"}
    outcome = evaluate(plant({"well": 100}, train, holds={"train.tower.approach": hold}))
    assert outcome.held == {}
    assert float(outcome.inputs["train.tower.approach"]) == 50
    assert any("out of service" in note.text for note in outcome.notes)


# ---- in the file -------------------------------------------------------------------------------------------


def test_holds_are_kept_in_the_file(plant):
    """Word for word, with what was left out left out."""
    holds = {
        "waters.well.share": {"readout": "nitrate", "value": 15},
        "train.tower.approach": {"stage": "blend", "value": 5, "readout": "co2", "low": 10, "high": 90},
    }
    scenario = plant({"river": 50, "well": 50}, [TOWER], holds=holds)
    assert scenario.to_dict()["holds"] == holds
    assert scenario.copy().to_dict()["holds"] == holds
    assert "holds" not in plant({"river": 100}).to_dict()


@pytest.mark.parametrize(
    ("address", "hold", "sentence"),
    [
        ("train.towr.approach", {"readout": "co2", "value": 5}, "holds.train.towr.approach: "),
        ("train.tower.approach", {"readout": "co3", "value": 5},
         'holds.train.tower.approach.readout: "co3" is not a readout (perhaps co2)'),
        ("train.tower.approach", {"readout": "co2"}, "holds.train.tower.approach.value: missing"),
        ("train.tower.approach", {"readout": "co2", "value": "5"},
         'holds.train.tower.approach.value: "5" is not a number'),
        ("train.tower.approach", {"readout": "co2", "value": 5, "stage": "towr"},
         'holds.train.tower.approach.stage: "towr" is not a stage (perhaps tower)'),
        ("train.tower.approach", {"readout": "co2", "value": 5, "high": 120},
         "holds.train.tower.approach.high: 120 is out of range; allowed 0 to 100 %"),
        ("train.tower.approach", {"readout": "co2", "value": 5, "low": 60, "high": 40},
         "holds.train.tower.approach.high: 40 leaves no range; allowed above 60"),
        ("train.gas.dose", {"readout": "ph", "value": 7},
         "holds.train.gas.dose.high: missing; allowed a number, as the dial itself has no upper limit"),
        ("train.tower.approach", {"readout": "co2", "value": 5, "at": "tower"},
         "holds.train.tower.approach.at: not known here"),
        ("train.tower.approach.hold.value", {"readout": "co2", "value": 5},
         "holds.train.tower.approach.hold.value: "),
    ],
)  # fmt: skip
def test_a_hold_that_does_not_fit_is_refused(plant, address, hold, sentence):
    """One sentence with the path of the field and what is allowed."""
    train = [TOWER, plant.dosed("gas", "carbon_dioxide", 5, "mg/L")]
    with pytest.raises(ScenarioError) as error:
        plant({"well": 100}, train, holds={address: hold})
    assert str(error.value).startswith(sentence)


def test_more_than_four_holds_are_refused(plant):
    """The search for five would take too long."""
    holds = {
        f"waters.well.analysis.{key}": {"readout": key, "value": 10, "high": 50}
        for key in ("calcium", "magnesium", "sodium", "chloride", "sulfate")
    }
    with pytest.raises(ScenarioError, match=r"^holds: 5 dials are held; allowed at most 4"):
        plant({"well": 100}, holds=holds)


def test_holds_go_with_what_they_are_about(plant):
    """Removing the step of the dial, the step of the stage, or the water takes the hold along, and with it
    the tolerance of its value."""
    train = [TOWER, plant.dosed("gas", "carbon_dioxide", 5, "mg/L")]
    holds = {
        "train.tower.approach": {"readout": "co2", "value": 5, "stage": "gas"},
        "train.gas.dose": {"readout": "ph", "value": 7, "high": 50},
        "waters.well.share": {"readout": "nitrate", "value": 15},
    }
    tolerances = {"train.tower.approach.hold.value": {"plus_minus": 0.5}}
    scenario = plant({"river": 50, "well": 50}, train, holds=holds, tolerances=tolerances)
    tidy(scenario)
    assert list(scenario.holds) == list(holds)
    remove_step(scenario, "gas")
    assert list(scenario.holds) == ["waters.well.share"]
    assert scenario.tolerances == {}
    remove_water(scenario, "well")
    assert scenario.holds == {}
    assert plant.read(scenario.to_dict()).holds == {}
