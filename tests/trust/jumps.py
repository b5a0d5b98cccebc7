"""Curves that jump: every readout of every shipped scenario along its dials: ``python -m tests.trust.jumps``.

A readout may change its slope anywhere, and be steep; but where it changes by a finite amount over no
distance, something must have happened that the engine reports: a solid or floc there or not, an answer there
or not, a held dose that meets its goal or not, chlorine or chloramine used up. Whether a steep piece is a
jump is found out by looking closer: a steep curve becomes flat, a jump stays.
"""

from collections.abc import Callable, Iterator, Mapping
from dataclasses import dataclass
from functools import cache

import numpy as np
from numpy.typing import NDArray

from explorer.scenario.compile import compiled
from explorer.scenario.dials import Dial
from explorer.scenario.evaluate import Outcome, follow
from explorer.scenario.files import open_scenario
from explorer.scenario.model import Scenario
from explorer.scenario.readouts import READOUTS
from explorer.scenario.shipped import shipped
from explorer.studies.sweep import swept_range

POINTS = 241
"""Of a sweep, before it is looked at more closely."""

UNEVEN = 0.2
"""A difference that departs from the mean of those beside it by this part of the larger one is looked at."""

CLOSER, ROUNDS = 17, 7
"""Points of a closer look, and how many looks: 16 to the 7th is 3e8."""

SMALL = 1e-4
"""Of the range of the curve: what is left of a difference that small is no jump."""


@dataclass(frozen=True)
class Jump:
    """A readout that jumps at ``x`` while nothing changes that the engine reports."""

    dial: str
    readout: str
    x: float
    before: float
    after: float

    def __str__(self) -> str:
        return f"{self.readout} along {self.dial} at {self.x:.12g}: {self.before:.6g} to {self.after:.6g}"


def turnable(scenario: Scenario, every: Mapping[str, Dial]) -> list[str]:
    """Shares, doses, held values and ceilings, temperatures and settings of steps; not prices and flows."""
    kinds = (
        ".share", ".dose", ".hold.value", ".hold.ceiling", ".temperature", ".approach", ".fraction",
        ".residual", ".cycles", ".analysis.ph", ".analysis.alkalinity", ".analysis.calcium",
    )  # fmt: skip
    idle = [f".{water.id}." for water in scenario.waters if not water.on]
    idle += [f".{step.id}." for _, step in scenario.steps() if not step.on]
    return [a for a in every if a.endswith(kinds) and not any(part in a for part in idle)]


def reported(outcome: Outcome) -> NDArray:
    """What the engine reports of each point that may make a curve jump, as codes; (codes, points)."""
    rows: list[NDArray] = []
    for stage in outcome.stages:
        rows.append(stage.problem)
        rows += [amount > 0 for amount in stage.solids.values()]
        rows += [
            stage.total(key) > 1e-15 for key in ("free_chlorine", "monochloramine", "ammonia", "sulfite")
        ]
    rows += [dose.met for dose in outcome.dosing.values()]
    rows += [held.met for held in outcome.held.values()]
    return np.array([np.broadcast_to(row, outcome.shape) for row in rows]).astype(int)


def jumps(scenario: Scenario, address: str, readouts: tuple[str, ...] = tuple(READOUTS)) -> Iterator[Jump]:
    """Jumps of the finished water along one dial that nothing explains."""
    plan = compiled(scenario)
    dial = plan.dials[address]
    low, high = swept_range(dial, scenario.sweep)

    @cache
    def closer(left: float, right: float) -> Outcome:
        """A piece of the range; all readouts that change there share it."""
        return follow(plan, {address: np.linspace(left, right, CLOSER)})

    x = np.linspace(low, high, POINTS)
    outcome = follow(plan, {address: x})
    for key in readouts:
        values = outcome.readout(key)
        for position in suspicious(values):
            piece = _shortest(closer, key, float(x[position]), float(x[position + 1]))
            if piece is None:
                continue
            ends = follow(plan, {address: np.array(piece)})
            before, after = ends.readout(key).tolist()
            size = np.nanmax(values) - np.nanmin(values)
            large = abs(after - before) > max(SMALL * size, 2 * READOUTS[key].slack, 1e-9 * abs(before))
            states = reported(ends)
            if large and (states[:, 0] == states[:, 1]).all():
                yield Jump(address, key, piece[0], before, after)


def suspicious(values: NDArray) -> list[int]:
    """Intervals whose difference does not lie between those on both sides, as far as a smooth curve would."""
    steps = np.pad(np.diff(values), 1, mode="edge")
    before, here, after = steps[:-2], steps[1:-1], steps[2:]
    largest = np.fmax(np.abs(before), np.abs(after))
    floor = 1e-6 * np.max(np.abs(values), initial=0.0, where=np.isfinite(values)) + 1e-12
    return np.flatnonzero(np.abs(here - (before + after) / 2) > UNEVEN * largest + floor).tolist()


def _shortest(
    closer: Callable[[float, float], Outcome], key: str, left: float, right: float
) -> tuple[float, float] | None:
    """The ends of the shortest piece of an interval with most of its difference; None where that goes away,
    or lies beside points without an answer."""
    first = None
    for _ in range(ROUNDS):
        x = np.linspace(left, right, CLOSER)
        values = closer(left, right).readout(key)
        if not np.isfinite(values).all():
            return None
        steps = np.abs(np.diff(values))
        first = abs(values[-1] - values[0]) if first is None else first
        most = int(steps.argmax())
        if steps[most] < first / 10:
            return None
        left, right = float(x[most]), float(x[most + 1])
    return left, right


if __name__ == "__main__":
    for name, path in shipped().items():
        scenario = open_scenario(path)
        addresses = turnable(scenario, compiled(scenario).dials)
        found = [jump for address in addresses for jump in jumps(scenario, address)]
        print(f"{name}: {len(addresses)} dials, {len(found)} jumps", *found, sep="\n  ", flush=True)
