"""Equilibrium of one water by minimising the Gibbs energy: a second formulation, for comparison only.

Nothing here knows of alkalinity, master species or components. From the published reactions and their log K
follow (1) what no reaction changes, as the null space of their stoichiometry, and (2) a chemical potential
for every species. The equilibrium is the minimum of the Gibbs energy at those conserved amounts, found on
the convex dual, where the multipliers are the unknowns; the ionic strength is found around it, in a bracket.
"""

import re

import numpy as np
from chempy.electrolytes import davies_log_gamma
from numpy.typing import NDArray
from scipy.linalg import null_space
from scipy.optimize import brentq, minimize

from explorer.chemistry.activity import debye_hueckel_slope
from explorer.chemistry.constants import Constant, dissolved, log_k

WATER = "H2O"
LN10 = np.log(10.0)


def charge(species: str) -> int:
    """Charge number as written at the end of a name."""
    sign, number = (re.search(r"([+-])(\d*)$", species) or re.match(r"()()", species)).groups()
    return int(f"{sign}{number or 1}") if sign else 0


def reachable(recipe: dict[str, float]) -> tuple[list[str], list[Constant]]:
    """Species that can form from those of a recipe and water, and the reactions between them."""
    known, reactions = {WATER, *recipe}, [c for c in dissolved() if c.used]
    before = 0
    while len(known) > before:
        before = len(known)
        for reaction in (c.reaction for c in reactions):
            left, right = ({s for s, n in reaction.items() if n * sign > 0} for sign in (-1, 1))
            if left <= known or right <= known:
                known |= left | right
    return sorted(known), [c for c in reactions if c.reaction.keys() <= known]


def equilibrium(recipe: dict[str, float], temperature: float) -> tuple[dict[str, float], dict[str, float]]:
    """Concentrations [mol/L] and ln activities by species of a recipe [mol of species per litre] at °C."""
    names, reactions = reachable(recipe)
    stoichiometry = np.array([[c.reaction.get(name, 0) for c in reactions] for name in names], dtype=float)
    ln_k = LN10 * log_k(reactions, temperature)
    # any set of potentials that gives the constants will do; water has unit activity
    potential = np.linalg.lstsq(stoichiometry.T, ln_k, rcond=None)[0]
    conserved = null_space(stoichiometry.T)
    at = names.index(WATER)
    shift = -potential[at] * conserved[at] / (conserved[at] @ conserved[at])
    potential = potential + conserved @ shift
    conserved = conserved @ null_space(conserved[at : at + 1])
    keep = [i for i in range(len(names)) if i != at]
    names, potential, conserved = [names[i] for i in keep], potential[keep], conserved[keep]
    charges = np.array([charge(name) for name in names])
    amounts = np.array([recipe.get(name, 0.0) for name in names])
    target = conserved.T @ amounts
    slope = float(debye_hueckel_slope(temperature))
    # a start from which the exponentials stay finite: what was put in about as it is, the rest rare
    weights = np.where(amounts > 0, 1.0, 0.3)
    guess = np.log(np.where(amounts > 0, amounts, 1e-8)) - potential
    multipliers = np.linalg.lstsq(weights[:, None] * conserved, weights * guess, rcond=None)[0]

    def solve(strength: float) -> NDArray:
        nonlocal multipliers
        ln_gamma = LN10 * np.where(charges == 0, 0.1 * strength, davies_log_gamma(strength, charges, slope))

        def amount(x: NDArray) -> NDArray:
            return np.exp(np.minimum(potential - ln_gamma + conserved @ x, 300.0))

        def hessian(x: NDArray) -> NDArray:
            return conserved.T @ (amount(x)[:, None] * conserved)

        def gradient(x: NDArray) -> NDArray:
            return conserved.T @ amount(x) - target

        found = minimize(
            lambda x: amount(x).sum() - target @ x, multipliers, jac=gradient, hess=hessian,
            method="trust-exact", options={"gtol": 1e-13, "maxiter": 2000},
        ).x  # fmt: skip
        for _ in range(4):  # the energy is too flat to bring the last digits
            found = found - np.linalg.solve(hessian(found), gradient(found))
        multipliers = found
        return amount(found)

    def excess(strength: float) -> float:
        return 0.5 * charges**2 @ solve(strength) - strength

    concentrations = solve(brentq(excess, 1e-9, 0.9, xtol=1e-16, rtol=1e-14))
    activities = potential + conserved @ multipliers
    return dict(zip(names, concentrations, strict=True)), dict(zip(names, activities, strict=True))
