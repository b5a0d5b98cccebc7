"""What may be off: widths, distributions, and what one error moves."""

import numpy as np
import pytest
from scipy import stats

from explorer.scenario.evaluate import follow
from explorer.scenario.model import Scenario
from explorer.studies.spread import Move, spread_of

MANY = (np.arange(10_000) + 0.5) / 10_000


def ends(spread, around=None):
    """Dials with every input at its lower end, as it is, and at its upper end."""
    places = np.tile([-1.0, 0.0, 1.0], (len(spread), 1))
    return spread.placed(places, around or {})


def names(spread):
    return [part.name for part in spread.inputs]


# ---- one dial ----------------------------------------------------------------------------------------------


def test_a_uniform_error_lies_evenly_between_its_ends():
    """As many values in each tenth of the range."""
    counts, _ = np.histogram(Move("x", 3, 3).place(MANY), 10, (-1, 1))
    assert counts == pytest.approx(1000, abs=1)


def test_a_normal_error_has_its_ends_at_two_standard_deviations():
    """The quantiles are those of a normal distribution of half the width, and go beyond the ends."""
    move = Move("x", 3, 3, normal=True)
    assert move.value(10, move.place(MANY)) == pytest.approx(stats.norm(10, 1.5).ppf(MANY), abs=1e-9)


@pytest.mark.parametrize("normal", [False, True])
def test_an_error_with_two_sides_has_no_step_between_them(normal):
    """Each side is as likely as it is wide, so that the density is the same on both sides of the middle."""
    move = Move("x", 6, 2, normal=normal)
    values = move.value(0, move.place(MANY))
    assert np.mean(values < 0) == pytest.approx(0.75, abs=0.001)
    assert np.mean((values > -0.4) & (values < 0)) == pytest.approx(
        np.mean((values > 0) & (values < 0.4)), abs=0.002
    )
    assert (np.diff(values) > 0).all()


def test_an_error_can_have_one_side_only():
    """Decay only lowers; nothing lies above the value."""
    move = Move("x", 0.2, 0, relative=True)
    values = move.value(10, move.place(MANY))
    assert (values.min(), values.max()) == (pytest.approx(8, abs=0.01), pytest.approx(10, abs=0.01))


def test_widths_are_in_the_unit_of_the_dial_or_percent_of_its_value(plant):
    """Degrees as such; percent of what was entered, also where a share is meant in points."""
    tolerances = {
        "waters.river.analysis.temperature": {"plus_minus": 1},
        "waters.river.analysis.calcium": {"plus_minus": 10, "unit": "%"},
        "waters.river.share": {"minus": 5, "plus": 2},
    }
    turned = ends(spread_of(plant({"river": 60, "well": 40}, tolerances=tolerances)))
    assert turned["waters.river.analysis.temperature"].tolist() == [3, 4, 5]
    assert turned["waters.river.analysis.calcium"] == pytest.approx([23.4, 26, 28.6])
    assert turned["waters.river.share"].tolist() == [55, 60, 62]


def test_percent_of_a_negative_value_keeps_its_direction(plant):
    """The upper end of a negative alkalinity is nearer to zero."""
    raw = plant.dict(
        {"river": 100}, tolerances={"waters.river.analysis.alkalinity": {"plus_minus": 10, "unit": "%"}}
    )
    raw["waters"][0]["analyses"]["winter"] = plant.sheet("river", ph=4, alkalinity=-5)
    assert ends(spread_of(plant.read(raw)))["waters.river.analysis.alkalinity"] == pytest.approx(
        [-5.5, -5, -4.5]
    )


def test_a_value_stays_within_what_its_dial_allows(plant):
    """A temperature of 4 °C that may be 10 °C off does not fall below freezing."""
    tolerances = {"waters.river.analysis.temperature": {"plus_minus": 10}}
    turned = ends(spread_of(plant({"river": 100}, tolerances=tolerances)))
    assert turned["waters.river.analysis.temperature"].tolist() == [0, 4, 14]


def test_an_error_is_about_the_swept_value(plant):
    """Percent of a dose that is swept are percent of the dose at each point."""
    scenario = plant(
        {"river": 100},
        [plant.dosed("caustic", "sodium_hydroxide", 5, "mg/L")],
        tolerances={"train.caustic.dose": {"plus_minus": 10, "unit": "%"}},
    )
    turned = spread_of(scenario).placed(np.array([[[1.0]]]), {"train.caustic.dose": np.array([0.0, 10, 20])})
    assert turned["train.caustic.dose"].tolist() == [[0, 11, 22]]


def test_a_value_of_an_analysis_can_carry_its_error_itself(plant):
    """The ± beside an entry counts where the dial has no tolerance; else the tolerance does."""
    raw = plant.dict({"river": 100}, tolerances={"waters.river.analysis.ph": {"plus_minus": 0.2}})
    marked = {
        "ph": {"value": 8.6, "plus_minus": 0.5},
        "calcium": {"value": 26, "unit": "mg/L", "plus_minus": 2},
    }
    raw["waters"][0]["analyses"]["winter"] = plant.sheet("river", **marked)
    turned = ends(spread_of(plant.read(raw)))
    assert turned["waters.river.analysis.ph"] == pytest.approx([8.4, 8.6, 8.8])
    assert turned["waters.river.analysis.calcium"].tolist() == [24, 26, 28]


def test_what_is_out_of_service_is_not_off(plant):
    """Tolerances of a water or a step that does not run wait for its return."""
    raw = plant.dict(
        {"river": 60, "well": 40},
        [plant.dosed("caustic", "sodium_hydroxide", 5, "mg/L", on=False)],
        tolerances={
            "waters.well.share": {"plus_minus": 2},
            "waters.well.analysis.ph": {"plus_minus": 0.1},
            "waters.river.analysis.ph": {"plus_minus": 0.1},
            "train.caustic.dose": {"plus_minus": 3, "unit": "%"},
        },
    )
    raw["waters"][1]["on"] = False
    assert names(spread_of(plant.read(raw))) == ["waters.river.analysis.ph"]


# ---- shares ------------------------------------------------------------------------------------------------

THREE = {"river": 50.0, "well": 30.0, "transfer": 20.0}


def shares_at(scenario, places, around=None):
    spread = spread_of(scenario)
    outcome = follow(spread.plan, spread.placed(np.asarray(places, float), around or {}))
    assert (outcome.reasons() == "").all()
    return {water: 100 * part for water, part in outcome.parts.items()}


def test_the_other_waters_take_up_a_share_that_is_off(plant):
    """The share rule holds for errors too: in proportion."""
    found = shares_at(plant(THREE, tolerances={"waters.river.share": {"plus_minus": 5}}), [[1.0]])
    assert found["river"] == pytest.approx(55)
    assert found["well"] == pytest.approx(27)
    assert found["transfer"] == pytest.approx(18)


def test_shares_that_are_all_off_are_brought_to_the_whole(plant):
    """Meters that read 5 and 3 points short: what flows is still 100 %."""
    scenario = plant(
        {"river": 60, "well": 40},
        tolerances={"waters.river.share": {"plus_minus": 5}, "waters.well.share": {"plus_minus": 3}},
    )
    found = shares_at(scenario, [[1.0], [1.0]])
    assert found["river"] == pytest.approx(100 * 65 / 108)
    assert found["well"] == pytest.approx(100 * 43 / 108)


def test_a_share_that_is_off_moves_with_the_sweep_of_another(plant):
    """River ± 5 points while the well is swept: the river is off from where the sweep puts it."""
    scenario = plant({"river": 60, "well": 40}, tolerances={"waters.river.share": {"plus_minus": 5}})
    found = shares_at(scenario, [[-1.0, 0.0, 1.0]], {"waters.well.share": np.array([80.0, 80, 80])})
    assert found["river"] == pytest.approx([100 * 15 / 95, 20, 100 * 25 / 105])


def test_a_share_of_nothing_or_everything_is_off_to_one_side(plant):
    """At the ends of a sweep there is nothing beyond."""
    scenario = plant({"river": 60, "well": 40}, tolerances={"waters.well.share": {"plus_minus": 5}})
    found = shares_at(scenario, [[-1.0, 1.0]], {"waters.well.share": np.array([0.0, 100.0])})
    assert found["well"].tolist() == [0, 100]


def test_shares_that_are_impossible_anyway_stay_so(plant):
    """An error does not mend two swept shares that leave less than nothing."""
    spread = spread_of(plant(THREE, tolerances={"waters.transfer.share": {"plus_minus": 5}}))
    around = {"waters.river.share": np.array([70.0]), "waters.well.share": np.array([60.0])}
    outcome = follow(spread.plan, spread.placed(np.array([[1.0]]), around))
    assert "shares do not add" in outcome.reasons()[0]


# ---- one tank ----------------------------------------------------------------------------------------------


def caustic_twice(plant, tolerances, **second):
    doses = [
        plant.dosed("first", "sodium_hydroxide", 5, "mg/L"),
        plant.dosed("last", "sodium_hydroxide", 10, "mg/L", **second),
    ]
    return plant({"river": 60, "well": 40}, doses, tolerances=tolerances)


STRONGER = {"train.first.strength": {"plus_minus": 4, "unit": "%"}}


def test_one_strength_error_moves_every_dose_from_the_tank(plant):
    """The tank is stronger than was assumed: both pumps run as set, both doses are 4 % too high."""
    spread = spread_of(caustic_twice(plant, STRONGER))
    assert [part.label for part in spread.inputs] == ["Strength of Sodium hydroxide, one tank"]
    turned = ends(spread)
    assert turned["train.first.dose"] == pytest.approx([4.8, 5, 5.2])
    assert turned["train.last.dose"] == pytest.approx([9.6, 10, 10.4])


def test_a_strength_error_does_not_change_what_the_pumps_take(plant):
    """The water gets more, the tank does not empty faster."""
    spread = spread_of(caustic_twice(plant, STRONGER))
    outcome = follow(spread.plan, ends(spread))
    use = outcome.dosing["last"].product_use
    assert use == pytest.approx(use[1])
    assert np.ptp(outcome.readout("sodium")) > 0.1


def test_tanks_of_different_strength_are_two_tanks(plant):
    """The strength error of one leaves the other alone."""
    spread = spread_of(caustic_twice(plant, STRONGER, strength=25))
    assert "train.last.dose" not in ends(spread)


def test_both_strengths_of_one_tank_are_one_error(plant):
    """Entered twice, it is still one random number."""
    both = STRONGER | {"train.last.strength": {"plus_minus": 2, "unit": "%"}}
    spread = spread_of(caustic_twice(plant, both))
    assert len(spread) == 1
    turned = ends(spread)
    assert turned["train.first.dose"] == pytest.approx([4.8, 5, 5.2])
    assert turned["train.last.dose"] == pytest.approx([9.8, 10, 10.2])


def test_two_tanks_of_one_product_can_be_told_apart_by_a_word(plant):
    """Different words under shared: two errors."""
    both = {
        "train.first.strength": {"plus_minus": 4, "unit": "%", "shared": "north"},
        "train.last.strength": {"plus_minus": 4, "unit": "%", "shared": "south"},
    }
    assert names(spread_of(caustic_twice(plant, both))) == ["north", "south"]


def test_a_dose_as_product_follows_the_strength_once(plant):
    """Given as product, a dose holds more of the substance by itself; it must not be counted twice."""
    scenario = plant(
        {"river": 100},
        [plant.dosed("caustic", "sodium_hydroxide", 10, "mg/L as product")],
        tolerances={"train.caustic.strength": {"plus_minus": 4, "unit": "%"}},
    )
    spread = spread_of(scenario)
    turned = ends(spread)
    assert "train.caustic.dose" not in turned
    moles = follow(spread.plan, turned).dosing["caustic"].moles
    assert moles / moles[1] == pytest.approx([0.96, 1, 1.04])


def test_pump_and_tank_errors_of_one_dose_multiply(plant):
    """A pump 10 % high on a tank 4 % strong doses 14.4 % too much."""
    tolerances = STRONGER | {"train.first.dose": {"plus_minus": 10, "unit": "%"}}
    assert ends(spread_of(caustic_twice(plant, tolerances)))["train.first.dose"][2] == pytest.approx(
        5 * 1.1 * 1.04
    )


def test_a_held_dose_makes_up_for_its_strength(plant):
    """The controller doses to the held value whatever is in the tank."""
    scenario = plant(
        {"well": 100},
        [plant.held("caustic", "sodium_hydroxide", "ph", 8.2, 60, "mg/L")],
        tolerances={"train.caustic.strength": {"plus_minus": 4, "unit": "%"}},
    )
    spread = spread_of(scenario)
    assert follow(spread.plan, ends(spread)).readout("ph") == pytest.approx(8.2, abs=1e-6)


def test_a_dial_held_elsewhere_in_the_plant_makes_up_for_its_errors_too(plant):
    """A dose held to the finished water is off neither by its pump nor by its tank; its meter may be."""
    scenario = plant(
        {"well": 100},
        [
            plant.dosed("caustic", "sodium_hydroxide", 0, "mg/L"),
            plant.dosed("hypo", "sodium_hypochlorite", 1, "mg/L as Cl2"),
        ],
        holds={"train.caustic.dose": {"readout": "ph", "value": 8.2, "high": 60}},
        tolerances={
            "train.caustic.dose": {"plus_minus": 5, "unit": "%"},
            "train.caustic.strength": {"plus_minus": 4, "unit": "%"},
            "train.caustic.dose.hold.value": {"plus_minus": 0.1},
        },
    )
    spread = spread_of(scenario)
    places = np.array([[1.0, -1.0], [0.0, 1.0]])
    assert follow(spread.plan, spread.placed(places, {})).readout("ph") == pytest.approx([8.2, 8.3], abs=1e-6)


# ---- flows -------------------------------------------------------------------------------------------------


def by_flow(plant, tolerances):
    raw = plant.dict(
        {"river": 50, "well": 50}, [plant.dosed("hypo", "sodium_hypochlorite", 1, "mg/L as Cl2")]
    )
    del raw["flow"]
    for water, flow, unit in zip(raw["waters"], (240, 10), ("m³/h", "ML/d"), strict=True):
        del water["share"]
        water["flow"] = {"value": flow, "unit": unit}
    raw["waters"][0]["train"] = [plant.dosed("caustic", "sodium_hydroxide", 4, "mg/L")]
    return plant.read(raw | {"tolerances": tolerances})


def test_a_flow_meter_that_is_off_moves_the_blend_and_the_doses_paced_on_it(plant):
    """5 % more river than its meter says: the dose into the river is diluted by 5 %, the dose after blending
    by what the total is off, and the river has more of the blend."""
    spread = spread_of(by_flow(plant, {"waters.river.flow": {"plus_minus": 5, "unit": "%"}}))
    turned = ends(spread)
    well = 10_000 / 24
    assert turned["waters.river.train.caustic.dose"] == pytest.approx([4 / 0.95, 4, 4 / 1.05])
    assert turned["train.hypo.dose"] == pytest.approx(
        [(240 + well) / (240 * off + well) for off in (0.95, 1, 1.05)]
    )
    outcome = follow(spread.plan, turned)
    assert outcome.parts["river"] == pytest.approx(
        [240 * off / (240 * off + well) for off in (0.95, 1, 1.05)]
    )


def test_what_the_pumps_take_does_not_depend_on_the_true_flow(plant):
    """They are paced on the meter: kilograms a day stay, whatever really flows."""
    spread = spread_of(by_flow(plant, {"waters.river.flow": {"plus_minus": 5, "unit": "%"}}))
    outcome = follow(spread.plan, ends(spread))
    for step in ("caustic", "hypo"):
        use = outcome.dosing[step].active_use
        assert use == pytest.approx(use[1])


def test_a_total_meter_that_is_off_moves_every_dose_and_no_share(plant):
    """With shares given, one meter paces all pumps."""
    raw = plant.dict(
        {"river": 60, "well": 40}, [plant.dosed("hypo", "sodium_hypochlorite", 1, "mg/L as Cl2")]
    )
    raw["waters"][0]["train"] = [plant.dosed("caustic", "sodium_hydroxide", 4, "mg/L")]
    raw["tolerances"] = {"flow": {"plus_minus": 4, "unit": "%"}}
    spread = spread_of(plant.read(raw))
    turned = ends(spread)
    assert turned["train.hypo.dose"] == pytest.approx([1 / 0.96, 1, 1 / 1.04])
    assert turned["waters.river.train.caustic.dose"] == pytest.approx([4 / 0.96, 4, 4 / 1.04])
    assert not any(address.endswith("share") for address in turned)


def test_a_split_that_is_off_leaves_the_doses_per_litre(plant):
    """Pacing follows the flow through the side stream."""
    aside = {
        "id": "aside",
        "step": "side_stream",
        "fraction": 50,
        "train": [plant.dosed("gas", "carbon_dioxide", 9, "mg/L")],
    }
    spread = spread_of(plant({"well": 100}, [aside], tolerances={"train.aside.fraction": {"plus_minus": 2}}))
    assert ends(spread).keys() == {"train.aside.fraction"}


# ---- shared errors -----------------------------------------------------------------------------------------


def test_dials_with_the_same_word_are_off_together(plant):
    """One method that reads both alkalinities too high: one input, each by its own width."""
    tolerances = {
        "waters.river.analysis.alkalinity": {"plus_minus": 2, "shared": "titration"},
        "waters.well.analysis.alkalinity": {"plus_minus": 5, "unit": "%", "shared": "titration"},
        "waters.well.analysis.ph": {"plus_minus": 0.1},
    }
    spread = spread_of(plant({"river": 60, "well": 40}, tolerances=tolerances))
    assert names(spread) == ["titration", "waters.well.analysis.ph"]
    turned = spread.sampled(np.array([[0.0, 0.25, 1.0], [0.5, 0.5, 0.5]]), {})
    assert turned["waters.river.analysis.alkalinity"] == pytest.approx([62, 63, 66])
    assert turned["waters.well.analysis.alkalinity"] == pytest.approx([258.4, 265.2, 285.6])


def test_inputs_with_the_same_label_are_told_apart(plant):
    """Two pumps of one chemical: the label says which."""
    tolerances = {f"train.{step}.dose": {"plus_minus": 3, "unit": "%"} for step in ("first", "last")}
    labels = [part.label for part in spread_of(caustic_twice(plant, tolerances)).inputs]
    assert labels == [
        "Dose of Sodium hydroxide (train.first.dose)",
        "Dose of Sodium hydroxide (train.last.dose)",
    ]


def test_distribution_and_shared_are_kept_in_the_file(plant):
    """What a tolerance says comes back word for word; an unknown distribution is refused."""
    tolerance = {"plus_minus": 0.1, "distribution": "normal", "shared": "meter 3"}
    raw = plant.dict({"river": 100}, tolerances={"waters.river.analysis.ph": tolerance})
    assert plant.read(raw).to_dict()["tolerances"]["waters.river.analysis.ph"] == tolerance
    raw["tolerances"]["waters.river.analysis.ph"]["distribution"] = "norm"
    with pytest.raises(ValueError, match=r'distribution: "norm" is not a distribution \(perhaps normal\)'):
        Scenario.from_dict(raw)


# ---- what goes along ---------------------------------------------------------------------------------------


def test_it_is_told_what_is_off_along_with_a_dial(plant):
    """The doses of a tank with its strength, the doses paced on a flow with it, and dials of one word."""
    train = [
        plant.dosed("pre", "sodium_hydroxide", 4, "mg/L"),
        plant.dosed("post", "sodium_hydroxide", 2, "mg/L"),
    ]
    tolerances = {
        "train.pre.strength": {"plus_minus": 5, "unit": "%"},
        "flow": {"plus_minus": 3, "unit": "%"},
        "waters.river.analysis.ph": {"plus_minus": 0.1, "shared": "meter"},
        "waters.well.analysis.ph": {"plus_minus": 0.1, "shared": "meter"},
        "train.post.dose": {"plus_minus": 2, "unit": "%"},
    }
    spread = spread_of(plant({"river": 60, "well": 40}, train, tolerances=tolerances))
    doses = ["Dose of Sodium hydroxide"]
    assert set(doses) < set(spread.follows("train.pre.strength"))
    assert "Product strength of Sodium hydroxide" in spread.follows("train.pre.strength")
    assert spread.follows("flow") == doses
    assert spread.follows("waters.river.analysis.ph") == ["pH of Well"]
    assert spread.follows("train.post.dose") == []
