"""Sweep: one dial over a range, everything else as it stands."""

from collections.abc import Iterator, Mapping, Sequence
from dataclasses import dataclass
from types import MappingProxyType
from typing import Any

import numpy as np
from numpy.typing import ArrayLike

from explorer.scenario.compile import Plan, compiled
from explorer.scenario.dials import Dial, dials, no_dial
from explorer.scenario.errors import ScenarioError
from explorer.scenario.evaluate import Outcome, follow
from explorer.scenario.model import Scenario, SweepSetting, Target
from explorer.scenario.outcome import FINISHED
from explorer.scenario.readouts import READOUTS
from explorer.scenario.roots import find_roots

USUAL_POINTS, MOST_POINTS = 101, 2001

REFINED = 1e-7
"""To what part of the distance of two points a crossing between them is found."""


@dataclass(frozen=True)
class Crossing:
    """Where a readout of the finished water crosses a limit of a target, ``rising`` along the dial or not."""

    x: float
    limit: float
    rising: bool


@dataclass(frozen=True)
class Extreme:
    """A lowest or highest value inside the range, as no look at the ends would show."""

    x: float
    value: float
    lowest: bool


@dataclass(frozen=True)
class Gap:
    """Part of the range, ends included, without an answer, and why."""

    start: float
    stop: float
    reason: str


@dataclass(frozen=True)
class Sweep:
    """``x``: values of the ``dial``, in its unit. ``outcome``: everything else, of the shape of ``x``."""

    x: np.ndarray
    address: str
    dial: Dial
    outcome: Outcome
    plan: Plan
    overrides: Mapping[str, ArrayLike]

    def at(self, x: ArrayLike) -> Outcome:
        """The same at other values of the dial."""
        return follow(self.plan, {**self.overrides, self.address: x})

    def crossings(self, target: Target) -> list[float]:
        """Values of the dial at which the finished water starts or ceases to meet a target, rising."""
        return [crossing.x for crossing in self.crossed(target)]

    def crossed(self, target: Target) -> list[Crossing]:
        """Crossings of both limits of a target, in the order of the dial; found between the points."""
        found: list[Crossing] = []
        for limit, outwards in ((target.low, -1.0), (target.high, 1.0)):
            if limit is not None:
                found += self._crossed(target.readout, limit, outwards)
        return sorted(found, key=lambda crossing: crossing.x)

    def _crossed(self, key: str, limit: float, outwards: float) -> Iterator[Crossing]:
        # A value held at the limit is inside and must not flicker.
        edge = limit + outwards * READOUTS[key].slack
        beyond = outwards * (self.outcome.readout(key) - edge)
        outside = beyond > 0
        known = np.isfinite(beyond)
        before = np.flatnonzero((outside[:-1] != outside[1:]) & known[:-1] & known[1:])
        if not before.size:
            return
        roots = find_roots(
            lambda x, _: self.at(x).readout(key) - edge,
            self.x[before],
            self.x[before + 1],
            relative=REFINED,
        )
        for x, i, refined in zip(roots.x, before, roots.found, strict=True):
            part = beyond[i] / (beyond[i] - beyond[i + 1])
            straight = self.x[i] + part * (self.x[i + 1] - self.x[i])
            yield Crossing(float(x if refined else straight), limit, bool(outside[i + 1] == (outwards > 0)))

    def extremes(self, key: str) -> list[Extreme]:
        """Lowest and highest values of a readout inside the range, by the parabola through three points."""
        y = self.outcome.readout(key)
        found = []
        for lowest, height in ((True, y), (False, -y)):
            left, here, right = height[:-2], height[1:-1], height[2:]
            bend = left + right - 2 * here
            turning = (left >= here) & (right >= here) & (bend > READOUTS[key].slack)
            for i in np.flatnonzero(turning):
                x = self.x[i + 1] + 0.5 * (left[i] - right[i]) / bend[i] * (self.x[i + 1] - self.x[i])
                found.append(Extreme(float(x), float(self.at(x).readout(key)), lowest))
        return sorted(found, key=lambda extreme: extreme.x)

    def gaps(self, key: str | None = None, stage: str = FINISHED) -> list[Gap]:
        """Parts of the range without equilibrium at a stage, or without the readout ``key`` there."""
        reasons = self.outcome.reasons(stage, key)
        found: list[Gap] = []
        for position, reason in enumerate(reasons):
            x = float(self.x[position])
            if reason and position and reasons[position - 1] == reason:
                found[-1] = Gap(found[-1].start, x, reason)
            elif reason:
                found.append(Gap(x, x, reason))
        return found

    def held(self) -> Iterator[tuple[str, str, np.ndarray]]:
        """Doses and other dials that are computed to meet holds: label, unit, values."""
        for step, (values, unit, held) in self.outcome.doses.items():
            if held:
                yield f"Dose of {self.outcome.stage(step).name}", unit, values
        for address, dial in self.outcome.held.items():
            if not address.endswith(".dose"):
                yield self.plan.dials[address].label, dial.unit, dial.value

    def to_dict(self, readouts: Sequence[str], stage: str = FINISHED) -> dict[str, Any]:
        """Plain lists by name, of the water at a stage; None where there is no answer."""
        return {
            "dial": self.address,
            "unit": self.dial.unit,
            "x": self.x.tolist(),
            "readouts": {key: listed(self.outcome.readout(key, stage)) for key in readouts},
            "notes": [{"level": n.level, "where": n.where, "text": n.text} for n in self.outcome.notes],
        }

    def table(self, readouts: Sequence[str], stage: str = FINISHED) -> list[list[Any]]:
        """Rows for a spreadsheet, the heading first: dial, readouts at a stage, what is held, why there is no
        answer."""
        columns = [[headed(self.dial.label, self.dial.unit), *self.x.tolist()]]
        for readout in (READOUTS[key] for key in readouts):
            values = listed(self.outcome.readout(readout.key, stage))
            columns.append([headed(readout.label, readout.unit), *values])
        columns += [[headed(label, unit), *listed(values)] for label, unit, values in self.held()]
        columns.append(["No answer because", *self.outcome.reasons(stage).tolist()])
        return [list(row) for row in zip(*columns, strict=True)]


def sweep(
    scenario: Scenario,
    dial: str | None = None,
    start: float | None = None,
    stop: float | None = None,
    points: int | None = None,
    season: str | None = None,
    overrides: Mapping[str, ArrayLike] = MappingProxyType({}),
) -> Sweep:
    """The plant along one dial.

    What is not given comes from the scenario's own sweep where that is of the same dial, else from the bounds
    of the dial (without upper bound: from its lower one to twice its value). Where nobody says a dial, or the
    scenario's own is out of service, the first share, dose or temperature is taken. ``overrides``: other
    dials.

    Raises ScenarioError for an unknown dial, a range without length and a number of points outside 2 to 2001.
    """
    swept, x = swept_dial(scenario, dial, start, stop, points, season)
    plan = compiled(scenario, season)
    overrides = dict(overrides)
    overrides.pop(swept.address, None)
    return Sweep(x, swept.address, swept, follow(plan, {**overrides, swept.address: x}), plan, overrides)


def swept_dial(
    scenario: Scenario,
    dial: str | None = None,
    start: float | None = None,
    stop: float | None = None,
    points: int | None = None,
    season: str | None = None,
) -> tuple[Dial, np.ndarray]:
    """The dial of a sweep and its values, chosen and refused as :func:`sweep` says."""
    every = dials(scenario, season)
    setting = scenario.sweep
    if dial is None:
        useful = _useful(scenario, every)
        # A dial out of service is gone until its water or step comes back.
        dial = setting.dial if setting is not None and setting.dial in useful else useful[0]
    if dial not in every:
        raise ScenarioError("dial", no_dial(dial, every))
    start, stop = swept_range(every[dial], setting, start, stop)
    if points is None:
        points = setting.points if setting is not None and setting.dial == dial else USUAL_POINTS
    if not 2 <= points <= MOST_POINTS:
        raise ScenarioError("points", f"{points} is out of range; allowed 2 to {MOST_POINTS}")
    return every[dial], np.linspace(start, stop, points)


def _useful(scenario: Scenario, every: Mapping[str, Dial]) -> list[str]:
    """Dials to sweep where nobody has said, the likeliest first: shares, doses, temperatures, the others.

    Waters and steps out of service, and the share of an only water, have nothing to turn.
    """
    idle = [f"waters.{water.id}." for water in scenario.waters if not water.on]
    idle += [f"train.{step.id}." for _, step in scenario.steps() if not step.on]
    shares = [address for address in every if address.endswith(".share")]
    alone = shares if len(shares) == 1 else []
    kinds = (".share", ".dose", ".analysis.temperature", "")
    found = dict.fromkeys(address for kind in kinds for address in every if address.endswith(kind))
    return [
        address for address in found if address not in alone and not any(part in address for part in idle)
    ]


def swept_range(
    dial: Dial,
    setting: SweepSetting | None,
    start: float | None = None,
    stop: float | None = None,
    path: str = "",
) -> tuple[float, float]:
    """First and last value of a dial: as given, else of the scenario's own sweep where it is of this dial,
    else the bounds of the dial (without upper bound: twice its value).

    Raises ScenarioError, with ``path`` before the field, where that is no range.
    """
    if setting is not None and setting.dial == dial.address:
        usual_start, usual_stop = setting.start, setting.stop
    else:
        usual_start = dial.low
        usual_stop = dial.high if dial.high is not None else dial.low + 2 * (dial.value - dial.low)
        usual_stop = usual_stop if usual_stop > dial.low else dial.low + 1.0
    start = usual_start if start is None else start
    stop = usual_stop if stop is None else stop
    if not (np.isfinite(start) and np.isfinite(stop)) or start == stop:
        raise ScenarioError(
            f"{path}stop", f"{start:g} to {stop:g} is no range; allowed two different numbers"
        )
    return start, stop


def listed(values: np.ndarray) -> list[float | None]:
    """A flat array as a list with None where there is no number."""
    return [float(value) if np.isfinite(value) else None for value in values]


def headed(label: str, unit: str) -> str:
    """Heading of a column: label and unit."""
    return f"{label} [{unit}]" if unit else label
