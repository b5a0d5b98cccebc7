"""Stoichiometry of what may happen to a water in a step, and how much of it explains a change."""

from collections.abc import Iterator, Mapping
from dataclasses import dataclass

import numpy as np

from explorer.chemistry import System
from explorer.treatment.chlorine import REACTIONS
from explorer.treatment.floc import ALKALINITY_PER_METAL, HYDROXIDES

NOTICEABLE = 1e-13
"""mol/L; less than this is rounding of the equilibrium, not a process."""

ROUNDING = 1e-12
"""Part of a process that is nothing but the rounding of the least squares."""

Amounts = Mapping[str, float]


@dataclass(frozen=True)
class Process:
    """Something that adds to, or takes from, several totals in fixed proportions.

    ``per_mole``: change of the totals per mole, one mapping for each reaction that counts together.
    ``forward``, ``backward``: words for a positive and a negative extent.
    """

    kind: str
    forward: str
    backward: str
    per_mole: tuple[Amounts, ...]


def _solid(name: str, per_mole: Amounts) -> Process:
    return Process("solid", f"{name} dissolves", f"{name} forms", (per_mole,))


CARBONATE = _solid("Calcium carbonate", {"calcium": 1, "dic": 1, "alkalinity": 2})
BRUCITE = _solid("Magnesium hydroxide", {"magnesium": 1, "alkalinity": 2})
FLOC = tuple(
    _solid(
        f"{hydroxide.metal.capitalize()} hydroxide", {hydroxide.metal: 1, "alkalinity": ALKALINITY_PER_METAL}
    )
    for hydroxide in HYDROXIDES.values()
)
GAS = Process("gas", "Carbon dioxide taken from the air", "Carbon dioxide lost to the air", ({"dic": 1},))
CHLORINE = Process("reaction", "Chlorine reactions", "Chlorine reactions", REACTIONS)

AT_ONCE = (*FLOC, CHLORINE)
"""What happens wherever waters or chemicals meet."""

IN_STEP: Mapping[str, tuple[Process, ...]] = {
    "air": (GAS,),
    "limestone": (CARBONATE,),
    "settle": (CARBONATE, BRUCITE),
    "temperature": FLOC,
    "concentrate": (),
}
"""What can happen in a kind of step; in all others, what happens at once."""


def explained(change: np.ndarray, kind: str, system: System) -> Iterator[tuple[Process, str, np.ndarray]]:
    """Processes of a kind of step that explain a change (n,) of the totals [mol/L], as far as they can.

    Yields each process that takes place with its words and its part of the change, by least squares over the
    proportions that are possible; what is left over is for the caller to report.
    """
    processes = IN_STEP.get(kind, AT_ONCE)
    owners = [process for process in processes for _ in process.per_mole]
    if not owners:
        return
    vectors = np.array([_vector(part, system) for process in processes for part in process.per_mole])
    extents = np.linalg.lstsq(vectors.T, change, rcond=None)[0]
    for process in processes:
        own = np.array([owner is process for owner in owners])
        part = extents[own] @ vectors[own]
        largest = np.abs(part).max()
        if largest > NOTICEABLE:
            part[np.abs(part) < ROUNDING * largest] = 0.0
            yield process, process.forward if extents[own][0] > 0 else process.backward, part


def _vector(per_mole: Amounts, system: System) -> np.ndarray:
    vector = system.zeros()
    for key, moles in per_mole.items():
        vector[system.index[key]] = moles
    return vector
