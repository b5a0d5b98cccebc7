"""Kept options: named, dropped, gone back to."""

import pytest

from explorer.scenario.editing import keep_option, take_option
from explorer.scenario.files import ScenarioError, dumps, open_scenario, read_scenario
from explorer.scenario.model import Scenario
from explorer.scenario.options import drop_option, free_name, rename_option
from explorer.scenario.shipped import shipped


@pytest.fixture
def scenario() -> Scenario:
    """The shipped river and wellfield with two kept options."""
    scenario = open_scenario(shipped()["amber"])
    keep_option(scenario, "Base", note="as agreed", kept="2026-02-03 10:00")
    scenario.waters[0].share, scenario.waters[1].share = 30, 70
    keep_option(scenario, "More wellfield")
    return scenario


def test_renamed_option_keeps_what_was_kept(scenario: Scenario) -> None:
    """Only the name is another; the file holds it."""
    before = scenario.options[0].to_dict()
    rename_option(scenario, "Base", "Agreed")
    assert scenario.options[0].to_dict() == {**before, "name": "Agreed"}
    assert read_scenario(dumps(scenario)).options[0].name == "Agreed"


def test_dropped_option_leaves_the_others(scenario: Scenario) -> None:
    """Those behind it move up."""
    drop_option(scenario, "Base")
    assert [option.name for option in scenario.options] == ["More wellfield"]


@pytest.mark.parametrize("act", [lambda s: drop_option(s, "C"), lambda s: rename_option(s, "C", "D")])
def test_unknown_option_is_refused(scenario: Scenario, act) -> None:
    """The sentence lists those there are."""
    with pytest.raises(ScenarioError, match="Base, More wellfield"):
        act(scenario)


def test_option_comes_back_with_all_options_beside_it(scenario: Scenario) -> None:
    """Going back loses no option and shares nothing with what is kept."""
    working = take_option(scenario, "Base")
    assert working.waters[1].share == 40
    assert [option.name for option in working.options] == ["Base", "More wellfield"]
    working.waters[1].share = 50
    assert scenario.options[0].scenario.waters[1].share == 40


def test_free_name_is_one_no_option_has(scenario: Scenario) -> None:
    """A wish that is taken gets a number."""
    assert free_name(scenario, "New") == "New"
    assert free_name(scenario, "Base") == "Base 2"
    assert free_name(scenario, "  ") == "Option"
