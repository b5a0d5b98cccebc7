"""Targets entered, changed and taken away."""

import pytest

from explorer.scenario.files import ScenarioError, dumps, open_scenario
from explorer.scenario.model import Scenario
from explorer.scenario.shipped import shipped
from explorer.scenario.targets import drop_target, set_target, targets_of


@pytest.fixture
def scenario() -> Scenario:
    """The shipped river and wellfield."""
    return open_scenario(shipped()["amber"])


def test_target_is_entered_changed_and_taken_away(scenario: Scenario) -> None:
    """A new one goes to the end; the parts not named stay."""
    count = len(scenario.targets)
    set_target(scenario, "silica", 0, high=12)
    set_target(scenario, "silica", 0, basis="works standard")
    assert len(scenario.targets) == count + 1
    assert targets_of(scenario, "silica")[0].to_dict() == {
        "readout": "silica", "high": 12, "basis": "works standard",
    }  # fmt: skip
    drop_target(scenario, "silica", 0)
    assert targets_of(scenario, "silica") == []


def test_target_keeps_its_place_among_the_others(scenario: Scenario) -> None:
    """Changing one leaves the order alone."""
    order = [target.readout for target in scenario.targets]
    set_target(scenario, order[0], 0, low=-3)
    assert [target.readout for target in scenario.targets] == order


@pytest.mark.parametrize(
    ("parts", "sentence"),
    [
        ({"low": 9.0, "high": 7.0}, "lowest 9 is above highest 7"),
        ({"low": None, "high": None}, "needs a lowest or a highest value"),
    ],
)
def test_impossible_target_is_refused_and_changes_nothing(scenario: Scenario, parts, sentence: str) -> None:
    """The sentence says what is allowed."""
    before = dumps(scenario)
    with pytest.raises(ScenarioError, match=sentence):
        set_target(scenario, "ph", 0, **parts)
    with pytest.raises(ScenarioError, match="no such target"):
        drop_target(scenario, "silica", 0)
    assert dumps(scenario) == before
