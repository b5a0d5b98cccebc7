"""Molar masses from formulas."""

import pytest

from explorer.chemistry.elements import molar_mass


@pytest.mark.parametrize(
    ("formula", "expected"),
    [
        # Sums of IUPAC 2021 abridged atomic weights, to the last printed digit.
        ("Ca", 40.078),
        ("CaCO3", 100.086),
        ("Ca(OH)2", 74.092),
        ("Fe2(SO4)3", 399.858),
        ("Al2(SO4)3·14H2O", 594.341),
        ("(NH4)2SO4", 132.134),
        ("Ca5(PO4)3(OH)", 502.307),
    ],
)
def test_a_formula_is_weighed_with_groups_and_water(formula, expected):
    """Brackets, their counts and crystal water are read."""
    assert molar_mass(formula) == pytest.approx(expected, abs=1e-3)


@pytest.mark.parametrize("formula", ["", "Xy", "ca", "Ca(OH", "Ca)2", "Ca-", "2", "NaCl·", "Na+"])
def test_a_formula_that_cannot_be_read_is_refused(formula):
    """Nothing is guessed."""
    with pytest.raises(ValueError, match="formula"):
        molar_mass(formula)
