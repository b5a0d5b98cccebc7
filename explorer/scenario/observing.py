"""Measured points of a scenario, kept and dropped in place.

As with :mod:`explorer.scenario.editing` each function leaves the scenario fit to be saved, or raises
ScenarioError and leaves it as it was.
"""

from collections.abc import Mapping, Sequence
from typing import Any

from explorer.scenario.errors import ScenarioError, unknown
from explorer.scenario.fields import NAME_LENGTH
from explorer.scenario.model import Scenario
from explorer.scenario.observed import MeasuredPoints


def keep_measured(
    scenario: Scenario, name: str, axis: Mapping[str, Any], points: Mapping[str, Sequence[Sequence[float]]]
) -> None:
    """Keep measured points, a set for each readout, under names that no other set has.

    ``axis``: the parts of the file form that say what they are against (``dial``, or ``titration`` with
    ``stage``). ``points``: pairs of dial value or dose and what was measured, by readout.
    """
    sets = list(scenario.measured)
    for readout, pairs in points.items():
        own = _unused(name, {part.name for part in sets})
        raw = {"name": own, **axis, "readout": readout, "points": [list(pair) for pair in pairs]}
        sets.append(MeasuredPoints.from_dict(raw, f"measured[{len(sets)}]"))
    scenario.measured = sets


def drop_measured(scenario: Scenario, name: str) -> None:
    """Forget a set of measured points."""
    names = [part.name for part in scenario.measured]
    if name not in names:
        raise ScenarioError("measured", unknown(name, "a set of measured points", names))
    scenario.measured = [part for part in scenario.measured if part.name != name]


def _unused(name: str, taken: set[str]) -> str:
    """The name, with a number behind it where it is taken."""
    stem, candidate, number = name[: NAME_LENGTH - 5], name, 1
    while candidate in taken:
        number += 1
        candidate = f"{stem} {number}"
    return candidate
