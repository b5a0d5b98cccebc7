"""Sweep: one dial over a range, with crossings, extremes and gaps."""

import numpy as np
import pytest

from explorer.scenario.errors import ScenarioError
from explorer.scenario.evaluate import evaluate
from explorer.studies.sweep import sweep

SHARE = "waters.well.share"


@pytest.fixture
def blend(plant):
    targets = [{"readout": "ccpp", "low": -5}, {"readout": "ph", "low": 7.4, "high": 8.5}]
    return plant(
        {"river": 60, "well": 40},
        sweep={"dial": SHARE, "start": 0, "stop": 100, "points": 41},
        targets=targets,
    )


def test_the_scenarios_own_sweep_is_the_usual_one(blend):
    """Dial, range and points as in the file; the dial comes with its label and unit."""
    swept = sweep(blend)
    assert (swept.address, swept.dial.label, swept.dial.unit) == (SHARE, "Share of Well", "%")
    assert swept.x == pytest.approx(np.linspace(0, 100, 41))
    assert swept.outcome.shape == (41,)


def test_another_dial_has_a_range_of_its_own(plant):
    """A share runs over all of it, a dose to twice its value, with 101 points."""
    scenario = plant({"river": 60, "well": 40}, [plant.dosed("caustic", "sodium_hydroxide", 8, "mg/L")])
    assert sweep(scenario).address == "waters.river.share"
    swept = sweep(scenario, "train.caustic.dose")
    assert (swept.x[0], swept.x[-1], swept.x.size) == (0, 16, 101)


def test_a_single_water_is_swept_along_a_dose_or_its_temperature(plant):
    """Its share has nothing to turn against."""
    dosed = plant({"river": 100}, [plant.dosed("caustic", "sodium_hydroxide", 8, "mg/L")])
    assert sweep(dosed).address == "train.caustic.dose"
    assert sweep(plant({"river": 100})).address == "waters.river.analysis.temperature"


def test_a_swept_dial_out_of_service_gives_way_to_another(blend):
    """Until its water comes back; naming it is refused."""
    blend.water("well").on = False
    assert sweep(blend).address == "waters.river.analysis.temperature"
    with pytest.raises(ScenarioError, match="dial"):
        sweep(blend, SHARE)
    blend.water("well").on, blend.water("river").on = True, False
    assert sweep(blend).address == "waters.well.analysis.temperature"
    blend.water("river").on = True
    assert sweep(blend).address == SHARE


def test_overrides_hold_other_dials(blend):
    """The sweep at a warmer river is the sweep of a warmer river."""
    warm = {"waters.river.analysis.temperature": 15.0}
    swept = sweep(blend, overrides=warm)
    single = evaluate(blend, {**warm, SHARE: 50.0})
    assert swept.outcome.readout("ph")[20] == pytest.approx(float(single.readout("ph")), abs=1e-9)


def test_crossings_are_where_single_evaluations_meet_the_limit(blend):
    """The blend falls under CCPP −5 and rises again; both ends are exact, not on the grid."""
    swept = sweep(blend)
    found = swept.crossings(blend.targets[0])
    assert len(found) == 2
    for x in found:
        assert evaluate(blend, {SHARE: x}).readout("ccpp") == pytest.approx(-5, abs=1e-3)
    down, up = swept.crossed(blend.targets[0])
    assert (down.rising, up.rising) == (False, True)


def test_both_limits_of_a_target_are_looked_at(blend):
    """pH leaves the upper limit near the river and the lower one further on."""
    crossed = sweep(blend).crossed(blend.targets[1])
    assert [crossing.limit for crossing in crossed] == [8.5, 7.4]


def test_a_sweep_that_runs_downwards_crosses_at_the_same_place(blend):
    """From 100 to 0 the crossings are the same, in rising order."""
    up, down = sweep(blend), sweep(blend, SHARE, 100.0, 0.0)
    assert down.crossings(blend.targets[0]) == pytest.approx(up.crossings(blend.targets[0]), abs=1e-6)


def test_a_readout_held_at_its_limit_does_not_flicker(plant):
    """pH held at 8.5 with a target up to 8.5 crosses nowhere."""
    scenario = plant(
        {"river": 20, "well": 80},
        [plant.held("caustic", "sodium_hydroxide", "ph", 8.5, 100, "mg/L")],
        targets=[{"readout": "ph", "high": 8.5}],
    )
    swept = sweep(scenario, SHARE, 20.0, 100.0)
    assert swept.crossings(scenario.targets[0]) == []
    assert swept.outcome.targets()[0][2].all()


def test_the_lowest_point_inside_the_range_is_found(blend):
    """Between two precipitating waters the blend dissolves most at an interior share."""
    (extreme,) = sweep(blend).extremes("ccpp")
    assert extreme.lowest
    fine = evaluate(blend, {SHARE: np.linspace(0, 100, 2001)}).readout("ccpp")
    assert extreme.value == pytest.approx(fine.min(), abs=0.01)
    assert 0 < extreme.x < 100


def test_gaps_carry_their_reason(blend):
    """River pH swept into the impossible: a gap from there on."""
    swept = sweep(blend, "waters.river.analysis.ph", 8.0, 12.0, 9)
    (gap,) = swept.gaps()
    assert gap.stop == 12
    assert gap.reason == "no water has the entered analysis"
    assert np.isnan(swept.outcome.readout("ph")[swept.x >= gap.start]).all()
    assert swept.gaps("ccpp") == [gap]


def test_gaps_of_a_stage_are_its_own(blend):
    """Where one water has no answer the other still has."""
    swept = sweep(blend, "waters.river.analysis.ph", 8.0, 12.0, 9)
    assert swept.gaps(stage="river") == swept.gaps()
    assert swept.gaps(stage="well") == []


def test_plain_data_has_none_where_there_is_no_answer(blend):
    """Lists of numbers, None for a gap, and a note that counts the points."""
    plain = sweep(blend, "waters.river.analysis.ph", 8.0, 12.0, 3).to_dict(["ph", "calcium"])
    assert plain["dial"] == "waters.river.analysis.ph"
    assert plain["unit"] == ""
    assert plain["x"] == [8, 10, 12]
    assert plain["readouts"]["ph"][2] is None
    assert plain["readouts"]["calcium"][2] is None
    assert any("of 3 points" in note["text"] for note in plain["notes"])


def test_a_table_has_the_dials_that_are_held(plant):
    """Beside held doses: what an air contact takes to keep the carbon dioxide."""
    tower = {"id": "tower", "step": "air", "approach": 50}
    scenario = plant(
        {"river": 50, "well": 50}, [tower], holds={"train.tower.approach": {"readout": "co2", "value": 5}}
    )
    swept = sweep(scenario, SHARE, 40, 80, 3)
    heading, *rows = swept.table(["co2"])
    assert heading[2] == "Approach to equilibrium of Air contact [%]"
    assert [row[1] for row in rows] == pytest.approx([5, 5, 5], abs=1e-6)
    assert [row[2] for row in rows] == swept.outcome.held["train.tower.approach"].value.tolist()


def test_a_table_has_units_in_its_heading_and_held_doses(plant):
    """What a spreadsheet needs: dial, readouts, the doses that were computed, why a row is empty."""
    scenario = plant(
        {"river": 60, "well": 40}, [plant.held("caustic", "sodium_hydroxide", "ph", 8.5, 60, "mg/L")]
    )
    heading, *rows = sweep(scenario, SHARE, 0.0, 100.0, 5).table(["ph", "calcium"])
    assert heading == [
        "Share of Well [%]", "pH", "Calcium [mg/L]", "Dose of Sodium hydroxide [mg/L]", "No answer because",
    ]  # fmt: skip
    assert len(rows) == 5
    assert rows[4][1] == pytest.approx(8.5)


@pytest.mark.parametrize(
    ("arguments", "words"),
    [
        (("waters.wel.share", 0, 100, 5), "perhaps waters.well.share"),
        ((SHARE, 0, 100, 1), "points: 1 is out of range; allowed 2 to 2001"),
        ((SHARE, 50, 50, 5), "stop: 50 to 50 is no range"),
        ((SHARE, 0, float("inf"), 5), "is no range"),
    ],
)
def test_a_sweep_that_makes_no_sense_is_refused(blend, arguments, words):
    """Unknown dial, too few points, no length: one sentence."""
    with pytest.raises(ScenarioError) as refusal:
        sweep(blend, *arguments)
    assert words in str(refusal.value)
