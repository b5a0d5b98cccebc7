"""Waters for the chemistry tests: ordinary ones, and random states over the whole range of validity."""

import numpy as np
from numpy.typing import NDArray

from explorer.chemistry import System

HIGHEST: dict[str, float] = {
    "dic": 5e-2, "calcium": 3e-2, "magnesium": 3e-2, "sodium": 0.2, "potassium": 0.1, "chloride": 0.2,
    "sulfate": 5e-2, "nitrate": 3e-2, "fluoride": 3e-3, "phosphate": 3e-3, "silica": 3e-3, "boron": 5e-3,
    "ammonia": 1e-2, "free_chlorine": 1e-3, "monochloramine": 1e-4, "sulfite": 1e-3, "thiosulfate": 1e-4,
    "acetate": 3e-3, "citrate": 1e-3, "aluminium": 1e-3, "iron": 1e-3, "organic_carbon": 3e-3,
}  # fmt: skip
"""mol/L: upper end of the random totals."""


def random_states(system: System, number: int, seed: int) -> tuple[NDArray, NDArray, NDArray]:
    """Totals (components, number), temperature and pH: log-uniform totals with a third of them exactly 0,
    0–60 °C, pH 1–13. The alkalinity row is left at 0 for the pH to fix."""
    rng = np.random.default_rng(seed)
    totals = system.zeros(number)
    for key, highest in HIGHEST.items():
        amount = 10.0 ** rng.uniform(-8.0, np.log10(highest), number)
        amount[rng.random(number) < 1 / 3] = 0.0
        totals[system.index[key]] = amount
    return totals, rng.uniform(0.0, 60.0, number), rng.uniform(1.0, 13.0, number)


def ordinary_waters(system: System, number: int, seed: int) -> tuple[NDArray, NDArray]:
    """Totals and temperature of waters as they come from rivers and wells, every total above zero."""
    rng = np.random.default_rng(seed)
    middle = {
        "dic": 2.1e-3, "calcium": 1.5e-3, "magnesium": 5e-4, "sodium": 1e-3, "potassium": 1e-4,
        "chloride": 1e-3, "sulfate": 5e-4, "nitrate": 2e-4, "fluoride": 4e-5, "phosphate": 3e-5,
        "silica": 2e-4, "boron": 3e-5, "ammonia": 3e-5, "free_chlorine": 2e-5, "monochloramine": 1e-5,
        "sulfite": 1e-5, "thiosulfate": 1e-6, "acetate": 1e-5, "citrate": 1e-5, "aluminium": 1e-7,
        "iron": 1e-8, "organic_carbon": 3e-4,
    }  # fmt: skip
    totals = system.totals(**{key: value * rng.uniform(0.3, 1.7, number) for key, value in middle.items()})
    totals[system.index["alkalinity"]] = totals[system.index["dic"]] * rng.uniform(0.6, 1.3, number)
    return totals, rng.uniform(2.0, 30.0, number)
