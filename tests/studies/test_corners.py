"""Extremes: the lowest and highest within all tolerances together, wherever they hide."""

from itertools import product

import numpy as np
import pytest

from explorer.scenario.errors import ScenarioError
from explorer.scenario.evaluate import evaluate
from explorer.scenario.files import open_scenario
from explorer.scenario.model import Scenario
from explorer.scenario.shipped import shipped
from explorer.studies.corners import envelope, extremes, worst
from explorer.studies.progress import Stopped, Watch
from explorer.studies.spread import spread_of

WELL = "waters.well.share"


@pytest.fixture(scope="module")
def amber():
    return open_scenario(shipped()["amber"])


def with_tolerances(scenario, **changed):
    """A scenario with only some of its tolerances, or others."""
    return Scenario.from_dict(scenario.to_dict() | changed)


def some_of(scenario, addresses):
    kept = {address: scenario.tolerances[address].to_dict() for address in addresses}
    return with_tolerances(scenario, tolerances=kept)


EIGHT = (
    "waters.river.analysis.ph", "waters.river.analysis.alkalinity", "waters.river.analysis.calcium",
    "waters.well.analysis.ph", "waters.well.analysis.alkalinity", "waters.well.analysis.calcium",
    "waters.well.share", "train.hypo.dose",
)  # fmt: skip


def by_hand(scenario, key):
    """The readout at every combination of the ends of all tolerances, by plain evaluation."""
    nominal = evaluate(scenario).inputs
    ends = {}
    for address, tolerance in scenario.tolerances.items():
        value = float(nominal[address])
        minus, plus = (side * (value / 100 if tolerance.unit == "%" else 1) for side in tolerance.sides)
        ends[address] = (value - minus, value + plus)
    combinations = np.array(list(product(*ends.values())))
    return evaluate(scenario, dict(zip(ends, combinations.T, strict=True))).readout(key)


# ---- corners -----------------------------------------------------------------------------------------------


def test_in_proportion_the_widths_add(plant):
    """Chloride of a blend with both analyses off: all widths in the same direction, hand arithmetic."""
    tolerances = {
        "waters.river.analysis.chloride": {"plus_minus": 2},
        "waters.well.analysis.chloride": {"minus": 4, "plus": 1},
    }
    low, high = extremes(plant({"river": 60, "well": 40}, tolerances=tolerances), "chloride")
    assert low.value == pytest.approx(0.6 * (15 - 2) + 0.4 * (38 - 4))
    assert high.value == pytest.approx(0.6 * (15 + 2) + 0.4 * (38 + 1))
    assert low.places == {
        "waters.river.analysis.chloride": -1,
        "waters.well.analysis.chloride": -1,
    }
    assert high.dials == {"waters.river.analysis.chloride": 17, "waters.well.analysis.chloride": 39}
    assert low.corner
    assert high.corner


def test_extremes_are_those_of_all_combinations(amber):
    """Every one of 256 corners is calculated: the result is that of brute force."""
    scenario = some_of(amber, EIGHT)
    values = by_hand(scenario, "ccpp")
    low, high = extremes(scenario, "ccpp")
    assert low.value == pytest.approx(values.min(), abs=1e-6)
    assert high.value == pytest.approx(values.max(), abs=1e-6)


def test_one_at_a_time_misses_what_the_corners_find(amber):
    """In the bad blend the alkalinity of the well has no slope to speak of: judged one at a time, the worst
    combination comes out wrong."""
    scenario = some_of(amber, EIGHT)
    nominal = evaluate(scenario).inputs
    lowest = {}
    for address in scenario.tolerances:
        alone = some_of(scenario, [address])
        values = by_hand(alone, "ccpp")
        minus, plus = alone.tolerances[address].sides
        scale = float(nominal[address]) / 100 if alone.tolerances[address].unit == "%" else 1
        lowest[address] = float(nominal[address]) + (plus if values[1] < values[0] else -minus) * scale
    one_at_a_time = float(evaluate(scenario, lowest).readout("ccpp"))
    low, _ = extremes(scenario, "ccpp")
    assert low.value < one_at_a_time - 0.02
    assert low.places["waters.well.analysis.alkalinity"] == 1


def test_with_many_inputs_nothing_random_is_more_extreme(amber):
    """Eighteen inputs, the strongest combined: 20 000 random corners stay within the extremes."""
    low, high = extremes(amber, "ccpp")
    spread = spread_of(amber)
    assert len(spread) == 18
    places = np.random.default_rng(3).choice([-1.0, 1.0], (18, 20_000))
    values = evaluate(amber, spread.placed(places, {})).readout("ccpp")
    assert low.value <= values.min()
    assert high.value >= values.max()
    assert low.value > values.min() - 1
    assert high.value < values.max() + 1


def test_the_dials_of_an_extreme_lead_to_it(amber):
    """Turned by hand, they give the value."""
    low, high = extremes(amber, "ccpp", overrides={WELL: 55})
    for extreme in (low, high):
        assert float(evaluate(amber, extreme.dials).readout("ccpp")) == pytest.approx(extreme.value, abs=1e-7)


# ---- inside ------------------------------------------------------------------------------------------------


def test_an_extreme_that_lies_inside_is_found(amber):
    """The share may be anything: the lowest CCPP is in between, at neither end, as a dense sweep shows."""
    scenario = with_tolerances(amber, tolerances={WELL: {"minus": 40, "plus": 60}})
    low, high = extremes(scenario, "ccpp")
    dense = evaluate(scenario, {WELL: np.linspace(0, 100, 4001)}).readout("ccpp")
    assert low.value == pytest.approx(dense.min(), abs=1e-3)
    assert not low.corner
    assert low.dials[WELL] == pytest.approx(100 * dense.argmin() / 4000, abs=1.5)
    assert high.value == pytest.approx(dense.max(), abs=1e-6)
    assert high.corner


def test_extremes_along_a_sweep(amber):
    """Every column of an envelope is the extreme of a scenario that stands there."""
    scenario = some_of(amber, EIGHT[3:])
    x = np.array([0.0, 40, 95])
    found = envelope(spread_of(scenario), "ccpp", {WELL: x})
    for column, share in enumerate(x):
        low, high = extremes(scenario, "ccpp", overrides={WELL: share})
        assert found.low[column] == pytest.approx(low.value, abs=0.01)
        assert found.high[column] == pytest.approx(high.value, abs=0.01)


def test_extremes_pass_by_places_without_an_answer(plant):
    """Combinations that leave no alkalinity for the floc have no pH; the lowest is of those that have."""
    scenario = plant(
        {"moor": 100},
        [plant.dosed("alum", "aluminium_sulfate", 14, "mg/L")],
        tolerances={"train.alum.dose": {"plus_minus": 50, "unit": "%"}},
    )
    low, high = extremes(scenario, "ph")
    dense = evaluate(scenario, {"train.alum.dose": np.linspace(7, 21, 2001)}).readout("ph")
    assert np.isnan(dense).any()
    assert np.nanmin(dense) - 0.01 <= low.value <= np.nanmin(dense) + 0.15
    assert high.value == pytest.approx(np.nanmax(dense), abs=1e-6)


# ---- anywhere ----------------------------------------------------------------------------------------------


def test_the_worst_place_anywhere_is_that_of_brute_force(amber):
    """Over the share, both seasons and all corners of five inputs."""
    scenario = some_of(amber, EIGHT[:6])
    low, high = worst(scenario, "ccpp", WELL)
    shares = np.linspace(0, 100, 201)
    by_season = {}
    for season in amber.seasons:
        shown = with_tolerances(scenario, season=season)
        spread = spread_of(shown)
        places = np.array(list(product((-1.0, 1.0), repeat=6))).T[:, :, None]
        by_season[season] = evaluate(shown, spread.placed(places, {WELL: shares})).readout("ccpp")
    lowest = min(by_season, key=lambda season: by_season[season].min())
    assert low.season == lowest == "winter"
    assert low.value == pytest.approx(by_season[lowest].min(), abs=2e-3)
    assert low.x == pytest.approx(shares[by_season[lowest].min(axis=0).argmin()], abs=1)
    assert high.value == pytest.approx(max(values.max() for values in by_season.values()), abs=1e-3)


def test_the_worst_place_of_one_season(amber):
    """Asked for the summer, only the summer counts."""
    low, _ = worst(some_of(amber, EIGHT[3:5]), "ccpp", WELL, points=11, seasons=["summer"])
    assert low.season == "summer"


def test_a_season_without_an_answer_is_passed_by(plant):
    """In winter the alum leaves no alkalinity at all; the worst is looked for in summer."""
    raw = plant.dict(
        {"moor": 100},
        [plant.dosed("alum", "aluminium_sulfate", 30, "mg/L")],
        seasons=["winter", "summer"],
        tolerances={"train.alum.dose": {"plus_minus": 2, "unit": "%"}},
    )
    raw["waters"][0]["analyses"]["summer"] = plant.sheet("moor", alkalinity=60, ph=7.5)
    low, high = worst(plant.read(raw), "ph", "waters.moor.analysis.calcium", 3, 4, 3)
    assert low.season == high.season == "summer"


# ---- asking ------------------------------------------------------------------------------------------------


def test_what_cannot_be_asked_is_refused(plant, amber):
    """One sentence for an unknown readout, for no tolerances, and for no answer anywhere."""
    with pytest.raises(ScenarioError, match=r'^readout: "acidity" is not a readout'):
        extremes(amber, "acidity")
    with pytest.raises(ScenarioError, match=r"^tolerances: nothing may be off"):
        extremes(plant({"river": 100}), "ph")
    exhausted = plant(
        {"moor": 100},
        [plant.dosed("alum", "aluminium_sulfate", 60, "mg/L")],
        tolerances={"train.alum.dose": {"plus_minus": 1, "unit": "%"}},
    )
    with pytest.raises(ScenarioError, match="no answer anywhere within the tolerances"):
        extremes(exhausted, "ph")


def test_progress_rises_and_the_search_can_be_stopped(amber):
    """The watcher hears of rising parts up to 1; asked to stop, the search ends."""
    heard = []
    worst(some_of(amber, EIGHT), "ccpp", WELL, points=5, watch=Watch(heard.append))
    assert heard == sorted(heard)
    assert heard[-1] == pytest.approx(1)
    with pytest.raises(Stopped):
        extremes(amber, "ccpp", watch=Watch(stop=lambda: True))
