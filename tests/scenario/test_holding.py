"""Setting, changing and releasing holds: one way to ask, whichever way the file says it."""

import pytest

from explorer.scenario.errors import ScenarioError
from explorer.scenario.evaluate import evaluate
from explorer.scenario.holding import downstream, holdings, release, resting, set_hold
from explorer.scenario.model import Scenario

DOSE = "train.caustic.dose"
BED = {"id": "bed", "step": "limestone", "approach": 90}
ASIDE = {"id": "aside", "step": "side_stream", "fraction": 50, "train": [BED]}


@pytest.fixture
def dosed(plant):
    """River and well with caustic, then limestone on a side stream."""
    return plant({"river": 60, "well": 40}, [plant.dosed("caustic", "sodium_hydroxide", 4, "mg/L"), ASIDE])


def saved(scenario: Scenario) -> Scenario:
    """The scenario after it has been through its file."""
    return Scenario.from_dict(scenario.to_dict())


def test_a_dose_held_right_behind_its_step_stands_in_the_step(dosed):
    """From nothing up to a ceiling, in the unit of the dose."""
    set_hold(dosed, DOSE, 4, readout="ph", value=8.2, stage="caustic", high=30)
    step = saved(dosed).step("caustic")
    assert (step.dose, step.hold.readout, step.hold.value) == (None, "ph", 8.2)
    assert (step.hold.ceiling.value, step.hold.ceiling.unit) == (30, "mg/L")
    assert dosed.holds == {}


@pytest.mark.parametrize(
    "parts", [{"stage": "finished"}, {"stage": "caustic", "low": 2}], ids=["elsewhere", "a lower limit"]
)
def test_a_dose_held_otherwise_stands_under_holds(dosed, parts):
    """Its step keeps the dose that it had."""
    set_hold(dosed, DOSE, 4, readout="ph", value=8.2, high=30, **parts)
    again = saved(dosed)
    assert again.step("caustic").dose.value == 4
    assert again.holds[DOSE].high == 30


def test_both_ways_are_read_alike(dosed):
    """Address, readout, value, place and limits, and where the held value is turned."""
    for stage, goal in (("caustic", "train.caustic.hold.value"), ("finished", f"{DOSE}.hold.value")):
        set_hold(dosed, DOSE, 4, readout="ph", value=8.2, stage=stage, high=30)
        (hold,) = holdings(dosed).values()
        assert (hold.address, hold.readout, hold.value, hold.stage) == (DOSE, "ph", 8.2, stage)
        assert (hold.low, hold.high, hold.unit, hold.goal) == (None, 30, "mg/L", goal)
        assert hold.label == "Dose of Sodium hydroxide"


def test_changing_the_place_moves_the_hold_and_what_hangs_on_it(dosed):
    """Tolerance and sweep of the held value stay with it, in both directions."""
    set_hold(dosed, DOSE, 4, readout="ph", value=8.2, stage="caustic", high=30)
    raw = dosed.to_dict()
    raw["tolerances"] = {"train.caustic.hold.value": {"plus_minus": 0.1}}
    raw["sweep"] = {"dial": "train.caustic.hold.value", "start": 7, "stop": 9, "points": 11}
    scenario = Scenario.from_dict(raw)
    set_hold(scenario, DOSE, 3.7, stage="finished")
    assert scenario.step("caustic").dose.value == 3.7
    assert list(scenario.tolerances) == [f"{DOSE}.hold.value"]
    assert saved(scenario).sweep.dial == f"{DOSE}.hold.value"
    set_hold(scenario, DOSE, 3.7, stage="caustic")
    assert list(saved(scenario).tolerances) == ["train.caustic.hold.value"]


def test_parts_that_are_not_given_stay(dosed):
    """As they were entered."""
    set_hold(dosed, "waters.well.share", 40, readout="nitrate", value=15, low=10, high=60)
    set_hold(dosed, "waters.well.share", 40, value=18)
    hold = saved(dosed).holds["waters.well.share"]
    assert (hold.readout, hold.value, hold.low, hold.high) == ("nitrate", 18, 10, 60)


def test_a_released_share_stays_where_the_hold_put_it(dosed):
    """And the results with it; the other share takes the rest again."""
    set_hold(dosed, "waters.well.share", 40, readout="nitrate", value=15)
    held = evaluate(dosed)
    release(dosed, "waters.well.share", float(held.stands("waters.well.share")))
    assert dosed.holds == {}
    assert float(evaluate(saved(dosed)).readout("nitrate")) == pytest.approx(15, abs=1e-6)


def test_a_released_dose_is_fixed_in_the_unit_of_its_ceiling(dosed):
    """Whichever way it was held."""
    set_hold(dosed, DOSE, 4, readout="ph", value=8.2, stage="caustic", high=30)
    release(dosed, DOSE, 3.25)
    step = saved(dosed).step("caustic")
    assert (step.hold, step.dose.value, step.dose.unit) == (None, 3.25, "mg/L")


def test_what_is_not_there_is_refused_in_words(dosed):
    """A dial that there is not, and one that is not held."""
    with pytest.raises(ScenarioError, match="is not a dial of this scenario"):
        set_hold(dosed, "train.acid.dose", 0, readout="ph", value=8)
    with pytest.raises(ScenarioError, match="is not a dial that is held"):
        release(dosed, DOSE, 1)


@pytest.mark.parametrize(
    ("address", "places"),
    [
        ("waters.well.share", ["blend", "caustic", "bed", "aside", "finished"]),
        ("waters.well.analysis.ph", ["well", "blend", "caustic", "bed", "aside", "finished"]),
        (DOSE, ["caustic", "bed", "aside", "finished"]),
        ("train.aside.train.bed.approach", ["bed", "aside", "finished"]),
        ("train.aside.fraction", ["aside", "finished"]),
    ],
)
def test_a_dial_reaches_what_lies_behind_it(dosed, address, places):
    """In flow order; what is on a side stream comes before it joins."""
    assert downstream(dosed, address) == places


def test_a_hold_rests_while_its_place_is_out_of_service(dosed):
    """The dial then stands as entered."""
    set_hold(dosed, "waters.well.share", 40, readout="ph", value=8, stage="caustic")
    assert resting(dosed) == set()
    dosed.step("caustic").on = False
    assert resting(dosed) == {"waters.well.share"}
    assert float(evaluate(dosed).stands("waters.well.share")) == 40


def test_shares_stand_as_the_held_one_leaves_them(dosed):
    """And the dose of a held step as computed."""
    set_hold(dosed, "waters.well.share", 40, readout="nitrate", value=15)
    set_hold(dosed, DOSE, 4, readout="ph", value=8.2, stage="caustic", high=30)
    outcome = evaluate(dosed)
    shares = [float(outcome.stands(f"waters.{water}.share")) for water in ("river", "well")]
    assert sum(shares) == pytest.approx(100) and shares[1] != pytest.approx(40, abs=1)
    assert float(outcome.stands(DOSE)) == pytest.approx(float(outcome.dosing["caustic"].value))


def test_a_share_turned_by_hand_leaves_a_held_one_its_part(dosed):
    """Of two shares the other one takes the rest, so that nothing is held."""
    set_hold(dosed, "waters.well.share", 40, readout="nitrate", value=15)
    outcome = evaluate(dosed, {"waters.river.share": [20.0, 80.0]})
    assert outcome.stands("waters.well.share") == pytest.approx([80, 20])
    assert (outcome.reasons() == "").all() and not outcome.held
