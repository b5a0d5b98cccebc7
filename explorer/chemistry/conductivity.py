"""Electrical conductivity from the ions.

Sum of molal conductivities, each falling with the ionic strength: λ = λ°(t) − A(t) √I / (1 + B √I), with λ°
and A quadratic in °C. McCleskey, Nordstrom, Ryan & Ball 2012, Geochim. Cosmochim. Acta 77:369 (method seen,
coefficients from memory; λ° at 25 °C agrees with the CRC Handbook to 1 %, sums for single salts of
chloride, nitrate and bicarbonate to 2–4 % up to 0.1 mol/L; sulfate salts come out about 10 % low at 0.01
mol/L and 20 % low at 0.1 mol/L). Ions without coefficients use the limiting conductivities of the CRC
Handbook, the relative fall of sodium or sulfate, and 1.9 % per °C (Standard Methods 2510, from memory).
"""

import numpy as np
from numpy.typing import NDArray

from .constants import charge_of
from .solution import Solution

# species: (λ° a, b, c), (A a, b, c), B; mS/cm per mol/kg with t in °C, value a·t² + b·t + c
_MEASURED: dict[str, tuple[tuple[float, float, float], tuple[float, float, float], float]] = {
    "K+": ((0.003046, 1.261, 40.7), (0.00535, 0.9316, 22.59), 1.5),
    "Na+": ((0.003763, 0.877, 26.23), (0.00027, 1.141, 32.07), 1.7),
    "H+": ((-0.01414, 5.355, 224.2), (-0.00918, 1.842, 39.23), 0.3),
    "Ca+2": ((0.009645, 1.984, 62.28), (0.03174, 2.334, 132.3), 2.8),
    "Mg+2": ((0.01068, 1.695, 57.16), (0.02453, 1.915, 80.5), 2.1),
    "NH4+": ((0.003341, 1.285, 39.04), (0.00132, 0.607, 11.19), 0.3),
    "chloride": ((0.003817, 1.337, 40.99), (0.00613, 0.9469, 22.01), 1.5),
    "SO4-2": ((0.01037, 2.838, 82.37), (0.03324, 5.889, 193.5), 2.6),
    "HCO3-": ((0.000614, 0.9048, 21.14), (-0.00503, 0.8957, 10.97), 0.1),
    "CO3-2": ((-0.000326, 2.998, 64.03), (-0.00181, 5.542, 120.2), 2.3),
    "nitrate": ((0.001925, 1.214, 39.9), (0.00118, 0.5045, 23.31), 0.1),
    "OH-": ((0.003396, 2.925, 121.3), (0.00933, 0.1086, 35.9), 0.01),
}

# limiting molar conductivities at 25 °C, S cm²/mol; CRC Handbook (Vanysek), seen; acetate from memory
_LIMITING: dict[str, float] = {
    "F-": 55.4,
    "H2PO4-": 36.0,
    "HPO4-2": 114.0,
    "PO4-3": 278.4,
    "HSO4-": 52.0,
    "HSO3-": 58.0,
    "CH3COO-": 40.9,
    "Al+3": 183.0,
    "Fe+3": 204.0,
}
USUAL_MONOVALENT, USUAL_DIVALENT = 40.0, 110.0
"""S cm²/mol at 25 °C for ions in neither table (pairs, silicate, borate, citrate …); an estimate."""
PER_DEGREE = 0.019
"""Relative rise per °C about 25 °C."""


def conductivity(solution: Solution, at: float = 25.0) -> NDArray:
    """Conductivity [µS/cm] of waters brought to ``at`` °C with their species as they are; shape of the
    solution."""
    strength = solution.ionic_strength
    total = np.zeros(solution.shape)
    for name in solution.species:
        charge = charge_of(name)
        if charge:
            total = total + _molar(name, charge, strength, at) * solution.concentration(name)
    for component in ("chloride", "nitrate"):
        amount = solution.totals[solution.system.index[component]]
        total = total + _molar(component, -1, strength, at) * amount
    thiosulfate = solution.totals[solution.system.index["thiosulfate"]]
    total = total + _molar("thiosulfate", -2, strength, at) * thiosulfate
    total = total + _molar("organic", -1, strength, at) * solution.organic_ions
    return 1e3 * total


def _molar(name: str, charge: int, strength: NDArray, at: float) -> NDArray:
    """mS/cm per mol/L of an ion at an ionic strength [mol/L] and a temperature [°C]."""
    if name in _MEASURED:
        return _with_strength(*_MEASURED[name], strength, at)
    like = "Na+" if abs(charge) == 1 else "SO4-2"
    usual = USUAL_MONOVALENT if abs(charge) == 1 else USUAL_DIVALENT * abs(charge) / 2
    limiting = _LIMITING.get(name, usual) * (1.0 + PER_DEGREE * (at - 25.0))
    pattern = _MEASURED[like]
    return limiting * _with_strength(*pattern, strength, at) / _with_strength(*pattern, np.zeros(()), at)


def _with_strength(
    limit: tuple[float, float, float],
    fall: tuple[float, float, float],
    b: float,
    strength: NDArray,
    at: float,
) -> NDArray:
    root = np.sqrt(strength)
    return np.polyval(limit, at) - np.polyval(fall, at) * root / (1.0 + b * root)
