"""Phases held at saturation, as a change of basis.

A phase in equilibrium with the water fixes one combination of the master activities. Its *pivot* master is
expressed by the others and drops out of the unknowns, together with the unknown amount of the phase: what is
left is a smaller problem of the same kind, and the amount follows from the pivot's balance afterwards.
"""

from collections.abc import Mapping, Sequence
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from .network import Network

CARBON_DIOXIDE = "carbon_dioxide"
"""Name of the gas phase; what it holds is the activity of CO2(aq)."""

PIVOTS: Mapping[str, str] = {
    "calcite": "Ca+2",
    "aragonite": "Ca+2",
    "vaterite": "Ca+2",
    "brucite": "Mg+2",
    "aluminium_hydroxide": "Al+3",
    "gibbsite": "Al+3",
    "iron_hydroxide": "Fe+3",
    CARBON_DIOXIDE: "CO2(aq)",
}
"""Phases that can be held, and the master each one fixes. The gas comes last: calcite holds its pivot too."""


@dataclass(frozen=True)
class Phases:
    """Phases held together: ``counts`` (P, M) over all masters and ``pivots`` (P,) rows."""

    names: tuple[str, ...]
    counts: NDArray
    pivots: NDArray

    @classmethod
    def of(cls, network: Network, names: Sequence[str]) -> "Phases":
        """Raises ValueError for a phase that cannot be held, or two that fix the same master."""
        unknown = [name for name in names if name not in PIVOTS]
        if unknown:
            raise ValueError(f"{unknown[0]} cannot be held at saturation; allowed are {', '.join(PIVOTS)}")
        if len({PIVOTS[name] for name in names}) < len(names):
            raise ValueError(f"of {' and '.join(names)} only one can be held at saturation")
        ordered = tuple(sorted(names, key=list(PIVOTS).index))
        pivots = np.array([network.masters.index(PIVOTS[name]) for name in ordered], dtype=int)
        counts = np.zeros((len(ordered), len(network.masters)))
        for row, name in enumerate(ordered):
            counts[row] = network.solids[name].counts if name in network.solids else 0.0
            counts[row, pivots[row]] = 1.0
        return cls(ordered, counts, pivots)

    def reduced_counts(self, counts: NDArray) -> tuple[NDArray, NDArray]:
        """Species counts (S, M) with the pivots expressed by the other masters, and the pivot counts (S, P)
        that carry each phase's saturation product into ln k."""
        counts = counts.copy()
        carried = np.empty((len(counts), len(self.names)))
        for p, pivot in enumerate(self.pivots):
            carried[:, p] = counts[:, pivot]
            counts -= np.outer(counts[:, pivot], self.counts[p])
        return counts, carried

    def reduced_totals(self, totals: NDArray) -> NDArray:
        """Totals (M, N) that no formation or dissolution of the phases changes; pivot rows are zero."""
        totals = totals.copy()
        for p, pivot in enumerate(self.pivots):
            totals -= np.outer(self.counts[p], totals[pivot])
        return totals

    def expand(self, x: NDArray, saturation: NDArray) -> None:
        """Fill the pivot rows of ln activities (M, N) in place from ``saturation`` (P, N)."""
        for p in reversed(range(len(self.names))):
            x[self.pivots[p]] = 0.0
            x[self.pivots[p]] = saturation[p] - self.counts[p] @ x

    def amounts(self, excess: NDArray) -> NDArray:
        """mol/L of each phase (P, N) from what the dissolved species leave of the pivots' totals (P, N)."""
        return np.linalg.solve(self.counts[:, self.pivots].T, excess)
