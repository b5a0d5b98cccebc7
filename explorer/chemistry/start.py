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
    """State at a pH with each component scaled twice to its total as if the others did not matter."""
    absent = problem.totals < SMALLEST_TOTAL
    if problem.phases is not None:
        absent &= ~(problem.phases != 0.0).any(axis=0)[:, None]
    absent[0] = False
    floor = np.maximum(problem.totals, 1e-9 if problem.phases is not None else SMALLEST_TOTAL)
    x = np.where(absent, ABSENT, np.log(floor))
    x[0] = -LN10 * ph
    strength = np.clip(problem.inert + problem.totals[1:].sum(axis=0), 1e-7, 0.5)
    phases = 0 if problem.phases is None else len(problem.phases)
    state = State(x, strength, np.zeros((phases, len(problem))))
    power = 1.0 / np.maximum(newton.counts[:, 1:].max(axis=0), 1.0)[:, None]
    for _ in range(PASSES):
        c = newton.concentrations(problem, state)
        balance = newton.counts[:, 1:].T @ c
        scale = np.where(absent[1:] | (balance <= 0.0), 1.0, floor[1:] / np.where(balance > 0.0, balance, 1.0))
        state.x[1:] += power * np.clip(np.log(scale), -60.0, 60.0)
        state.strength = np.clip(0.5 * newton.charges**2 @ c + problem.inert, 1e-8, 1.0)
    return state
