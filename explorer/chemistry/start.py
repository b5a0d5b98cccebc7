"""Where the Newton iteration starts: a good guess of the pH and of the free components."""

from collections.abc import Sequence

import numpy as np
from numpy.typing import NDArray

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


class FirstGuess:
    """pH of a water as if it were ideal, at 25 °C and without pairs, read from a table over pH.

    ``protons`` (len(GRID), masters): protons that one mole of a component holds over its zero level.
    """

    def __init__(self, network: Network, masters: Sequence[str]) -> None:
        log_k = dict(zip(network.species, network.log_k(np.array(25.0)), strict=True))
        forms: dict[str, list[tuple[int, float]]] = {master: [] for master in masters[1:]}
        for species, counts in network.composition.items():
            (*others,) = counts.keys() - {PROTON}
            if len(others) == 1 and counts[others[0]] == 1 and others[0] in forms:
                forms[others[0]].append((counts.get(PROTON, 0), log_k[species]))
        self.protons = np.array(
            [_mean_protons(*zip(*forms[master], strict=True)) for master in masters[1:]]
        ).T
        self.water = 10.0 ** (GRID - 14.0) - 10.0**-GRID
        self.organic = dissociated(GRID)[0] - END_POINT_FRACTION

    def ph(self, totals: NDArray, organic: NDArray) -> NDArray:
        """First guess of the pH (N,) from the masters' ``totals`` (M, N) and ``organic`` acid groups (N,)."""
        alkalinity = np.outer(self.organic, organic) - self.protons @ totals[1:]
        alkalinity += self.water[:, None]
        wanted = -totals[0]
        above = np.clip((alkalinity < wanted).sum(axis=0), 1, len(GRID) - 1)
        points = np.arange(len(wanted))
        low, high = alkalinity[above - 1, points], alkalinity[above, points]
        part = np.clip((wanted - low) / (high - low), 0.0, 1.0)
        return GRID[above - 1] + part * (GRID[1] - GRID[0])


def _mean_protons(protons: Sequence[int], log_k: Sequence[float]) -> NDArray:
    """Mean proton count of a family over the pH grid, from the count and ln K of each form."""
    count = np.array(protons, dtype=float)
    weight = np.array(log_k)[:, None] - LN10 * np.outer(count, GRID)
    weight = np.exp(weight - weight.max(axis=0))
    return count @ weight / weight.sum(axis=0)


def first_state(newton: Newton, problem: Problem, ph: NDArray) -> State:
    """State at a pH, with every other component scaled to its total a few times as if on its own."""
    totals = problem.totals[1:]
    absent = newton.one_sided[1:, None] & (totals < SMALLEST_TOTAL)
    x = np.where(absent, ABSENT, np.log(np.maximum(totals, np.where(absent, SMALLEST_TOTAL, TRACE))))
    strength = np.clip(problem.inert + np.abs(totals).sum(axis=0), 1e-7, 0.5)
    state = State(np.concatenate([-LN10 * ph[None], x]), strength)
    held, lacking = np.maximum(newton.counts[:, 1:].T, 0.0), np.maximum(-newton.counts[:, 1:].T, 0.0)
    power = 1.0 / (held.max(axis=1) + lacking.max(axis=1))[:, None]
    for _ in range(PASSES):
        c = newton.concentrations(problem, state)
        have = lacking @ c + np.maximum(totals, 0.0)
        want = held @ c - np.minimum(totals, 0.0)
        state.x[1:] += power * np.log(np.where(absent, 1.0, have) / np.where(absent, 1.0, want))
        state.strength = np.clip(0.5 * newton.charges**2 @ c + problem.inert, 1e-8, 1.0)
    return state
