"""What is kept beside a scenario, changed in place: options to compare with, and measured points.

As with :mod:`explorer.scenario.editing` each function leaves the scenario fit to be saved, or raises
ScenarioError and leaves it as it was.
"""

from collections.abc import Mapping, Sequence
from typing import Any

from explorer.scenario.editing import keep_option, take_option
from explorer.scenario.errors import ScenarioError, shown, unknown
from explorer.scenario.model import MeasuredPoints, Option, Scenario

__all__ = [
    "drop_measured",
    "drop_option",
    "keep_measured",
    "keep_option",
    "rename_option",
    "return_to_option",
    "take_option",
    "unused",
]


def return_to_option(scenario: Scenario, name: str) -> None:
    """Make the scenario what a kept option is; all options stay."""
    working = take_option(scenario, name)
    for part in Scenario.fields():
        setattr(scenario, part, getattr(working, part))


def rename_option(scenario: Scenario, old: str, new: str) -> None:
    """Give a kept option another name; its letter stays."""
    place = _place(scenario, old)
    if old == new:
        return
    if any(option.name == new for option in scenario.options):
        raise ScenarioError("options", f"{shown(new)} is there already; allowed another name")
    if fault := Option.fields()["name"].fault(new):
        raise ScenarioError(f"options[{place}].name", fault)
    renamed = Option.from_dict({**scenario.options[place].to_dict(), "name": new}, f"options[{place}]")
    scenario.options = [*scenario.options[:place], renamed, *scenario.options[place + 1 :]]


def drop_option(scenario: Scenario, name: str) -> None:
    """Forget a kept option; the letters of the later ones move up."""
    place = _place(scenario, name)
    scenario.options = [*scenario.options[:place], *scenario.options[place + 1 :]]


def _place(scenario: Scenario, name: str) -> int:
    names = [option.name for option in scenario.options]
    if name not in names:
        raise ScenarioError("options", unknown(name, "an option", names))
    return names.index(name)


def keep_measured(
    scenario: Scenario, name: str, axis: Mapping[str, Any], points: Mapping[str, Sequence[Sequence[float]]]
) -> None:
    """Keep measured points, a set for each readout, under a name of their own.

    ``axis``: the parts of the file form that say what they are against (``dial``, or ``titration`` with
    ``stage``). ``points``: pairs of dial value or dose and what was measured, by readout.
    """
    sets = list(scenario.measured)
    for readout, pairs in points.items():
        own = unused(name, [part.name for part in sets])
        raw = {"name": own, **axis, "readout": readout, "points": [list(pair) for pair in pairs]}
        sets.append(MeasuredPoints.from_dict(raw, f"measured[{len(sets)}]"))
    scenario.measured = sets


def drop_measured(scenario: Scenario, name: str) -> None:
    """Forget a set of measured points."""
    names = [part.name for part in scenario.measured]
    if name not in names:
        raise ScenarioError("measured", unknown(name, "a set of measured points", names))
    scenario.measured = [part for part in scenario.measured if part.name != name]


def unused(name: str, taken: Sequence[str]) -> str:
    """The name, with a number behind it where it is taken."""
    number = 1
    candidate = name
    while candidate in taken:
        number += 1
        candidate = f"{name} {number}"
    return candidate
