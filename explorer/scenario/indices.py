"""Indices of the trade over a solved water. nan where an index has no meaning, never infinite."""

import numpy as np

from explorer.chemistry import Solution
from explorer.chemistry.constants import dissolved, log_k, solids
from explorer.treatment.units import from_base

_BICARBONATE_STEP = next(constant for constant in dissolved() if constant.name == "CO3-2")


def ratio(numerator: np.ndarray, denominator: np.ndarray, scale: float = 1.0) -> np.ndarray:
    """``scale`` × numerator / denominator; nan where the denominator is not positive."""
    positive = denominator > 0
    return np.where(positive, scale * numerator / np.where(positive, denominator, 1.0), np.nan)


def log10(value: np.ndarray) -> np.ndarray:
    """Common logarithm; nan where there is none."""
    return np.log10(np.where(value > 0, value, np.nan))


def saturation_ph(solution: Solution) -> np.ndarray:
    """pH at which the calcium and bicarbonate of a water would be saturated with calcite, by hand formula.

    pHs = pK2 − pKs + p[Ca] + p[HCO3] + 5 pfm, with pfm = −log10 of the activity coefficient of a monovalent
    ion; [HCO3] follows from alkalinity and pH. All calcium counts as free and all alkalinity but hydroxide as
    carbonate. Source: Standard Methods 2330 B; constants and activity coefficients of this engine.
    """
    totals, row = solution.totals, solution.system.index
    log_k2, log_ks = log_k([_BICARBONATE_STEP, solids()["calcite"]], solution.temperature)
    gamma_1, gamma_2 = solution.activity_coefficient(1), solution.activity_coefficient(2)
    water = solution.concentration("OH-") - solution.concentration("H+")
    carbonate = 10 ** (log_k2 + solution.ph) * gamma_1 / gamma_2
    bicarbonate = (totals[row["alkalinity"]] - water) / (1 + 2 * carbonate)
    return log_ks - log_k2 - log10(totals[row["calcium"]]) - log10(bicarbonate) - 5 * np.log10(gamma_1)


def aggressiveness(solution: Solution) -> np.ndarray:
    """pH + log10(calcium × alkalinity), both in mg/L as CaCO3. Source: AWWA C400."""
    totals, row = solution.totals, solution.system.index
    calcium = from_base(totals[row["calcium"]], "mg/L as CaCO3", "calcium")
    alkalinity = from_base(totals[row["alkalinity"]], "mg/L as CaCO3", "alkalinity")
    return solution.ph + log10(calcium) + log10(alkalinity)
