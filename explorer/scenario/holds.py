"""Held doses: how much of a chemical makes a readout of the water meet a value.

All points at once, between no dose and the ceiling. A hold that cannot be met leaves the dose at the end that
comes nearest and says so.
"""

from collections.abc import Callable
from dataclasses import dataclass

import numpy as np
from numpy.typing import ArrayLike
from scipy.optimize import elementwise

from explorer.scenario.readouts import Readout, format_value
from explorer.scenario.stage import Stage
from explorer.treatment.stream import MENDABLE, Problem, Stream

RELATIVE_DOSE = 1e-13
"""Width of the bracket, relative to the ceiling, at which the search ends."""

MOST_STEPS = 100

SEARCHABLE = (Problem.NONE, *MENDABLE)
"""States of a water that the search may pass through: the dose it ends at may put them right."""

Adder = Callable[[Stream, np.ndarray], Stream]
"""The stream after a dose of mol/L; works point by point on flat streams."""


@dataclass(frozen=True)
class HeldDose:
    """Answer of a search: ``moles`` [mol/L], where the hold is ``met``, and ``words`` on where it is not."""

    moles: np.ndarray
    met: np.ndarray
    words: list[str]


def excess(stream: Stream, readout: Readout, goal: np.ndarray) -> np.ndarray:
    """By how much a readout of a stream lies above its goal; any measure with the right sign and root.

    For pH it is the alkalinity [eq/L] beyond that of the water at the goal: nearly linear in every dose,
    where the pH itself is steep and flat by turns, so the search takes few steps.
    """
    if readout.key == "ph":
        at_goal = stream.system.solve(stream.totals, stream.temperature, ph=goal)
        return stream.total("alkalinity") - at_goal.totals[stream.system.index["alkalinity"]]
    return readout.compute(Stage("", "", "", stream)) - goal


def held_dose(stream: Stream, add: Adder, readout: Readout, goal: ArrayLike, ceiling: ArrayLike) -> HeldDose:
    """Dose between 0 and ``ceiling`` [mol/L] after which ``readout`` equals ``goal`` [unit of the readout].

    ``goal`` and ``ceiling`` broadcast with the points of the stream. Where the readout lies on the same side
    of the goal at both ends, the dose is the end that comes nearer; where it cannot be computed, nan.
    """
    shape = np.broadcast_shapes(stream.shape, np.shape(goal), np.shape(ceiling))
    flat = stream.at(shape)
    goals, ceilings = (np.broadcast_to(part, shape).ravel().astype(float) for part in (goal, ceiling))

    narrow = {"xatol": RELATIVE_DOSE * np.max(ceilings, initial=0.0), "xrtol": RELATIVE_DOSE, "fatol": 0}

    def beyond(moles: np.ndarray, point: np.ndarray) -> np.ndarray:
        point = point.astype(int)
        after = add(flat.at(flat.shape, point), moles)
        return np.where(np.isin(after.problem, SEARCHABLE), excess(after, readout, goals[point]), np.nan)

    with np.errstate(invalid="ignore"):
        found = elementwise.find_root(
            beyond,
            (np.zeros_like(ceilings), ceilings),
            args=(np.arange(ceilings.size),),
            tolerances=narrow,
            maxiter=MOST_STEPS,
        )
    none, most = found.f_bracket
    unmet = ~found.success & np.isfinite(none) & np.isfinite(most)
    without = unmet & (np.abs(none) <= np.abs(most))
    moles = np.where(found.success, found.x, np.where(unmet, np.where(without, 0.0, ceilings), np.nan))
    words = [
        *_say(without & (none > 0), goals, readout, "is above {goal} without any of it"),
        *_say(without & (none < 0), goals, readout, "is below {goal} without any of it"),
        *_say(unmet & ~without, goals, readout, "cannot be brought to {goal}: the dose stays at its ceiling"),
    ]
    return HeldDose(moles.reshape(shape), found.success.reshape(shape), words)


def _say(where: np.ndarray, goals: np.ndarray, readout: Readout, sentence: str) -> list[str]:
    count = np.count_nonzero(where)
    if not count:
        return []
    low, high = (format_value(end(goals[where]), readout) for end in (np.min, np.max))
    goal = (low if low == high else f"{low} to {high}") + readout.unit_text
    part = f" ({count} of {where.size} points)" if where.size > 1 else ""
    return [f"{readout.label} {sentence.format(goal=goal)}{part}"]
