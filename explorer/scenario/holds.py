"""Held doses: how much of a chemical makes a readout of the water meet a value.

All points at once, between no dose and the ceiling. A hold that cannot be met leaves the dose at the end that
comes nearest and says so.
"""

from collections.abc import Callable
from dataclasses import dataclass

import numpy as np
from numpy.typing import ArrayLike

from explorer.scenario.readouts import Readout, format_value
from explorer.scenario.roots import find_roots
from explorer.scenario.stage import Stage
from explorer.treatment.stream import MENDABLE, Problem, Stream

RELATIVE_DOSE = 1e-13
"""To what part of the ceiling a dose is found."""

SEARCHABLE = (Problem.NONE, *MENDABLE)
"""States of a water that the search may pass through: the dose it ends at may put them right."""

STRONGEST = 1.0
"""Ionic strength [mol/L] beyond which nothing is believed; a ceiling may lie far above all sense."""

NO_ALKALINITY = 1e-14
"""eq/L too much or too little at the held pH that count as none: 1e-8 in pH for the softest water."""

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
    nan where there is no answer.
    """
    if readout.key == "ph":
        water = stream.system.solve(stream.totals, stream.temperature, ph=goal)
        beyond = stream.total("alkalinity") - water.totals[stream.system.index["alkalinity"]]
    else:
        stage = Stage("", "", "", stream)
        beyond = readout.compute(stage) - goal
        if not readout.equilibrium:
            return beyond
        water = stage.solution
    return np.where(water.ionic_strength <= STRONGEST, beyond, np.nan)


def held_dose(stream: Stream, add: Adder, readout: Readout, goal: ArrayLike, ceiling: ArrayLike) -> HeldDose:
    """Dose between 0 and ``ceiling`` [mol/L] after which ``readout`` equals ``goal`` [unit of the readout].

    ``goal`` and ``ceiling`` broadcast with the points of the stream. Where the readout lies on the same side
    of the goal at both ends, the dose is the end that comes nearer; where it cannot be computed, nan.
    """
    shape = np.broadcast_shapes(stream.shape, np.shape(goal), np.shape(ceiling))
    flat = stream.at(shape)
    goals, ceilings = (np.broadcast_to(part, shape).ravel().astype(float) for part in (goal, ceiling))

    def beyond(moles: np.ndarray, point: np.ndarray) -> np.ndarray:
        after = add(flat.at(flat.shape, point), moles)
        return np.where(np.isin(after.problem, SEARCHABLE), excess(after, readout, goals[point]), np.nan)

    enough = NO_ALKALINITY if readout.key == "ph" else 1e-6 * readout.slack
    roots = find_roots(beyond, np.zeros_like(ceilings), ceilings, relative=RELATIVE_DOSE, enough=enough)
    none, most = roots.at_low, roots.at_high
    unmet = ~roots.found & np.isfinite(none) & np.isfinite(most)
    without = unmet & (np.abs(none) <= np.abs(most))
    moles = np.where(roots.found, roots.x, np.where(unmet, np.where(without, roots.low, roots.high), np.nan))
    far, known = unmet & ~without, roots.high == ceilings
    words = [
        *told(without & (none > 0), goals, readout, "is above {goal} without any of it"),
        *told(without & (none < 0), goals, readout, "is below {goal} without any of it"),
        *told(far & known, goals, readout, "cannot be brought to {goal}: the dose stays at its ceiling"),
        *told(far & ~known, goals, readout, "cannot be brought to {goal}: larger doses have no answer"),
    ]
    return HeldDose(moles.reshape(shape), roots.found.reshape(shape), words)


def told(where: np.ndarray, goals: np.ndarray, readout: Readout, sentence: str) -> list[str]:
    """The sentence on the readout for the points ``where`` there are any, with the goals there."""
    count = np.count_nonzero(where)
    if not count:
        return []
    low, high = (format_value(end(goals[where]), readout) for end in (np.min, np.max))
    goal = (low if low == high else f"{low} to {high}") + readout.unit_text
    part = f" ({count} of {where.size} points)" if where.size > 1 else ""
    return [f"{readout.label} {sentence.format(goal=goal)}{part}"]
