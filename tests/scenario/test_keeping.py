"""Options and measured points: kept beside a scenario, renamed, returned to, dropped."""

from typing import Any

import pytest

from explorer.scenario.errors import ScenarioError
from explorer.scenario.keeping import (
    drop_measured,
    drop_option,
    keep_measured,
    keep_option,
    rename_option,
    return_to_option,
    unused,
)
from explorer.scenario.model import Scenario


@pytest.fixture
def scenario(plant: Any) -> Scenario:
    """A blend with an option at other shares."""
    made = plant({"river": 60, "well": 40}, [plant.dosed("base", "sodium_hydroxide", 5, "mg/L")])
    keep_option(made, "Half", note="for the meeting")
    return made


def readable(scenario: Scenario) -> None:
    """What can be saved can be opened again."""
    assert Scenario.from_dict(scenario.to_dict()).same_as(scenario)


def test_returning_to_an_option_brings_back_all_of_it_and_keeps_the_options(scenario: Scenario) -> None:
    """Whatever was changed meanwhile is as it was; the option can be returned to again."""
    before = scenario.copy()
    scenario.water("river").share, scenario.water("well").share = 10, 90
    scenario.train = []
    return_to_option(scenario, "Half")
    assert scenario.same_as(before)
    readable(scenario)


def test_a_renamed_option_keeps_its_place_and_content(scenario: Scenario) -> None:
    """Only the name is another."""
    keep_option(scenario, "Second")
    content = scenario.options[0].scenario
    rename_option(scenario, "Half", "First")
    assert [option.name for option in scenario.options] == ["First", "Second"]
    assert scenario.options[0].note == "for the meeting"
    assert scenario.options[0].scenario.same_as(content)
    readable(scenario)


@pytest.mark.parametrize(
    ("old", "new", "said"),
    [
        ("Half", "Second", "is there already"),
        ("Half", "", "allowed"),
        ("Third", "x", "is not an option"),
    ],
)
def test_a_name_that_is_none_or_taken_is_refused(scenario: Scenario, old: str, new: str, said: str) -> None:
    """In one sentence, and nothing changes."""
    keep_option(scenario, "Second")
    with pytest.raises(ScenarioError, match=said):
        rename_option(scenario, old, new)
    assert [option.name for option in scenario.options] == ["Half", "Second"]


def test_a_dropped_option_is_gone(scenario: Scenario) -> None:
    """The later ones move up."""
    keep_option(scenario, "Second")
    drop_option(scenario, "Half")
    assert [option.name for option in scenario.options] == ["Second"]
    with pytest.raises(ScenarioError, match="is not an option"):
        drop_option(scenario, "Half")


def test_measured_points_are_a_set_for_each_readout(scenario: Scenario) -> None:
    """With names of their own."""
    axis = {"dial": "train.base.dose"}
    keep_measured(scenario, "Jar test", axis, {"ph": [[0, 7.4], [5, 7.9]], "alkalinity": [[0, 120]]})
    assert [(part.name, part.readout) for part in scenario.measured] == [
        ("Jar test", "ph"),
        ("Jar test 2", "alkalinity"),
    ]
    readable(scenario)
    drop_measured(scenario, "Jar test")
    assert [part.readout for part in scenario.measured] == ["alkalinity"]
    with pytest.raises(ScenarioError, match="is not a set of measured points"):
        drop_measured(scenario, "Jar test")


def test_measured_points_that_are_no_pairs_are_refused(scenario: Scenario) -> None:
    """Nothing is half kept."""
    with pytest.raises(ScenarioError, match=r"measured\[0\]\.points\[1\]"):
        keep_measured(scenario, "Jar", {"dial": "train.base.dose"}, {"ph": [[0, 7], [1]]})
    assert scenario.measured == []


def test_an_unused_name_is_numbered() -> None:
    """From 2 on."""
    assert unused("A", []) == "A"
    assert unused("A", ["A", "A 2"]) == "A 3"
