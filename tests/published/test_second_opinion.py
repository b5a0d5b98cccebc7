"""The same equilibria worked out by formulations and solvers that share nothing with the engine but log K."""

import numpy as np
import pytest
from chempy import Equilibrium, Substance
from chempy.equilibria import EqSystem

from explorer.chemistry.constants import dissolved, log_k

from .gibbs import charge, equilibrium
from .solutions import SYSTEM, mixture

DISSOLVES_INTO: dict[str, dict[str, float]] = {
    "HCl": {"H+": 1, "Cl-": 1},
    "NaOH": {"Na+": 1, "OH-": 1},
    "Ca(OH)2": {"Ca+2": 1, "OH-": 2},
    "CaCl2": {"Ca+2": 1, "Cl-": 2},
    "MgCl2": {"Mg+2": 1, "Cl-": 2},
    "NH4Cl": {"NH4+": 1, "Cl-": 1},
    "Na2SO4": {"Na+": 2, "SO4-2": 1},
    "K2SO4": {"K+": 2, "SO4-2": 1},
    "KNO3": {"K+": 1, "NO3-": 1},
    "NaF": {"Na+": 1, "F-": 1},
    "CO2": {"CO2(aq)": 1},
    "NaHCO3": {"Na+": 1, "HCO3-": 1},
    "Na2CO3": {"Na+": 2, "CO3-2": 1},
    "KH2PO4": {"K+": 1, "H2PO4-": 1},
    "Na2HPO4": {"Na+": 2, "HPO4-2": 1},
    "Na2B4O7": {"Na+": 2, "B(OH)3": 2, "B(OH)4-": 2},
    "CH3COOH": {"CH3COOH": 1},
    "NaOCl": {"Na+": 1, "OCl-": 1},
    "NaHSO3": {"Na+": 1, "HSO3-": 1},
    "H4SiO4": {"H4SiO4": 1},
    "H3Cit": {"H3Cit": 1},
    "AlCl3": {"Al+3": 1, "Cl-": 3},
    "FeCl3": {"Fe+3": 1, "Cl-": 3},
}
"""Dissolved species of a mole of each substance; any equivalent set would do."""

INERT = {"Cl-", "NO3-"}
"""Ions that form no species but themselves."""


def random_recipe(seed: int) -> tuple[dict[str, float], float]:
    """Five to twelve substances, 1 µmol/L to 20 mmol/L, and a temperature from 0 to 60 °C."""
    random = np.random.default_rng(seed)
    chosen = random.choice(list(DISSOLVES_INTO), random.integers(5, 13), replace=False)
    amounts = 10 ** random.uniform(-6.0, -1.7, len(chosen))
    return dict(zip(map(str, chosen), amounts.tolist(), strict=True)), float(random.uniform(0.0, 60.0))


def species_of(recipe: dict[str, float]) -> dict[str, float]:
    amounts: dict[str, float] = {}
    for substance, moles in recipe.items():
        for species, count in DISSOLVES_INTO[substance].items():
            amounts[species] = amounts.get(species, 0.0) + count * moles
    return amounts


@pytest.mark.parametrize("seed", range(24))
def test_a_mixed_water_by_its_gibbs_energy(seed):
    """A random mixture has the pH of its Gibbs energy minimum to 1e-8 and every species to 1e-8 of itself."""
    recipe, temperature = random_recipe(seed)
    concentrations, activities = equilibrium(species_of(recipe), temperature)
    water = SYSTEM.solve(mixture(recipe), temperature)
    assert water.ph == pytest.approx(-activities["H+"] / np.log(10), abs=1e-8)
    assert concentrations.keys() - INERT == {s for s in water.species if water.concentration(s) > 0}
    for species in concentrations.keys() - INERT:
        own = water.concentration(species)
        assert own == pytest.approx(concentrations[species], rel=1e-8, abs=0.0), species


SUBSYSTEMS = {
    "carbonate with calcium": ({"NaHCO3": 2e-3, "CaCl2": 1e-3, "CO2": 2e-4}, 12.0),
    "carbonate with magnesium, alkaline": ({"Na2CO3": 1e-3, "MgCl2": 5e-4, "NaOH": 2e-4}, 25.0),
    "phosphate with ammonia": ({"KH2PO4": 1e-3, "NH4Cl": 2e-3, "NaOH": 1.5e-3}, 30.0),
    "borate with hypochlorite": ({"Na2B4O7": 1e-4, "NaOCl": 5e-5, "HCl": 1e-4}, 5.0),
    "acetate, acid": ({"CH3COOH": 2e-3, "NaOH": 5e-4}, 20.0),
}
MOLAR_WATER = 55.4
"""mol/L; water is a species like any other in that library."""


@pytest.mark.parametrize("name", SUBSYSTEMS)
def test_a_subsystem_by_an_equilibrium_library(name):
    """With the same constants at fixed activity coefficients, chempy finds the same water to 1e-6."""
    recipe, temperature = SUBSYSTEMS[name]
    water = SYSTEM.solve(mixture(recipe), temperature)
    present = [s for s in water.species if water.concentration(s) > 0]
    start = {species: amount for species, amount in species_of(recipe).items() if species not in INERT}
    rows = [c for c in dissolved() if c.used and c.reaction.keys() <= {*present, "H2O"}]

    def solved(liquid_water: float) -> dict[str, float]:
        reactions = []
        for row, log in zip(rows, log_k(rows, temperature), strict=True):
            counts = row.reaction
            constant = 10.0**log / liquid_water ** -counts.get("H2O", 0)
            for species, count in counts.items():
                if species != "H2O":
                    constant /= float(water.activity_coefficient(charge(species))) ** count
            left, right = ({s: sign * n for s, n in counts.items() if sign * n > 0} for sign in (-1, 1))
            reactions.append(Equilibrium(left, right, constant, checks=()))
        substances = {s: Substance.from_formula(s.removesuffix("(aq)")) for s in (*present, "H2O")}
        network = EqSystem(reactions, substances)
        amounts = dict.fromkeys(substances, 0.0) | start | {"H2O": MOLAR_WATER}
        found, _, sane = network.root(amounts)
        assert sane
        return dict(zip(network.substances, found, strict=True))

    # the first pass says how much water the reactions use up
    concentrations = solved(solved(MOLAR_WATER)["H2O"])
    for species in present:
        own = float(water.concentration(species))
        assert own == pytest.approx(concentrations[species], rel=1e-6, abs=0.0), species
