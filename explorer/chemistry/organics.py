"""Natural organic acids, charged in proportion to the organic carbon.

Oliver, Thurman & Malcolm 1983, Geochim. Cosmochim. Acta 47:2031 (coefficients from memory): one mean acid
with pK = 0.96 + 0.90 pH − 0.039 pH² and a carboxyl content of about 10 µeq per mg C, editable.
"""

import numpy as np
from numpy.typing import ArrayLike, NDArray

from .constants import LN10
from .elements import ATOMIC_WEIGHT

END_POINT_PH = 4.5
"""pH of the alkalinity titration's end point: the charge there is the zero level of these acids."""


def equivalents_per_mole(density: float) -> float:
    """eq of acid groups per mol C from a density in µeq per mg C."""
    return density * ATOMIC_WEIGHT["C"] * 1e-3


def dissociated(ph: ArrayLike) -> tuple[NDArray, NDArray]:
    """Dissociated fraction of the acid groups at a pH and its derivative with respect to pH."""
    ph = np.asarray(ph, dtype=float)
    fraction = 1.0 / (1.0 + np.exp(LN10 * (0.96 - 0.10 * ph - 0.039 * ph**2)))
    return fraction, LN10 * fraction * (1.0 - fraction) * (0.10 + 0.078 * ph)


END_POINT_FRACTION = float(dissociated(END_POINT_PH)[0])
