"""Targets entered, changed and taken away, in place."""

from explorer.scenario.errors import ScenarioError
from explorer.scenario.model import Scenario, Target


def targets_of(scenario: Scenario, readout: str) -> list[Target]:
    """The targets of a readout, in the order entered."""
    return [target for target in scenario.targets if target.readout == readout]


def set_target(scenario: Scenario, readout: str, number: int, **parts: float | str | None) -> None:
    """Change ``parts`` (low, high, basis) of the target of a readout that has this ``number`` among its own;
    a number one beyond the last enters a new target. Raises ScenarioError.
    """
    own = targets_of(scenario, readout)
    old = own[number] if number < len(own) else None
    settings = {"low": None, "high": None, "basis": ""}
    settings |= {} if old is None else {key: getattr(old, key) for key in settings}
    settings |= parts
    low, high = settings["low"], settings["high"]
    if low is None and high is None:
        raise ScenarioError("targets", "a target needs a lowest or a highest value")
    if low is not None and high is not None and low > high:
        raise ScenarioError(
            "targets", f"lowest {low:g} is above highest {high:g}; allowed the other way round"
        )
    target = Target(readout=readout, **settings)
    if old is None:
        scenario.targets = [*scenario.targets, target]
    else:
        scenario.targets = [target if other is old else other for other in scenario.targets]


def drop_target(scenario: Scenario, readout: str, number: int) -> None:
    """Take a target of a readout away. Raises ScenarioError where there is none of this ``number``."""
    own = targets_of(scenario, readout)
    if number >= len(own):
        raise ScenarioError("targets", "there is no such target; allowed one that has been entered")
    scenario.targets = [other for other in scenario.targets if other is not own[number]]
