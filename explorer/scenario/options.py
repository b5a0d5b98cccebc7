"""Kept options: named, dropped, and gone back to. Keeping one is in :mod:`explorer.scenario.editing`."""

from explorer.scenario.errors import ScenarioError, unknown
from explorer.scenario.fields import NAME_LENGTH
from explorer.scenario.model import Option, Scenario


def free_name(scenario: Scenario, wish: str) -> str:
    """A name no option has yet, made of a wish."""
    taken = {option.name for option in scenario.options}
    stem = wish.strip()[: NAME_LENGTH - 4] or "Option"
    name, number = stem, 2
    while name in taken:
        name, number = f"{stem} {number}", number + 1
    return name


def rename_option(scenario: Scenario, old: str, new: str) -> None:
    """Give an option another name; what was kept stays as it is. Raises ScenarioError."""
    position = _position(scenario, old)
    renamed = Option.from_dict({**scenario.options[position].to_dict(), "name": new}, f"options[{position}]")
    scenario.options = [*scenario.options[:position], renamed, *scenario.options[position + 1 :]]


def drop_option(scenario: Scenario, name: str) -> None:
    """Drop an option; those behind it move up a letter. Raises ScenarioError."""
    position = _position(scenario, name)
    scenario.options = [*scenario.options[:position], *scenario.options[position + 1 :]]


def _position(scenario: Scenario, name: str) -> int:
    names = [option.name for option in scenario.options]
    if name not in names:
        raise ScenarioError("options", unknown(name, "an option", names))
    return names.index(name)
