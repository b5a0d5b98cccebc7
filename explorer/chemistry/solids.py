"""Solids that form but are not there to dissolve."""

from collections.abc import Sequence

import numpy as np
from numpy.typing import ArrayLike, NDArray

from .solution import Solution
from .system import System

DETECTABLE = 1e-12
"""mol/L and saturation index below which a solid is left as it is; keeps rounding from switching it."""


def precipitate(
    system: System, totals: NDArray, temperature: ArrayLike, solids: Sequence[str]
) -> tuple[Solution, dict[str, NDArray]]:
    """Let supersaturated solids form, each down to saturation, all together.

    ``totals`` (components, *shape) mol/L, ``temperature`` °C, ``solids``: names in
    :data:`explorer.chemistry.phases.PIVOTS`. Returns the water that is left and the amount of each solid
    formed [mol/L, ≥ 0]. Each point finds the set of solids that belongs to it: those that would dissolve
    are dropped, those left supersaturated are taken in.

    Raises ValueError for solids that cannot be held.
    """
    totals = np.asarray(totals, dtype=float)
    shape = np.broadcast_shapes(totals.shape[1:], np.shape(temperature))
    flat = np.broadcast_to(totals, (len(totals), *shape)).reshape(len(totals), -1)
    temperature = np.broadcast_to(np.asarray(temperature, dtype=float), shape).ravel()
    names = tuple(solids)
    formed = {name: np.zeros(flat.shape[1]) for name in names}
    left = flat.copy()
    held = np.zeros((len(names), flat.shape[1]), dtype=bool)
    waiting = np.arange(flat.shape[1])
    # every pass changes each waiting point's set; more passes than sets means that none fits
    for _ in range(2 ** len(names) + 1):
        if not waiting.size:
            break
        changed = np.zeros(flat.shape[1], dtype=bool)
        for pattern in np.unique(held[:, waiting], axis=1).T:
            points = waiting[(held[:, waiting] == pattern[:, None]).all(axis=0)]
            chosen = tuple(name for name, on in zip(names, pattern, strict=True) if on)
            water, amounts = system.equilibrate(flat[:, points], temperature[points], chosen)
            left[:, points] = water.totals
            for row, name in enumerate(names):
                amount = amounts.get(name, np.zeros(len(points)))
                formed[name][points] = amount
                wrong = amount < -DETECTABLE if pattern[row] else water.saturation_index(name) > DETECTABLE
                held[row, points] ^= wrong
                changed[points] |= wrong
        waiting = np.flatnonzero(changed)
    left[:, waiting] = np.nan
    for amount in formed.values():
        amount[waiting] = np.nan
    solution = system.solve(left.reshape(len(totals), *shape), temperature.reshape(shape))
    return solution, {name: np.maximum(amount, 0.0).reshape(shape) for name, amount in formed.items()}
