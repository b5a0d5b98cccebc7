"""Metal hydroxide floc: it forms at once from a coagulant and stays in touch with the water.

The hydroxide is held at its solubility for as long as the floc is suspended, so a later change of pH
dissolves or precipitates some of it. Forming a mole takes three equivalents of alkalinity. Which solid is
assumed matters by orders of magnitude; it is the one named in :data:`HYDROXIDES`, with the constant and
source given in the table of solids of the chemistry floor.
"""

from collections.abc import Mapping
from dataclasses import dataclass

import numpy as np
from numpy.typing import ArrayLike

from explorer.chemistry import System
from explorer.chemistry.solids import precipitate

ALKALINITY_PER_METAL = 3.0
"""eq taken per mol of M(OH)3 formed."""


@dataclass(frozen=True)
class Hydroxide:
    """A floc: the total it forms from, its formula, the pH below which it does not form (common practice)."""

    metal: str
    formula: str
    lowest_ph: float


HYDROXIDES: dict[str, Hydroxide] = {
    "aluminium_hydroxide": Hydroxide("aluminium", "Al(OH)3", 5.3),
    "iron_hydroxide": Hydroxide("iron", "Fe(OH)3", 4.0),
}
"""Flocs by the name of the solid."""


@dataclass(frozen=True, eq=False)
class Flocculated:
    """The water left, the suspended floc [mol/L by solid], where the pH is too low for a floc to form, where
    the alkalinity does not suffice for all the metal, and where there was an answer at all."""

    totals: np.ndarray
    floc: dict[str, np.ndarray]
    too_low: np.ndarray
    exhausted: np.ndarray
    solved: np.ndarray


def flocculate(
    system: System, totals: np.ndarray, temperature: ArrayLike, floc: Mapping[str, ArrayLike]
) -> Flocculated:
    """Bring water and its floc to equilibrium.

    totals: (n, *shape) of the water alone; floc: mol/L in suspension, by a name of :data:`HYDROXIDES`, zero
    where a coagulant was only just added.
    """
    alkalinity = system.index["alkalinity"]
    whole = totals + with_floc(system, floc, totals.ndim - 1)
    water, formed = precipitate(system, whole, temperature, tuple(floc))
    too_low = np.zeros(water.shape, bool)
    metals = np.zeros(whole.shape[1:])
    for solid in floc:
        metal = whole[system.index[HYDROXIDES[solid].metal]]
        metals = metals + metal
        too_low |= (metal > 0) & (water.ph < HYDROXIDES[solid].lowest_ph)
    exhausted = (metals > 0) & (whole[alkalinity] < ALKALINITY_PER_METAL * metals)
    return Flocculated(water.totals, formed, too_low, exhausted, water.solved)


def with_floc(system: System, floc: Mapping[str, ArrayLike], dimensions: int) -> np.ndarray:
    """Totals (n, *shape) that the suspended floc would add if it dissolved."""
    shape = np.broadcast_shapes((1,) * dimensions, *(np.shape(amount) for amount in floc.values()))
    added = system.zeros(shape)
    for solid, amount in floc.items():
        added[system.index[HYDROXIDES[solid].metal]] += amount
        added[system.index["alkalinity"]] += ALKALINITY_PER_METAL * np.asarray(amount, float)
    return added
