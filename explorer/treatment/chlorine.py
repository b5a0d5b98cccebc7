"""Chlorine, ammonia and dechlorination as completed stoichiometry.

Each reaction runs at once until one of its reactants is used up, in the order of the table. Kinetics, decay
and by-products are not modelled. The alkalinity of each reaction follows from the zero levels of the proton
balance (HOCl, NH4+, NH2Cl, HSO3-): it falls by the protons released against them.

Source: common practice (1 mol Cl2 per mol N for monochloramine, 1.5 mol per mol N at breakpoint).
"""

from collections.abc import Mapping

import numpy as np

from explorer.chemistry import System

KINETICS_NOTE = "chlorine reactions are completed at once; kinetics, decay and by-products are not modelled"

REACTIONS: tuple[Mapping[str, float], ...] = (
    # HSO3- + HOCl -> SO4-2 + Cl- + 2 H+
    {"sulfite": -1, "free_chlorine": -1, "sulfate": 1, "chloride": 1, "alkalinity": -2},
    # S2O3-2 + 4 HOCl + H2O -> 2 SO4-2 + 4 Cl- + 6 H+
    {"thiosulfate": -1, "free_chlorine": -4, "sulfate": 2, "chloride": 4, "alkalinity": -6},
    # HSO3- + NH2Cl + H2O -> SO4-2 + NH4+ + Cl- + H+
    {"sulfite": -1, "monochloramine": -1, "sulfate": 1, "ammonia": 1, "chloride": 1, "alkalinity": -1},
    # S2O3-2 + 4 NH2Cl + 5 H2O -> 2 SO4-2 + 4 NH4+ + 4 Cl- + 2 H+
    {"thiosulfate": -1, "monochloramine": -4, "sulfate": 2, "ammonia": 4, "chloride": 4, "alkalinity": -2},
    # NH4+ + HOCl -> NH2Cl + H+ + H2O
    {"ammonia": -1, "free_chlorine": -1, "monochloramine": 1, "alkalinity": -1},
    # 2 NH2Cl + HOCl -> N2 + 3 Cl- + 3 H+ + H2O
    {"monochloramine": -2, "free_chlorine": -1, "chloride": 3, "alkalinity": -3},
)
"""Change of each total per reaction (mol, alkalinity in eq), in the order in which they take place."""

_OXIDANTS = ("free_chlorine", "monochloramine")


def completed_chlorine(totals: np.ndarray, system: System) -> np.ndarray:
    """Totals (n, *shape) after all the reactions above; a new array, or the same one if none takes place."""
    if not any(np.any(totals[system.index[key]]) for key in _OXIDANTS):
        return totals
    totals = totals.copy()
    for reaction in REACTIONS:
        used = {system.index[key]: -n for key, n in reaction.items() if n < 0 and key != "alkalinity"}
        extent = np.min([totals[row] / n for row, n in used.items()], axis=0)
        extent = np.maximum(extent, 0.0)
        if not np.any(extent):
            continue
        for key, n in reaction.items():
            totals[system.index[key]] += n * extent
        for row, n in used.items():
            # The reactant that ran out is exactly zero, not a rounding error either side of it.
            totals[row] = np.where(np.abs(totals[row]) < 1e-13 * n * extent, 0.0, totals[row])
    return totals
