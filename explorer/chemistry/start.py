"""Where the Newton iteration starts: a good guess of the pH and of the free components."""

from collections.abc import Mapping

import numpy as np
from numpy.typing import NDArray

from .constants import LN10
from .network import Network
from .newton import ABSENT, SMALLEST_TOTAL, Newton, Problem, State
from .organics import END_POINT_FRACTION

ORGANIC_PKA = 4.2
"""Mean pKa of natural organic acids near their alkalinity end point, for the first guess only."""


PASSES = 5
"""Scalings of the components before the Newton iteration."""
TRACE = 1e-9
"""mol/L; start for a component whose total says nothing, because a solid can supply it."""


class Ladder:
    """The acids of a system in order of pKa.

    Counting alkalinity upwards from the fully protonated water, the total of each acid is used up in turn.
    The acid in which the given alkalinity falls is the buffer: its pKa and the fraction used give the pH.
    """

    def __init__(self, network: Network, masters: Mapping[str, int]) -> None:
        log_k = dict(zip(network.species, network.log_k(np.array(25.0)) / LN10, strict=True))
        families: dict[str, dict[int, str]] = {}
        for species, counts in network.composition.items():
            others = [name for name in counts if name != "H+"]
            if len(others) == 1 and counts[others[0]] == 1 and others[0] in masters:
                families.setdefault(others[0], {})[counts.get("H+", 0)] = species
        steps = [(ORGANIC_PKA, -1)]
        self.highest = np.zeros(len(masters))
        for master, forms in families.items():
            self.highest[masters[master]] = max(forms)
            for protons in forms.keys() & {n + 1 for n in forms}:
                steps.append((log_k[forms[protons]] - log_k[forms[protons - 1]], masters[master]))
        steps.sort()
        self.pka = np.array([pka for pka, _ in steps])
        self.rows = np.array([row for _, row in steps])

    def ph(self, problem: Problem) -> NDArray:
        """First guess of the pH; (N,)."""
        alkalinity = problem.organic * END_POINT_FRACTION - problem.totals[0]
        above = alkalinity + self.highest[1:] @ problem.totals[1:]
        capacity = np.where(self.rows[:, None] < 0, problem.organic, problem.totals[self.rows])
        ends = np.cumsum(capacity, axis=0)
        step = np.minimum((above > ends).sum(axis=0), len(ends) - 1)
        points = np.arange(len(problem))
        size = capacity[step, points]
        used = (above - ends[step, points]) / np.maximum(size, SMALLEST_TOTAL) + 1.0
        used = np.clip(used, 0.02, 0.98)
        buffered = self.pka[step] + np.log10(used / (1.0 - used))
        acid = -np.log10(np.maximum(-above, 1e-7))
        base = 14.0 + np.log10(np.maximum(above - ends[-1], 1e-7))
        return np.where(above <= 0.0, acid, np.where(above >= ends[-1], base, buffered))


def first_state(newton: Newton, problem: Problem, ph: NDArray) -> State:
    """State at a pH, with every other component scaled to its total a few times as if on its own."""
    totals = problem.totals[1:]
    absent = newton.one_sided[1:, None] & (totals < SMALLEST_TOTAL)
    x = np.where(absent, ABSENT, np.log(np.maximum(totals, np.where(absent, SMALLEST_TOTAL, TRACE))))
    strength = np.clip(problem.inert + np.abs(totals).sum(axis=0), 1e-7, 0.5)
    state = State(np.concatenate([-LN10 * ph[None], x]), strength)
    held, lacking = np.maximum(newton.counts[:, 1:].T, 0.0), np.maximum(-newton.counts[:, 1:].T, 0.0)
    power = 1.0 / held.max(axis=1)[:, None]
    for _ in range(PASSES):
        c = newton.concentrations(problem, state)
        have = lacking @ c + np.maximum(totals, 0.0)
        want = held @ c - np.minimum(totals, 0.0)
        state.x[1:] += power * np.log(np.where(absent, 1.0, have) / np.where(absent, 1.0, want))
        state.strength = np.clip(0.5 * newton.charges**2 @ c + problem.inert, 1e-8, 1.0)
    return state
