"""Conductivity of salt solutions against standards, the handbook and a library of measurements."""

import numpy as np
import pytest
from numpy.typing import ArrayLike

from explorer.chemistry.conductivity import conductivity

from .libraries import library_table
from .reference import Case, assert_agreement, figure
from .solutions import BRINGS, solution

EQUIVALENTS = {"CaCl2": 2, "MgCl2": 2, "Na2SO4": 2, "K2SO4": 2}
"""eq per mol of the salts that have more than one."""


def measured_at(recipe: dict[str, ArrayLike], temperature: float) -> ArrayLike:
    """µS/cm of a recipe [mol/L] at its own temperature."""
    return conductivity(solution(recipe, temperature), temperature)


@figure("KCL-STANDARDS")
def conductivity_of_potassium_chloride(case: Case) -> ArrayLike:
    """Molal and molar are 0.3 % apart at 25 °C, inside the tolerance."""
    amounts = np.ravel(case["KCl_mol_per_kg"])
    return np.transpose([measured_at({"KCl": amounts}, t) for t in case["temperature"]])


@figure("EQUIVALENT-CONDUCTIVITY")
def equivalent_conductivity(case: Case) -> ArrayLike:
    equivalents = case["eq_per_litre"]
    return [
        1e-3 * measured_at({name: equivalents / EQUIVALENTS.get(name, 1)}, 25.0) / equivalents
        for name in map(str, np.ravel(case["substance"]))
    ]


MEASURED = library_table("McCleskey Electrical Conductivity.tsv", "formula")
"""Fits to measurements of single salts, McCleskey 2011, J. Chem. Eng. Data 56:317."""


def fitted(formula: str, molal: ArrayLike, temperature: float) -> ArrayLike:
    """µS/cm of a single salt."""
    row = MEASURED[formula]
    names = ("c1", "c2", "c3", "d1", "d2", "d3", "B", "multiplier")
    *limit, d1, d2, d3, b, equivalents = (float(row[name]) for name in names)
    root = np.sqrt(molal)
    fall = np.polyval([d1, d2, d3], temperature) * root / (1 + b * root)
    return 1000 * equivalents * molal * (np.polyval(limit, temperature) - fall)


def test_the_standards_of_potassium_chloride():
    """The conductivity standards are met within 2 % from 0 to 50 °C."""
    assert_agreement("KCL-STANDARDS")


def test_the_equivalent_conductivity_of_salts():
    """Salts of the handbook are met salt by salt; sodium sulfate is the poorest."""
    assert_agreement("EQUIVALENT-CONDUCTIVITY")


LIMITING = library_table("CRC conductivity infinite dilution.tsv", "Formula")
"""Limiting conductivities of ions in the CRC Handbook, S m²/eq."""

IONS = {
    "KCl": ("K+", "Cl-"), "NaCl": ("Na+", "Cl-"), "NH4Cl": ("NH4+", "Cl-"), "CaCl2": ("Ca+2", "Cl-"),
    "MgCl2": ("Mg+2", "Cl-"), "Na2SO4": ("Na+", "SO4-2"), "KNO3": ("K+", "NO3-"), "NaF": ("Na+", "F-"),
    "NaHCO3": ("Na+", "HCO3-"),
}  # fmt: skip


@pytest.mark.parametrize("salt", IONS)
def test_a_salt_in_great_dilution(salt):
    """At 0.1 meq/L a salt conducts as the limiting conductivities of its ions say, within 2 %."""
    limit = sum(1e4 * float(LIMITING[ion]["lambda"]) for ion in IONS[salt])
    amount = 1e-4 / EQUIVALENTS.get(salt, 1)
    assert 1e-3 * measured_at({salt: amount}, 25.0) / 1e-4 == pytest.approx(limit, rel=0.02)


# percent allowed up to 0.01 and up to 0.1 mol/kg
SALTS = {
    "KCl": (1, 1), "NaCl": (2, 3), "HCl": (1, 1), "NH4Cl": (2, 2), "NaOH": (2, 2.5), "KHCO3": (1, 1),
    "KNO3": (2, 2), "CaCl2": (1, 1.5), "MgCl2": (5, 11), "K2SO4": (5, 15), "Na2SO4": (11, 21),
}  # fmt: skip


@pytest.mark.parametrize("temperature", [5.0, 15.0, 25.0])
@pytest.mark.parametrize("salt", SALTS)
def test_a_salt_in_cold_to_mild_water(salt, temperature):
    """Measured single salts are met; where magnesium or sulfate carry the current, only roughly."""
    assert salt in BRINGS
    for molal, allowed in zip((np.array([0.001, 0.01]), np.array([0.03, 0.1])), SALTS[salt], strict=True):
        ratio = measured_at({salt: molal}, temperature) / fitted(salt, molal, temperature)
        assert 100 * np.abs(ratio - 1).max() <= allowed
