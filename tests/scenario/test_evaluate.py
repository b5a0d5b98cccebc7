"""The evaluation: blending, shares, broadcasting, and points without an answer."""

import numpy as np
import pytest

from explorer.scenario.errors import ScenarioError
from explorer.scenario.evaluate import evaluate

THREE = {"river": 50.0, "well": 30.0, "transfer": 20.0}
SAME_PH = 1e-9


def marked(plant, shares, **parts):
    """A plant whose waters can be told apart in the blend: each alone holds one ion, 100 mg/L of it."""
    markers = dict(zip(shares, ("chloride", "sodium", "sulfate"), strict=False))
    raw = plant.dict(shares, **parts)
    for water in raw["waters"]:
        ions = {ion: 100.0 if markers[water["id"]] == ion else 0.0 for ion in markers.values()}
        water["analyses"]["winter"] = plant.sheet("river", **{**ions, "nitrate": None, "potassium": None})
    return plant.read(raw), markers


def parts_of(outcome, markers):
    return {water: outcome.readout(ion, "blend") for water, ion in markers.items()}


# ---- blending ----------------------------------------------------------------------------------------------


def test_stages_follow_the_flow(plant):
    """Each source and its train, the blend, the common train; the last is the finished water."""
    raw = plant.dict(
        {"river": 60, "well": 40}, [plant.dosed("hypo", "sodium_hypochlorite", 1, "mg/L as Cl2")]
    )
    raw["waters"][1]["train"] = [plant.dosed("lime", "calcium_hydroxide", 5, "mg/L")]
    outcome = evaluate(plant.read(raw))
    assert [stage.id for stage in outcome.stages] == ["river", "well", "lime", "blend", "hypo"]
    assert outcome.stage("finished") is outcome.stages[-1]


def test_a_source_keeps_the_ph_it_was_measured_at(plant):
    """Turning an analysis into totals and solving them again returns the entered pH."""
    outcome = evaluate(plant(THREE))
    assert outcome.readout("ph", "river") == pytest.approx(8.6, abs=1e-8)
    assert outcome.readout("ph", "well") == pytest.approx(7.25, abs=1e-8)


def test_conserved_totals_mix_in_proportion(plant):
    """Alkalinity, calcium and heat of the blend are the share-weighted means; hand arithmetic."""
    outcome = evaluate(plant(THREE))
    assert outcome.readout("alkalinity", "blend") == pytest.approx(0.5 * 64 + 0.3 * 272 + 0.2 * 58)
    assert outcome.readout("calcium", "blend") == pytest.approx(0.5 * 26 + 0.3 * 116 + 0.2 * 30)
    assert outcome.readout("temperature", "blend") == pytest.approx(0.5 * 4 + 0.3 * 11 + 0.2 * 14)


def test_the_ph_of_a_blend_is_not_the_mean_ph(plant):
    """Hard well water pulls a blend well below the mean of the two pH values."""
    outcome = evaluate(plant({"river": 50, "well": 50}))
    assert outcome.readout("ph", "blend") < (8.6 + 7.25) / 2 - 0.3


def test_two_precipitating_waters_make_a_dissolving_blend(plant):
    """Each source is supersaturated, the blend in between is not."""
    outcome = evaluate(plant({"river": 60, "well": 40}))
    assert outcome.readout("ccpp", "river") > 0
    assert outcome.readout("ccpp", "well") > 0
    assert outcome.readout("ccpp", "blend") < -5


@pytest.mark.parametrize("share", [0, 1, 50, 99.9, 100])
def test_water_blended_with_itself_stays_itself(plant, share):
    """Any mixture of a water with itself has the pH and the CCPP of that water."""
    raw = plant.dict({"river": share, "well": 100 - share})
    raw["waters"][1]["analyses"]["winter"] = plant.sheet("river")
    outcome = evaluate(plant.read(raw))
    assert outcome.readout("ph") == pytest.approx(8.6, abs=SAME_PH)
    assert outcome.readout("ccpp") == pytest.approx(float(outcome.readout("ccpp", "river")), abs=1e-8)


def test_the_order_of_the_waters_does_not_matter(plant):
    """Waters listed the other way round make the same blend."""
    forward = evaluate(plant(THREE)).readout("ph")
    backward = evaluate(plant(dict(reversed(THREE.items())))).readout("ph")
    assert forward == pytest.approx(float(backward), abs=SAME_PH)


def test_scaling_all_flows_changes_nothing_but_flows(plant):
    """Waters given by flow blend by their ratio, whatever the units."""
    raw = plant.dict({"river": 60, "well": 40}, flow=None)
    del raw["flow"]
    for water, flow in zip(raw["waters"], (3.0, 2.0), strict=True):
        del water["share"]
        water["flow"] = {"value": flow, "unit": "ML/d"}
    small = evaluate(plant.read(raw))
    raw["waters"][0]["flow"] = {"value": 30000, "unit": "m³/d"}
    raw["waters"][1]["flow"] = {"value": 20000, "unit": "m³/d"}
    large = evaluate(plant.read(raw))
    shared = evaluate(plant({"river": 60, "well": 40}))
    assert small.readout("ph") == pytest.approx(float(shared.readout("ph")), abs=SAME_PH)
    assert large.readout("ph") == pytest.approx(float(shared.readout("ph")), abs=SAME_PH)
    assert float(large.stage("blend").flow) == pytest.approx(10 * float(small.stage("blend").flow))


# ---- broadcasting ------------------------------------------------------------------------------------------


def test_an_array_dial_equals_a_loop_of_single_evaluations(plant):
    """One call over 21 shares gives the pH of 21 calls to 1e-9."""
    train = [
        plant.dosed("acid", "phosphoric_acid", 1, "mg/L as P"),
        plant.held("caustic", "sodium_hydroxide", "ph", 8.0, 40, "mg/L"),
    ]
    scenario = plant(THREE, train)
    x = np.linspace(0, 100, 21)
    at_once = evaluate(scenario, {"waters.well.share": x})
    for position, value in enumerate(x):
        single = evaluate(scenario, {"waters.well.share": value})
        for key in ("ph", "ccpp", "conductivity"):
            assert at_once.readout(key)[position] == pytest.approx(float(single.readout(key)), abs=1e-7)
        assert at_once.readout("ph")[position] == pytest.approx(float(single.readout("ph")), abs=SAME_PH)
        assert at_once.readout("ph", "blend")[position] == pytest.approx(
            float(single.readout("ph", "blend")), abs=SAME_PH
        )


def test_dials_of_different_shapes_broadcast(plant):
    """A column of pH values against a row of doses gives a table, equal to its single entries."""
    scenario = plant(THREE, [plant.dosed("caustic", "sodium_hydroxide", 5, "mg/L")])
    ph, dose = np.array([[7.0], [7.25], [7.5]]), np.array([0.0, 5.0, 10.0, 15.0])
    table = evaluate(scenario, {"waters.well.analysis.ph": ph, "train.caustic.dose": dose})
    assert table.shape == (3, 4)
    assert table.readout("ph").shape == (3, 4)
    assert table.readout("ph", "river").shape == (3, 4)
    single = evaluate(scenario, {"waters.well.analysis.ph": 7.5, "train.caustic.dose": 10.0})
    assert table.readout("ph")[2, 2] == pytest.approx(float(single.readout("ph")), abs=SAME_PH)


def test_a_dial_at_its_own_value_changes_nothing(plant):
    """Every dial, given where it stands, leaves pH and cost alone."""
    from explorer.scenario.dials import dials

    train = [
        plant.dosed("alum", "polyaluminium_chloride", 1, "mg/L as Al", price=0.3, basicity=40),
        plant.dosed("caustic", "sodium_hydroxide", 15, "mg/L as product", price=0.5),
    ]
    scenario = plant(THREE, train)
    base = evaluate(scenario)
    for address, dial in dials(scenario).items():
        same = evaluate(scenario, {address: dial.value})
        assert same.readout("ph") == pytest.approx(float(base.readout("ph")), abs=1e-8), address
        assert same.readout("cost") == pytest.approx(float(base.readout("cost"))), address


def test_shapes_that_do_not_fit_are_refused(plant):
    """Two dials of three and four values have no common shape."""
    with pytest.raises(ScenarioError, match="do not fit together"):
        evaluate(
            plant(THREE), {"waters.well.share": np.zeros(3), "waters.river.analysis.ph": np.full(4, 8.0)}
        )


def test_an_unknown_address_is_refused_with_the_nearest(plant):
    """A misspelt dial is named together with the dial that was probably meant."""
    with pytest.raises(ScenarioError, match=r"waters\.wel\.share.*waters\.well\.share"):
        evaluate(plant(THREE), {"waters.wel.share": 5})


# ---- shares ------------------------------------------------------------------------------------------------


def test_the_other_waters_give_way_in_proportion(plant):
    """Well from 30 to 65 %: river and transfer keep their ratio of 5 to 2."""
    scenario, markers = marked(plant, THREE)
    found = parts_of(evaluate(scenario, {"waters.well.share": 65}), markers)
    assert [float(part) for part in found.values()] == pytest.approx([25, 65, 10])


def test_two_shares_given_leave_the_rest_to_the_third(plant):
    """A window over two shares: the third water is what is left."""
    scenario, markers = marked(plant, THREE)
    dials = {"waters.river.share": np.array([10.0, 20.0]), "waters.well.share": np.array([40.0, 80.0])}
    found = parts_of(evaluate(scenario, dials), markers)
    assert found["transfer"] == pytest.approx([50, 0], abs=1e-9)


def test_shares_above_the_whole_have_no_answer(plant):
    """Two shares that add to more than 100 % give a gap with its reason, not a rescaled blend."""
    dials = {"waters.river.share": np.array([40.0, 70.0]), "waters.well.share": 50.0}
    outcome = evaluate(plant(THREE), dials)
    assert np.isfinite(outcome.readout("ph")).tolist() == [True, False]
    assert outcome.reasons().tolist() == ["", "the shares do not add to 100 %"]


def test_a_balance_water_takes_the_change_alone(plant):
    """With a balance water the third share stays where it is."""
    scenario, markers = marked(plant, THREE, balance_water="river")
    found = parts_of(evaluate(scenario, {"waters.well.share": 65}), markers)
    assert [float(part) for part in found.values()] == pytest.approx([15, 65, 20])
    outcome = evaluate(scenario, {"waters.well.share": np.array([80.0, 81.0])})
    assert np.isfinite(outcome.readout("ph")).tolist() == [True, False]


def test_shares_are_equal_where_all_others_are_zero(plant):
    """From 100 % down, two waters at zero come in equally."""
    scenario, markers = marked(plant, {"river": 100, "well": 0, "transfer": 0})
    found = parts_of(evaluate(scenario, {"waters.river.share": 40}), markers)
    assert [float(part) for part in found.values()] == pytest.approx([40, 30, 30])


def test_a_water_out_of_service_leaves_its_share_to_the_rest(plant):
    """50/30/20 without the last is 62.5/37.5; its own stage can still be read."""
    scenario, markers = marked(plant, THREE)
    scenario.water("transfer").on = False
    outcome = evaluate(scenario)
    assert [float(part) for part in parts_of(outcome, markers).values()] == pytest.approx([62.5, 37.5, 0])
    assert np.isfinite(outcome.readout("ph", "transfer"))


def test_a_step_out_of_service_does_nothing(plant):
    """Switched off, a dose leaves no stage and no trace."""
    scenario = plant(THREE, [plant.dosed("caustic", "sodium_hydroxide", 10, "mg/L", on=False)])
    outcome = evaluate(scenario)
    assert outcome.stage("finished").id == "blend"
    assert outcome.doses == {}


# ---- temperatures and seasons ------------------------------------------------------------------------------


def test_warming_a_water_moves_its_ph_but_not_its_totals(plant):
    """The temperature dial warms the water; the pH stays read at the entered temperature."""
    scenario = plant({"well": 100})
    outcome = evaluate(scenario, {"waters.well.analysis.temperature": np.array([11.0, 25.0])})
    assert outcome.readout("ph")[0] == pytest.approx(7.25, abs=1e-8)
    assert outcome.readout("ph")[1] < 7.24
    assert outcome.readout("dic")[0] == pytest.approx(outcome.readout("dic")[1], rel=1e-12)


def test_a_season_brings_its_own_analyses(plant):
    """Another season is another water at the same shares."""
    raw = plant.dict({"river": 100}, seasons=["winter", "summer"])
    raw["waters"][0]["analyses"]["summer"] = plant.sheet("river", temperature=19, ph=8.3)
    scenario = plant.read(raw)
    assert evaluate(scenario).season == "winter"
    assert evaluate(scenario, season="summer").readout("ph") == pytest.approx(8.3, abs=1e-8)
    with pytest.raises(ScenarioError, match=r"season.*monsoon.*winter, summer"):
        evaluate(scenario, season="monsoon")


# ---- units -------------------------------------------------------------------------------------------------


def test_units_of_an_analysis_do_not_change_the_answer(plant):
    """The same water in °F, meq/L, °dH and mmol/L has the same finished pH."""
    chosen = {
        "temperature": {"value": 11 * 1.8 + 32, "unit": "°F"},
        "alkalinity": {"value": 272 / 50.0435, "unit": "meq/L"},
        "calcium": {"value": 116 / 40.078 / (10 / 56.077), "unit": "°dH"},
        "sulfate": {"value": 46 / 96.06, "unit": "mmol/L"},
        "nitrate": {"value": 29 * 14.007 / 62.004, "unit": "mg/L as N"},
    }
    raw = plant.dict({"well": 100})
    raw["waters"][0]["analyses"]["winter"] = plant.sheet("well", **chosen)
    other = evaluate(plant.read(raw))
    same = evaluate(plant({"well": 100}))
    assert other.readout("ph") == pytest.approx(float(same.readout("ph")), abs=1e-4)
    assert other.readout("ccpp") == pytest.approx(float(same.readout("ccpp")), abs=0.02)


# ---- points without an answer ------------------------------------------------------------------------------


def test_an_impossible_analysis_at_some_points_is_a_gap_with_its_reason(plant):
    """pH 12 with an alkalinity of 64 mg/L cannot be: that point is nan and says why."""
    outcome = evaluate(plant({"river": 100}), {"waters.river.analysis.ph": np.array([8.6, 12.0])})
    assert np.isfinite(outcome.readout("ph")).tolist() == [True, False]
    assert np.isnan(outcome.readout("calcium")[1])
    assert outcome.reasons().tolist() == ["", "no water has the entered analysis"]
    assert any(note.level == "error" and "1 of 2 points" in note.text for note in outcome.notes)


def test_an_impossible_water_without_share_does_no_harm(plant):
    """A point at which the impossible water is not used has an answer."""
    dials = {"waters.river.analysis.ph": 12.0, "waters.river.share": np.array([0.0, 10.0])}
    scenario = plant({"river": 50, "well": 50})
    with pytest.raises(ScenarioError):
        evaluate(scenario, dials)
    dials["waters.river.analysis.ph"] = np.array([[8.6], [12.0]])
    assert np.isfinite(evaluate(scenario, dials).readout("ph")).tolist() == [[True, True], [True, False]]


def test_an_impossible_analysis_names_the_entry(plant):
    """With no possible point at all, the field is named as in the file."""
    raw = plant.dict({"river": 100})
    raw["waters"][0]["analyses"]["winter"] = plant.sheet("river", ph=12)
    with pytest.raises(ScenarioError, match=r"^waters\[0\]\.analyses\.winter\.\w+: at this pH"):
        evaluate(plant.read(raw))


@pytest.mark.parametrize(
    ("address", "value"), [("train.caustic.dose", -1.0), ("waters.well.analysis.calcium", -3.0)]
)
def test_a_dial_turned_out_of_range_has_no_answer(plant, address, value):
    """A negative dose or concentration is flagged, never calculated with."""
    scenario = plant(THREE, [plant.dosed("caustic", "sodium_hydroxide", 5, "mg/L")])
    outcome = evaluate(scenario, {address: np.array([1.0, value])})
    assert np.isfinite(outcome.readout("ph")).tolist() == [True, False]
    assert outcome.reasons()[1] == "a dial is turned beyond what is allowed for it"


def test_targets_say_whether_and_by_how_much(plant):
    """Margin to the nearer limit, negative outside; a missing value meets nothing."""
    targets = [{"readout": "calcium", "low": 50, "high": 100}, {"readout": "hocl_percent", "low": 30}]
    outcome = evaluate(plant(THREE, targets=targets), {"waters.well.share": np.array([30.0, 100.0])})
    (_, value, met, margin), (_, missing, never, _) = outcome.targets()
    assert value == pytest.approx([53.8, 116.0], abs=0.1)
    assert met.tolist() == [True, False]
    assert margin == pytest.approx([3.8, -16.0], abs=0.1)
    assert np.isnan(missing).all()
    assert not never.any()
