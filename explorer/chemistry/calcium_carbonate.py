"""Calcium carbonate: precipitation potential and approach to saturation."""

from numpy.typing import NDArray

from .solution import Solution


def precipitation_potential(solution: Solution, solid: str = "calcite") -> NDArray:
    """CaCO3 that a closed water must lose to be just saturated, mol/L; negative: it would dissolve that much.

    ``solid``: calcite, aragonite or vaterite. Defined also where calcium or DIC is exactly zero; nan where
    the water itself has no solution. Shape of the solution."""
    _, formed = solution.system.equilibrate(solution.totals, solution.temperature, (solid,))
    return formed[solid]
