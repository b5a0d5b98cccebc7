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
    ``marks``: totals from which its extent is read; the others that it changes are the check. ``forward``,
    ``backward``: words for a positive and a negative extent.
    """

    kind: str
    forward: str
    backward: str
    per_mole: tuple[Amounts, ...]
    marks: tuple[str, ...]


def _solid(name: str, metal: str, per_mole: Amounts) -> Process:
    return Process("solid", f"{name} dissolves", f"{name} forms", ({metal: 1, **per_mole},), (metal,))


CARBONATE = _solid("Calcium carbonate", "calcium", {"dic": 1, "alkalinity": 2})
BRUCITE = _solid("Magnesium hydroxide", "magnesium", {"alkalinity": 2})
FLOC = tuple(
    _solid(f"{hydroxide.metal.capitalize()} hydroxide", hydroxide.metal, {"alkalinity": ALKALINITY_PER_METAL})
    for hydroxide in HYDROXIDES.values()
)
GAS = Process(
    "gas", "Carbon dioxide taken from the air", "Carbon dioxide lost to the air", ({"dic": 1},), ("dic",)
)
CHLORINE = Process(
    "reaction",
    "Chlorine reactions",
    "Chlorine reactions",
    REACTIONS,
    ("sulfite", "thiosulfate", "free_chlorine", "monochloramine", "ammonia"),
)

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
    """Processes of a kind of step behind a change (n,) of the totals [mol/L].

    Yields each process that takes place with its words and its part of the change, in the proportions of its
    stoichiometry; what these leave unexplained is for the caller to report.
    """
    for process in IN_STEP.get(kind, AT_ONCE):
        vectors = np.array([_vector(part, system) for part in process.per_mole])
        marks = [system.index[key] for key in process.marks]
        extents = np.linalg.lstsq(vectors[:, marks].T, change[marks], rcond=None)[0]
        part = extents @ vectors
        largest = np.abs(part).max()
        if largest > NOTICEABLE:
            part[np.abs(part) < ROUNDING * largest] = 0.0
            yield process, process.forward if extents[0] > 0 else process.backward, part


def _vector(per_mole: Amounts, system: System) -> np.ndarray:
    vector = system.zeros()
    for key, moles in per_mole.items():
        vector[system.index[key]] = moles
    return vector
