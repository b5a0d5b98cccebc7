"""Sums over the ions of a solved water: charges and dissolved solids."""

import numpy as np

from explorer.chemistry import Solution
from explorer.chemistry.elements import molar_mass

_CATION_TOTALS = {"calcium": 2, "magnesium": 2, "sodium": 1, "potassium": 1}

_DRIED: dict[str, str] = {
    "calcium": "Ca",
    "magnesium": "Mg",
    "sodium": "Na",
    "potassium": "K",
    "chloride": "Cl",
    "sulfate": "SO4",
    "nitrate": "NO3",
    "fluoride": "F",
    "phosphate": "PO4",
    "silica": "SiO2",
    "boron": "B(OH)3",
    "ammonia": "NH4",
    "aluminium": "Al",
    "iron": "Fe",
    "sulfite": "SO3",
    "thiosulfate": "S2O3",
    "acetate": "C2H4O2",
    "citrate": "C6H8O7",
}
"""The form in which each total is weighed; gases, chlorine and organic carbon are not."""


def charge_sums(solution: Solution) -> tuple[np.ndarray, np.ndarray]:
    """Cations and anions [eq/L] of a solved water; their difference is its residual charge.

    Cations are counted whole, paired or not, as an analysis counts them: calcium, magnesium, sodium,
    potassium, ammonium, the hydrogen ion, cationic aluminium and iron. Anions are the rest: free and paired
    bicarbonate, carbonate, hydroxide, silicate and the like, and organic anions.
    """
    system = solution.system
    row = system.index
    cations = sum(charge * solution.totals[row[key]] for key, charge in _CATION_TOTALS.items())
    cations = cations + solution.totals[row["ammonia"]] - solution.concentration("NH3(aq)")
    cations = cations + solution.concentration("H+")
    charges = dict(zip(solution.species, system.network.charges, strict=True))
    for metal in ("aluminium", "iron"):
        if np.any(solution.totals[row[metal]]):
            for species, amount in solution.family(metal).items():
                cations = cations + max(charges[species], 0) * amount
    return cations, cations - solution.charge


def balance_percent(solution: Solution) -> np.ndarray:
    """100 (cations − anions) / (cations + anions), percent; Standard Methods 1030E (from memory)."""
    cations, anions = charge_sums(solution)
    return 100 * (cations - anions) / (cations + anions)


def dissolved_solids(solution: Solution) -> np.ndarray:
    """Total dissolved solids [mg/L] as the sum of the ions that a residue on drying would hold.

    Bicarbonate counts as the carbonate it dries to (0.60 mg per mg of alkalinity as CaCO3), silica as SiO2,
    as in Standard Methods 1030E (from memory). Dissolved CO2, chlorine and organic matter do not count.
    """
    system = solution.system
    solids = solution.carbonate_alkalinity * molar_mass("CO3") / 2
    for key, formula in _DRIED.items():
        solids = solids + solution.totals[system.index[key]] * molar_mass(formula)
    for acid in system.acids:
        solids = solids + solution.totals[system.index[acid.id]] * acid.molar_mass
    return 1000 * solids
