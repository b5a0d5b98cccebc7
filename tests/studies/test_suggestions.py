"""Usual tolerances, offered where none is entered."""

import pytest

from explorer.scenario.dials import dials
from explorer.scenario.files import open_scenario
from explorer.scenario.model import Scenario
from explorer.scenario.shipped import shipped
from explorer.studies.suggestions import suggested_tolerance, suggested_tolerances


def widths(scenario):
    return {
        address: suggestion.tolerance.to_dict()
        for address, suggestion in suggested_tolerances(scenario).items()
    }


@pytest.fixture
def plant_with_everything(plant):
    return plant(
        {"river": 60, "moor": 40},
        [
            plant.dosed("lime", "calcium_hydroxide", 10, "mg/L"),
            plant.dosed("hypo", "sodium_hypochlorite", 1, "mg/L as Cl2", price=0.3),
            plant.held("caustic", "sodium_hydroxide", "ph", 8.2, 40, "mg/L"),
            {"id": "aside", "step": "side_stream", "fraction": 40, "train": [
                {"id": "bed", "step": "limestone", "approach": 90}
            ]},
            {"id": "tower", "step": "air", "approach": 80},
        ],
    )  # fmt: skip


def test_half_widths_are_those_of_common_practice(plant_with_everything):
    """The figures of the trade: percent for amounts, degrees, points for shares and approaches."""
    found = widths(plant_with_everything)
    percent = {
        "flow": 3,
        "waters.river.analysis.alkalinity": 5,
        "waters.river.analysis.calcium": 5,
        "waters.river.analysis.chloride": 10,
        "train.lime.dose": 8,
        "train.lime.strength": 3,
        "train.hypo.dose": 3,
    }
    for address, width in percent.items():
        assert found[address] == {"plus_minus": width, "unit": "%"}, address
    points = {
        "waters.river.share": 2,
        "waters.river.analysis.temperature": 1,
        "train.aside.fraction": 2,
        "train.aside.train.bed.approach": 3,
        "train.caustic.hold.value": 0.1,
    }
    for address, width in points.items():
        assert found[address] == {"plus_minus": width}, address


def test_the_ph_of_soft_water_is_harder_to_read(plant_with_everything):
    """± 0.1, and ± 0.2 below 50 mg/L of alkalinity."""
    found = widths(plant_with_everything)
    assert found["waters.river.analysis.ph"] == {"plus_minus": 0.1}
    assert found["waters.moor.analysis.ph"] == {"plus_minus": 0.2}


def test_a_small_alkalinity_is_off_by_two_milligrams(plant):
    """5 % or 2 mg/L as CaCO3, whichever is larger, in the entered unit."""
    assert widths(plant({"moor": 100}))["waters.moor.analysis.alkalinity"] == {"plus_minus": 2}
    raw = plant.dict({"moor": 100})
    given = {"value": 0.15, "unit": "mmol/L"}
    raw["waters"][0]["analyses"]["winter"] = plant.sheet("moor", alkalinity=given)
    assert widths(plant.read(raw))["waters.moor.analysis.alkalinity"] == {
        "plus_minus": pytest.approx(0.04, rel=1e-3)
    }


def test_hypochlorite_only_loses_strength(plant_with_everything):
    """One side: nothing is gained in store."""
    assert widths(plant_with_everything)["train.hypo.strength"] == {"minus": 20, "plus": 0, "unit": "%"}


def test_a_non_detect_may_be_anything_up_to_its_limit(plant):
    """Half the limit is used, and half the limit is the width."""
    raw = plant.dict({"river": 100})
    raw["waters"][0]["analyses"]["winter"] = plant.sheet("river", fluoride={"below": 0.1, "unit": "mg/L"})
    assert widths(plant.read(raw))["waters.river.analysis.fluoride"] == {"plus_minus": 0.05}


@pytest.mark.parametrize(
    "address",
    ["train.hypo.price", "train.tower.altitude", "train.tower.approach", "train.caustic.hold.ceiling"],
)
def test_what_is_set_and_not_measured_has_no_suggestion(plant_with_everything, address):
    """Prices, settings of a model, ceilings."""
    dial = dials(plant_with_everything)[address]
    assert suggested_tolerance(plant_with_everything, dial) is None


def test_what_is_absent_and_a_lone_share_have_no_suggestion(plant):
    """Percent of nothing is nothing, and a single water has the whole share."""
    raw = plant.dict({"river": 100})
    raw["waters"][0]["analyses"]["winter"] = plant.sheet("river", silica=0)
    found = widths(plant.read(raw))
    assert "waters.river.analysis.silica" not in found
    assert "waters.river.share" not in found


@pytest.mark.parametrize("name", sorted(shipped()))
def test_suggestions_can_be_taken_over(name):
    """Every suggestion of every shipped scenario makes a valid file and says where it comes from."""
    scenario = open_scenario(shipped()[name])
    found = suggested_tolerances(scenario)
    raw = scenario.to_dict() | {"tolerances": widths(scenario)}
    assert Scenario.from_dict(raw).tolerances.keys() == found.keys()
    assert {suggestion.source for suggestion in found.values()} == {"common practice"}
    assert all(suggestion.reason for suggestion in found.values())


def test_a_held_ph_is_as_good_as_its_meter_whatever_holds_it(plant):
    """Of other held readouts nothing is usual."""
    holds = {
        "waters.well.share": {"readout": "ph", "value": 7.8},
        "waters.river.analysis.nitrate": {"readout": "nitrate", "value": 15, "high": 60},
    }
    found = widths(plant({"river": 60, "well": 40}, holds=holds))
    assert found["waters.well.share.hold.value"] == {"plus_minus": 0.1}
    assert "waters.river.analysis.nitrate.hold.value" not in found
