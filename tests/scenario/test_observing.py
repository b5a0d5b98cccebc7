"""Measured points kept beside a scenario and dropped again."""

from typing import Any

import pytest

from explorer.scenario.errors import ScenarioError
from explorer.scenario.model import Scenario
from explorer.scenario.observing import drop_measured, keep_measured

JAR = {"dial": "train.base.dose"}


@pytest.fixture
def scenario(plant: Any) -> Scenario:
    return plant({"river": 60, "well": 40}, [plant.dosed("base", "sodium_hydroxide", 5, "mg/L")])


def test_measured_points_are_a_set_for_each_readout(scenario: Scenario) -> None:
    """Each has a name of its own, and the scenario can be saved and opened."""
    keep_measured(scenario, "Jar test", JAR, {"ph": [[0, 7.4], [5, 7.9]], "alkalinity": [[0, 120]]})
    found = [(part.name, part.readout) for part in scenario.measured]
    assert found == [("Jar test", "ph"), ("Jar test 2", "alkalinity")]
    assert Scenario.from_dict(scenario.to_dict()).same_as(scenario)


def test_a_long_name_leaves_room_for_its_number(scenario: Scenario) -> None:
    """The second set of a name as long as names may be is still allowed."""
    keep_measured(scenario, "n" * 80, JAR, {"ph": [[0, 7.4]], "alkalinity": [[0, 120]]})
    assert Scenario.from_dict(scenario.to_dict()).same_as(scenario)


def test_a_dropped_set_is_gone(scenario: Scenario) -> None:
    """The others stay; what is not there cannot go."""
    keep_measured(scenario, "Jar", JAR, {"ph": [[0, 7.4]], "alkalinity": [[0, 120]]})
    drop_measured(scenario, "Jar")
    assert [part.readout for part in scenario.measured] == ["alkalinity"]
    with pytest.raises(ScenarioError, match="is not a set of measured points"):
        drop_measured(scenario, "Jar")


def test_points_that_are_no_pairs_are_refused(scenario: Scenario) -> None:
    """Nothing is half kept."""
    with pytest.raises(ScenarioError, match=r"measured\[0\]\.points\[1\]"):
        keep_measured(scenario, "Jar", JAR, {"ph": [[0, 7], [1]]})
    assert scenario.measured == []
