"""Laboratory solutions: what a mole of each substance brings, and the water made from a recipe of them."""

import numpy as np
from numpy.typing import ArrayLike, NDArray

from explorer.chemistry import Solution, System, WeakAcid

SYSTEM = System()

PHTHALIC_ACID = WeakAcid("phthalate", "Phthalic acid", 166.13, pka=(2.950, 5.408), enthalpy_kj=(-2.70, -2.17))
"""pKa: Hamer, Pinching & Acree 1945 and Hamer & Acree 1945, J. Res. NBS 35; ΔH: Goldberg, Kishore & Lennen
2002, J. Phys. Chem. Ref. Data 31:231; all from memory."""

WITH_PHTHALATE = System([PHTHALIC_ACID])

BRINGS: dict[str, dict[str, float]] = {
    "HCl": {"chloride": 1, "alkalinity": -1},
    "NaOH": {"sodium": 1, "alkalinity": 1},
    "Ca(OH)2": {"calcium": 1, "alkalinity": 2},
    "KCl": {"potassium": 1, "chloride": 1},
    "NaCl": {"sodium": 1, "chloride": 1},
    "CaCl2": {"calcium": 1, "chloride": 2},
    "MgCl2": {"magnesium": 1, "chloride": 2},
    "NH4Cl": {"ammonia": 1, "chloride": 1},
    "Na2SO4": {"sodium": 2, "sulfate": 1},
    "K2SO4": {"potassium": 2, "sulfate": 1},
    "CaSO4": {"calcium": 1, "sulfate": 1},
    "KNO3": {"potassium": 1, "nitrate": 1},
    "NaF": {"sodium": 1, "fluoride": 1},
    "CO2": {"dic": 1},
    "NaHCO3": {"sodium": 1, "dic": 1, "alkalinity": 1},
    "KHCO3": {"potassium": 1, "dic": 1, "alkalinity": 1},
    "Na2CO3": {"sodium": 2, "dic": 1, "alkalinity": 2},
    "KH2PO4": {"potassium": 1, "phosphate": 1},
    "Na2HPO4": {"sodium": 2, "phosphate": 1, "alkalinity": 1},
    "Na2B4O7": {"sodium": 2, "boron": 4, "alkalinity": 2},
    "CH3COOH": {"acetate": 1},
    "CH3COONa": {"sodium": 1, "acetate": 1, "alkalinity": 1},
    "NaOCl": {"sodium": 1, "free_chlorine": 1, "alkalinity": 1},
    "NaHSO3": {"sodium": 1, "sulfite": 1},
    "H4SiO4": {"silica": 1},
    "H3Cit": {"citrate": 1},
    "AlCl3": {"aluminium": 1, "chloride": 3},
    "FeCl3": {"iron": 1, "chloride": 3},
    "KH phthalate": {"potassium": 1, "phthalate": 1, "alkalinity": 1},
}
"""Components by substance, mol (alkalinity: eq) per mol, written out from the formulas."""


def mixture(recipe: dict[str, ArrayLike], system: System = SYSTEM) -> NDArray:
    """Totals (components, *shape) of a recipe in mol/L; the amounts broadcast."""
    shape = np.broadcast_shapes(*(np.shape(amount) for amount in recipe.values()))
    mixed = system.zeros(shape)
    for substance, amount in recipe.items():
        for component, moles in BRINGS[substance].items():
            mixed[system.index[component]] += moles * np.asarray(amount, dtype=float)
    return mixed


def solution(
    recipe: dict[str, ArrayLike], temperature: ArrayLike = 25.0, system: System = SYSTEM
) -> Solution:
    """Equilibrium of a recipe in mol/L at °C."""
    return system.solve(mixture(recipe, system), temperature)
