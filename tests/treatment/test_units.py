"""Trade units: what they mean, which quantity has which, and that nothing is lost on the way back."""

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from explorer.treatment.units import (
    UnitError,
    amount_units,
    default_unit,
    from_base,
    substance_units,
    to_base,
    units_for,
)

QUANTITIES = (
    "temperature", "alkalinity", "dic", "co2", "calcium", "magnesium", "total_hardness", "sodium",
    "potassium", "chloride", "sulfate", "nitrate", "fluoride", "phosphate", "silica", "boron",
    "ammonia", "free_chlorine", "monochloramine", "aluminium", "iron", "toc", "tds", "conductivity",
    "flow", "hardness", "ccpp", "buffer_intensity",
)  # fmt: skip

EVERY_UNIT = [(quantity, unit) for quantity in QUANTITIES for unit in units_for(quantity)]


@pytest.mark.parametrize(("quantity", "unit"), EVERY_UNIT)
@given(value=st.floats(-1e6, 1e6))
def test_a_value_survives_the_way_to_base_units_and_back(quantity, unit, value):
    """from_base is the inverse of to_base for every unit of every quantity."""
    back = from_base(to_base(value, unit, quantity), unit, quantity)
    assert back == pytest.approx(value, rel=1e-14, abs=1e-13)


@pytest.mark.parametrize(
    ("value", "unit", "other", "quantity", "expected"),
    [
        # Factors of the trade's own tables (common practice), to the digits those tables print.
        (1, "°dH", "mg/L as CaCO3", "total_hardness", 17.85),
        (1, "°fH", "mg/L as CaCO3", "total_hardness", 10.00),
        (1, "mg/L as HCO3", "mg/L as CaCO3", "alkalinity", 0.820),
        (1, "mmol/L", "mg/L as CaCO3", "alkalinity", 50.04),
        (1, "mg/L as N", "mg/L as NO3", "nitrate", 4.427),
        (1, "mg/L as N", "mg/L as NH4", "ammonia", 1.288),
        (1, "mg/L as P", "mg/L as PO4", "phosphate", 3.066),
        (1, "mg/L as Si", "mg/L as SiO2", "silica", 2.139),
        (1, "mg/L as S", "mg/L as SO4", "sulfate", 2.996),
        (1, "mg/L as N", "mg/L as Cl2", "monochloramine", 5.06),
        (40.078, "mg/L", "mg/L as CaCO3", "calcium", 100.086),
        (1, "MGD", "m³/d", "flow", 3785.41),
        (1, "ML/d", "m³/h", "flow", 41.667),
        (1, "MGD", "gpm", "flow", 694.44),
        (1, "L/s", "m³/h", "flow", 3.6),
        (50, "°F", "°C", "temperature", 10),
        (25, "mS/m", "µS/cm", "conductivity", 250),
    ],
)
def test_conversions_agree_with_the_tables_of_the_trade(value, unit, other, quantity, expected):
    """Each factor is that of the trade, to its printed digits."""
    digits = 0.5 * 10 ** -len(str(expected).partition(".")[2])
    assert from_base(to_base(value, unit, quantity), other, quantity) == pytest.approx(expected, abs=digits)


@pytest.mark.parametrize(
    ("quantity", "plain", "basis"),
    [
        ("nitrate", "mg/L", "mg/L as NO3"),
        ("phosphate", "mg/L", "mg/L as PO4"),
        ("silica", "mg/L", "mg/L as SiO2"),
        ("ammonia", "mg/L", "mg/L as NH4"),
        ("free_chlorine", "mg/L", "mg/L as Cl2"),
        ("monochloramine", "mg/L", "mg/L as Cl2"),
        ("dic", "mg/L", "mg/L as C"),
        ("toc", "mg/L", "mg/L as C"),
        ("iron", "mg/L", "mg/L as Fe"),
        ("sulfate", "mg/L", "mg/L as SO4"),
    ],
)
def test_a_plain_mg_per_litre_means_the_substance_itself(quantity, plain, basis):
    """mg/L without a basis is the ion or substance named."""
    assert to_base(1, plain, quantity) == to_base(1, basis, quantity)


def test_boron_is_counted_as_the_element():
    """10.81 mg/L of boron is one mmol/L."""
    assert to_base(10.81, "mg/L", "boron") == pytest.approx(1e-3, rel=1e-15)


def test_alkalinity_in_mmol_is_the_acid_capacity():
    """1 mmol/L of acid capacity to pH 4.3 is 1 meq/L of alkalinity, half a mmol of calcium carbonate."""
    assert to_base(1, "mmol/L", "alkalinity") == to_base(1, "meq/L", "alkalinity") == 1e-3
    assert to_base(1, "meq/L", "calcium") == 0.5e-3


@pytest.mark.parametrize(
    ("quantity", "unit"),
    [
        ("alkalinity", "mg/L"),
        ("phosphate", "meq/L"),
        ("sodium", "mg/L as CaCO3"),
        ("flow", "mg/L"),
        ("tds", "%"),
    ],
)
def test_an_ambiguous_or_foreign_unit_is_refused_in_one_sentence(quantity, unit):
    """The message names the unit, the quantity and every unit that is allowed."""
    with pytest.raises(UnitError) as refused:
        to_base(1, unit, quantity)
    assert (refused.value.unit, refused.value.quantity) == (unit, quantity)
    assert refused.value.allowed == units_for(quantity)
    assert str(refused.value) == (
        f"'{unit}' is not a unit for {quantity}; allowed: {', '.join(units_for(quantity))}"
    )


def test_a_missing_unit_is_named_as_missing():
    """An empty unit is not guessed."""
    with pytest.raises(UnitError, match=r"^the unit of total hardness is missing; allowed: mg/L as CaCO3"):
        to_base(1, "", "total_hardness")


def test_ph_has_no_unit():
    """pH is the one entry without a unit."""
    assert units_for("ph") == ("",)
    assert to_base(7.5, "", "ph") == 7.5


@pytest.mark.parametrize(
    ("quantity", "unit"),
    [
        ("alkalinity", "mg/L as CaCO3"),
        ("hardness", "mg/L as CaCO3"),
        ("ccpp", "mg/L as CaCO3"),
        ("dic", "mg/L as C"),
        ("co2", "mg/L"),
        ("ammonia", "mg/L as N"),
        ("unionised_ammonia", "mg/L as N"),
        ("phosphate", "mg/L as P"),
        ("silica", "mg/L as SiO2"),
        ("free_chlorine", "mg/L as Cl2"),
        ("calcium", "mg/L"),
        ("buffer_intensity", "mmol/L per pH"),
        ("flow", "ML/d"),
    ],
)
def test_every_quantity_is_shown_in_the_unit_of_the_trade(quantity, unit):
    """The default unit is the one people in the room expect."""
    assert default_unit(quantity) == unit


def test_arrays_keep_their_shape():
    """Any shape converts at once."""
    values = np.arange(6.0).reshape(2, 3)
    assert to_base(values, "mg/L", "calcium").shape == (2, 3)
    np.testing.assert_allclose(from_base(to_base(values, "°F", "temperature"), "°F", "temperature"), values)


def test_both_micro_signs_are_read():
    """The micro sign and the Greek letter look the same on paper."""
    assert to_base(500, "μg/L", "iron") == to_base(0.5, "mg/L", "iron")


def test_a_substance_of_the_user_has_units_by_its_molar_mass():
    """An acid of 122 g/mol: 122 mg/L is one mmol/L."""
    units = substance_units(122.0)
    assert to_base(122.0, "mg/L", units) == to_base(1.0, "mmol/L", units) == pytest.approx(1e-3)


def test_a_default_outside_the_table_is_a_mistake_of_the_table():
    """A row of the table cannot offer a unit that it does not have."""
    with pytest.raises(KeyError):
        amount_units("mg/L as N", "Na")
