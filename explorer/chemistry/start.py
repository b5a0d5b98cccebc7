"""Where the Newton iteration starts: a good guess of the pH and of the free components."""

from collections.abc import Sequence

import numpy as np
from numpy.typing import NDArray

from .activity import davies, debye_hueckel_slope
from .components import PROTON
from .constants import LN10
from .network import Network
from .newton import ABSENT, SMALLEST_TOTAL, Newton, Problem, State
from .organics import END_POINT_FRACTION, dissociated

PASSES = 4
"""Scalings of the components before the Newton iteration."""
TRACE = 1e-4
"""mol/L; start for a component whose total says nothing, because a solid can supply it."""
GRID = np.linspace(0.0, 14.0, 57)
"""pH values of the table behind the first guess."""
TEMPERATURE_STEP = 5.0
"""°C."""
USUAL_STRENGTH = 0.01
"""mol/L."""


class FirstGuess:
    """pH of a water without ion pairs at a usual ionic strength, read from a table over pH.

    Tables are made for temperatures in steps of :data:`TEMPERATURE_STEP`, when first asked for.
    """

    def __init__(self, network: Network, masters: Sequence[str]) -> None:
        self._log_k = network.log_k
        self._forms: list[tuple[NDArray, NDArray, NDArray]] = []
        for master in masters[1:]:
            rows = [
                network.index[species]
                for species, counts in network.composition.items()
                if counts.get(master) == 1 and counts.keys() <= {PROTON, master}
            ]
            self._forms.append((np.array(rows), network.counts[rows, 0], network.charges[rows] ** 2))
        self.water = 10.0 ** (GRID - 14.0) - 10.0**-GRID
        self.organic = dissociated(GRID)[0] - END_POINT_FRACTION
        self._tables: dict[float, NDArray] = {}

    def ph(self, totals: NDArray, organic: NDArray, temperature: NDArray) -> NDArray:
        """First guess (N,) from the masters' ``totals`` (M, N), ``organic`` acid groups (N,) and °C (N,)."""
        cold, warm = (_on_step(float(end)) for end in (temperature.min(), temperature.max()))
        ph = self._ph(totals, organic, self._protons(cold))
        if warm > cold:
            ph += (self._ph(totals, organic, self._protons(warm)) - ph) * (temperature - cold) / (warm - cold)
        return ph

    def _ph(self, totals: NDArray, organic: NDArray, protons: NDArray) -> NDArray:
        alkalinity = np.outer(self.organic, organic) - protons @ totals[1:]
        alkalinity += self.water[:, None]
        wanted = -totals[0]
        above = np.clip((alkalinity < wanted).sum(axis=0), 1, len(GRID) - 1)
        points = np.arange(len(wanted))
        low, high = alkalinity[above - 1, points], alkalinity[above, points]
        part = np.clip((wanted - low) / (high - low), 0.0, 1.0)
        return GRID[above - 1] + part * (GRID[1] - GRID[0])

    def _protons(self, temperature: float) -> NDArray:
        """Protons that a mole of each component holds over its zero level; (len(GRID), masters − 1)."""
        if temperature not in self._tables:
            factor, _ = davies(debye_hueckel_slope(temperature), USUAL_STRENGTH)
            log_k = self._log_k(np.array(temperature))
            means = []
            for rows, protons, z2 in self._forms:
                weight = (log_k[rows] + z2 * factor)[:, None] - LN10 * np.outer(protons, GRID)
                weight = np.exp(weight - weight.max(axis=0))
                means.append(protons @ weight / weight.sum(axis=0))
            self._tables[temperature] = np.array(means).reshape(-1, len(GRID)).T
        return self._tables[temperature]


def _on_step(temperature: float) -> float:
    return TEMPERATURE_STEP * round(temperature / TEMPERATURE_STEP)


def first_state(newton: Newton, problem: Problem, ph: NDArray) -> State:
    """State at a pH, with every other component brought to its total a few times as if on its own."""
    totals = problem.totals
    floor = np.full((newton.masters, 1), SMALLEST_TOTAL)
    floor[newton.two_sided] = TRACE
    x = np.log(np.maximum(totals, floor))
    x[totals < SMALLEST_TOTAL] = ABSENT
    x[newton.two_sided] = np.maximum(x[newton.two_sided], np.log(TRACE))
    x[0] = -LN10 * ph
    state = State(x, np.clip(problem.inert + np.abs(totals[1:]).sum(axis=0), 1e-7, 0.5))
    for _ in range(PASSES):
        newton.scale(problem, state)
    return state
