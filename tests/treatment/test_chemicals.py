"""What chemicals add, how doses are written, and the hand checks of the trade."""

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from explorer.chemistry import System, WeakAcid
from explorer.treatment.chemicals import (
    CATALOGUE,
    PRODUCT,
    ChemicalError,
    chemical_from_dict,
    density,
    dose_in,
    dose_moles,
    product_dose,
    pump_rate,
    totals_vector,
    with_setting,
)
from explorer.treatment.floc import ALKALINITY_PER_METAL
from explorer.treatment.units import UnitError, from_base

KEYS = (
    "sodium_hydroxide", "calcium_hydroxide", "calcium_oxide", "sodium_carbonate", "sodium_bicarbonate",
    "potassium_hydroxide", "magnesium_hydroxide", "carbon_dioxide", "hydrochloric_acid",
    "sulfuric_acid", "phosphoric_acid", "monosodium_phosphate", "disodium_phosphate",
    "trisodium_phosphate", "aluminium_sulfate", "polyaluminium_chloride", "ferric_chloride",
    "ferric_sulfate", "sodium_hypochlorite", "calcium_hypochlorite", "chlorine", "ammonia",
    "ammonium_sulfate", "fluorosilicic_acid", "sodium_fluoride", "sodium_silicate", "calcium_chloride",
    "magnesium_chloride", "sodium_chloride", "sodium_bisulfite", "sodium_thiosulfate", "acetic_acid",
    "citric_acid",
)  # fmt: skip

EVERY_DOSE = [(key, unit) for key, chemical in CATALOGUE.items() for unit in chemical.units]


def added(key, value, unit, component, in_unit="mg/L", chemical=None):
    """How much of a component a dose adds, in a trade unit."""
    chemical = chemical or CATALOGUE[key]
    moles = dose_moles(chemical, value, unit) * chemical.totals.get(component, 0.0)
    return float(from_base(moles, in_unit, component))


def alkalinity_in_the_end(key, value, unit, chemical=None):
    """mg/L as CaCO3, once the hydroxide of a coagulant has formed."""
    metal = sum((chemical or CATALOGUE[key]).totals.get(name, 0.0) for name in ("aluminium", "iron"))
    formed = float(dose_moles(chemical or CATALOGUE[key], value, unit)) * metal * ALKALINITY_PER_METAL
    return added(key, value, unit, "alkalinity", "mg/L as CaCO3", chemical) - formed * 50_043


def test_the_catalogue_holds_what_the_trade_uses():
    """Every chemical that a scenario may name, and no other."""
    assert sorted(CATALOGUE) == sorted(KEYS)


@pytest.mark.parametrize("key", KEYS)
def test_no_chemical_brings_charge_into_the_water(system, charge, key):
    """A bottle is electrically neutral: its vector carries no charge."""
    assert charge(totals_vector(CATALOGUE[key], system)) == pytest.approx(0, abs=1e-12)


@pytest.mark.parametrize("key", KEYS)
def test_every_figure_has_a_source(key):
    """Strength and density say where they come from."""
    chemical = CATALOGUE[key]
    assert chemical.sources["molar mass"].startswith("IUPAC")
    assert ("strength" in chemical.sources) is (chemical.usual_strength is not None)
    assert ("density" in chemical.sources) is bool(chemical.densities)


@pytest.mark.parametrize(("key", "unit"), EVERY_DOSE)
@given(value=st.floats(1e-6, 1e5))
def test_a_dose_survives_the_way_to_moles_and_back(key, unit, value):
    """dose_in is the inverse of dose_moles in every unit of every chemical."""
    chemical = CATALOGUE[key]
    assert dose_in(chemical, dose_moles(chemical, value, unit), unit) == pytest.approx(value, rel=1e-14)


@pytest.mark.parametrize(
    ("key", "unit", "factor"),
    [
        # mg/L as CaCO3 of alkalinity per mg/L of chemical: stoichiometry, to the digits the trade prints.
        ("sodium_hydroxide", "mg/L", 1.251),
        ("potassium_hydroxide", "mg/L", 0.892),
        ("calcium_hydroxide", "mg/L", 1.351),
        ("calcium_oxide", "mg/L", 1.785),
        ("magnesium_hydroxide", "mg/L", 1.716),
        ("sodium_carbonate", "mg/L", 0.944),
        ("sodium_bicarbonate", "mg/L", 0.596),
        ("carbon_dioxide", "mg/L", 0.0),
        ("sulfuric_acid", "mg/L", -1.020),
        ("hydrochloric_acid", "mg/L", -1.373),
        ("phosphoric_acid", "mg/L", -0.511),
        ("phosphoric_acid", "mg/L as P", -1.62),
        ("monosodium_phosphate", "mg/L as P", 0.0),
        ("disodium_phosphate", "mg/L", 0.353),
        ("trisodium_phosphate", "mg/L", 0.611),
        ("chlorine", "mg/L as Cl2", -0.706),
        ("sodium_hypochlorite", "mg/L as Cl2", 0.706),
        ("ammonia", "mg/L as N", 3.57),
        ("ammonium_sulfate", "mg/L as N", 0.0),
        ("fluorosilicic_acid", "mg/L as F", -2.63),
        ("fluorosilicic_acid", "mg/L", -2.084),
        ("aluminium_sulfate", "mg/L", -0.505),
        ("aluminium_sulfate", "mg/L as Al", -5.56),
        ("ferric_chloride", "mg/L as Fe", -2.69),
        ("ferric_chloride", "mg/L", -0.926),
        ("ferric_sulfate", "mg/L", -0.751),
    ],
)
def test_alkalinity_per_dose_agrees_with_the_tables_of_the_trade(key, unit, factor):
    """Each factor to its printed digits."""
    digits = 10 ** -len(str(factor).partition(".")[2])
    assert alkalinity_in_the_end(key, 1, unit) == pytest.approx(factor, abs=digits)


@pytest.mark.parametrize(
    ("key", "unit", "component", "factor"),
    [
        ("aluminium_sulfate", "mg/L as Al", "sulfate", 5.34),
        ("ferric_chloride", "mg/L as Fe", "chloride", 1.90),
        ("ferric_sulfate", "mg/L as Fe", "sulfate", 2.58),
        ("sodium_hypochlorite", "mg/L as Cl2", "sodium", 0.65),
        ("sodium_hypochlorite", "mg/L as Cl2", "chloride", 0.50),
        ("fluorosilicic_acid", "mg/L as F", "silica", 0.53),
    ],
)
def test_what_else_comes_along_agrees_with_the_tables_of_the_trade(key, unit, component, factor):
    """Side effects of a dose, mg per mg."""
    assert added(key, 1, unit, component) == pytest.approx(factor, abs=0.006)


def test_thirty_of_alum_takes_fifteen_of_alkalinity():
    """The hand check 30 mg/L × 0.505 comes out."""
    assert alkalinity_in_the_end("aluminium_sulfate", 30, "mg/L") == pytest.approx(-15.2, abs=0.05)


def test_alum_as_product_as_hydrate_and_as_aluminium_agree():
    """Three ways to write one dose: 48.5 % liquor, 14-hydrate, metal."""
    alum = CATALOGUE["aluminium_sulfate"]
    moles = dose_moles(alum, 30.0, "mg/L")
    assert dose_in(alum, moles, PRODUCT) == pytest.approx(30 / 0.485)
    assert dose_in(alum, moles, "mg/L as Al") == pytest.approx(30 * 2 * 26.98 / 594.34, rel=1e-4)
    for unit in (PRODUCT, "mg/L as Al"):
        assert dose_moles(alum, dose_in(alum, moles, unit), unit) == pytest.approx(float(moles), rel=1e-14)


@pytest.mark.parametrize("basicity", [0, 50, 85])
def test_polyaluminium_chloride_takes_less_alkalinity_the_more_basic_it_is(system, charge, basicity):
    """−5.56 (1 − B) alkalinity and 3.94 (1 − B) chloride per mg of Al (trade tables)."""
    chemical = with_setting("polyaluminium_chloride", basicity)
    share = 1 - basicity / 100
    assert alkalinity_in_the_end("", 1, "mg/L as Al", chemical) == pytest.approx(-5.56 * share, abs=0.006)
    assert added("", 1, "mg/L as Al", "chloride", chemical=chemical) == pytest.approx(3.94 * share, abs=0.006)
    assert charge(totals_vector(chemical, system)) == pytest.approx(0, abs=1e-12)


def test_sodium_silicate_brings_soda_by_its_ratio(system, charge):
    """Ratio 3.22 by mass: 1 g of Na2O, two equivalents per 61.98 g, with every 3.22 g of SiO2."""
    chemical = with_setting("sodium_silicate", 3.22)
    assert chemical.totals["alkalinity"] == pytest.approx(2 * 60.083 / 3.22 / 61.979, rel=1e-4)
    assert with_setting("sodium_silicate", 2.0).totals["sodium"] > chemical.totals["sodium"]
    assert charge(totals_vector(chemical, system)) == pytest.approx(0, abs=1e-12)


def test_pump_rate_is_the_hand_check():
    """12 mg/L NaOH into 850 m³/h from 50 % at 1.5253 kg/L: 12 × 850 / (0.5 × 1.5253 × 1000) L/h."""
    caustic = CATALOGUE["sodium_hydroxide"]
    rate = pump_rate(caustic, dose_moles(caustic, 12, "mg/L"), 850)
    assert rate == pytest.approx(12 * 850 / (0.5 * 1.5253 * 1000), rel=1e-12)


def test_a_weaker_product_takes_more_of_it():
    """The same dose from 25 % caustic: twice the mass, by the lower density."""
    caustic = CATALOGUE["sodium_hydroxide"]
    moles = dose_moles(caustic, 12, "mg/L")
    assert product_dose(caustic, moles, 25) == pytest.approx(48)
    assert pump_rate(caustic, moles, 850, 25) == pytest.approx(12 * 850 / (0.25 * 1.274 * 1000), rel=1e-12)


def test_strength_matters_to_a_dose_of_product_only():
    """100 mg/L of 40 % product is 40 mg/L; 40 mg/L is 40 mg/L from any product."""
    ferric = CATALOGUE["ferric_chloride"]
    assert dose_moles(ferric, 100, PRODUCT, 40) == pytest.approx(
        float(dose_moles(ferric, 40, "mg/L")), rel=1e-14
    )
    assert dose_moles(ferric, 40, "mg/L", 20) == dose_moles(ferric, 40, "mg/L")


@pytest.mark.parametrize(
    ("key", "strength", "value"),
    [
        # Reference points of the density tables named in the catalogue.
        ("sodium_hydroxide", 25, 1.274),
        ("hydrochloric_acid", 33, 1.164),
        ("sulfuric_acid", 70, 1.6105),
        ("phosphoric_acid", 75, 1.5761),
        ("ferric_chloride", 40, 1.4162),
        ("aluminium_sulfate", 48.5, 1.335),
        ("fluorosilicic_acid", 23, 1.212),
        ("ammonia", 25, 0.9065),
    ],
)
def test_density_reads_the_table(key, strength, value):
    """Tabulated strengths give tabulated densities."""
    assert density(CATALOGUE[key], strength) == pytest.approx(value, abs=1e-4)


def test_density_between_beyond_and_far_beyond_the_table():
    """Linear in between, a tenth beyond the strongest product, then unknown."""
    found = density(CATALOGUE["sodium_hydroxide"], np.array([0, 45, 54, 60]))
    np.testing.assert_allclose(found, [0.9982, 1.4776, 1.56346, np.nan], atol=1e-4)


def test_a_dry_product_has_no_pump_rate():
    """Quicklime is weighed, not pumped."""
    lime = CATALOGUE["calcium_oxide"]
    assert np.isnan(density(lime))
    assert np.isnan(pump_rate(lime, 1e-3, 100))


def test_a_dose_in_a_foreign_unit_is_refused_in_one_sentence():
    """The message names the chemical and its units."""
    with pytest.raises(UnitError) as refused:
        dose_moles(CATALOGUE["carbon_dioxide"], 1, "mg/L as Cl2")
    assert str(refused.value).startswith(
        "'mg/L as Cl2' is not a unit for a dose of carbon dioxide; allowed: mg/L, mg/L as C, "
    )


def test_doses_of_any_shape():
    """Doses and strengths broadcast."""
    alum = CATALOGUE["aluminium_sulfate"]
    assert dose_moles(alum, np.ones((3, 1)), PRODUCT, np.array([40.0, 50.0])).shape == (3, 2)


def test_dangerous_company_is_named_on_both_bottles():
    """Acid and hypochlorite, ammonia and hypochlorite: each warns of the other."""
    assert any("hypochlorite" in text for text in CATALOGUE["sulfuric_acid"].hazards)
    assert any("hypochlorite" in text for text in CATALOGUE["aluminium_sulfate"].hazards)
    assert any("acid" in text for text in CATALOGUE["sodium_hypochlorite"].hazards)
    assert any("ammonia" in text for text in CATALOGUE["sodium_hypochlorite"].hazards)
    assert any("hypochlorite" in text for text in CATALOGUE["ammonia"].hazards)


def test_a_user_may_define_a_chemical_by_its_formula(system):
    """Zinc-free orthophosphate, say: the alkalinity follows from the charge of what is added."""
    blend = chemical_from_dict(
        "dipotassium_phosphate",
        {
            "formula": "K2HPO4",
            "adds": {"potassium": 2, "phosphate": 1},
            "counted_as": {"P": 1},
            "strength": 50,
            "density": 1.55,
        },
    )
    assert blend.name == "Dipotassium phosphate"
    assert blend.totals["alkalinity"] == 1
    assert set(blend.units) == {"mg/L", "mg/L as P", "mmol/L", "mol/L", PRODUCT}
    assert blend.usual_density == pytest.approx(1.55)
    assert totals_vector(blend, system)[system.index["potassium"]] == 2


def test_a_user_may_start_from_a_chemical_of_the_catalogue():
    """Only what differs is said."""
    own = chemical_from_dict("own", {"like": "polyaluminium_chloride", "basicity": 70, "strength": 9})
    assert own.totals["alkalinity"] == pytest.approx(2.1)
    assert own.usual_strength == 9
    assert own.default_unit == "mg/L as Al"


def test_a_chemical_may_carry_an_acid_of_the_user():
    """Sodium benzoate adds the acid's total, against its protonated form."""
    system = System(acids=(WeakAcid("benzoic", "Benzoic acid", 122.12, (4.20,)),))
    salt = chemical_from_dict(
        "sodium_benzoate", {"formula": "C7H5O2Na", "adds": {"benzoic": 1, "sodium": 1}}, {"benzoic": 0}
    )
    vector = totals_vector(salt, system)
    assert vector[system.index["benzoic"]] == vector[system.index["alkalinity"]] == 1


@pytest.mark.parametrize(
    ("definition", "message"),
    [
        ({"adds": {"sodium": 1}}, "formula: is missing; give it or a molar mass"),
        ({"formula": "NaOH"}, "adds: is missing; say what one mole adds to the water"),
        ({"formula": "Xx2", "adds": {"sodium": 1}}, "formula: Xx2 cannot be read"),
        (
            {"formula": "NaCl", "adds": {"salt": 1}},
            "adds.salt: is nothing a water can hold; allowed: alkalinity, ",
        ),
        (
            {"formula": "NaOH", "adds": {"sodium": 1, "alkalinity": 2}},
            "adds.alkalinity: does not fit the charge of the rest; allowed: 1",
        ),
        (
            {"formula": "NaOH", "adds": {"sodium": 1}, "strength": 120},
            "strength: 120 is not allowed; allowed: ",
        ),
        (
            {"formula": "NaOH", "adds": {"sodium": 1}, "strength": 0},
            "strength: 0 is no product; allowed above 0",
        ),
        ({"formula": "NaOH", "adds": {"sodium": "x"}}, "adds.sodium: 'x' is not allowed; allowed: a number"),
        ({"formula": "NaOH", "adds": {"sodium": 1}, "colour": "red"}, "colour: is not a field of a chemical"),
        ({"formula": "NaOH", "adds": {"sodium": 1}, "density": 1.2}, "strength: is missing; a density needs"),
        (
            {"formula": "NaOH", "adds": {"sodium": 1}, "counted_as": {"CaCO3": 0}},
            "counted_as.CaCO3: must be above 0",
        ),
        (
            {"formula": "NaOH", "adds": {"sodium": 1}, "default_unit": "lb"},
            "default_unit: 'lb' is no unit of this",
        ),
        ({"like": "snake_oil"}, "like: there is no chemical 'snake_oil' in the catalogue"),
        (
            {"like": "polyaluminium_chloride", "basicity": 90},
            "basicity: 90 is not allowed; allowed: a number from 0",
        ),
        (
            {"like": "sodium_hydroxide", "basicity": 50},
            "basicity: is not a field of a chemical; allowed: adds, ",
        ),
        ({"formula": "NaOH", "adds": {"sodium": 1}, "name": 3}, "name: must be text"),
        ({"formula": "NaOH", "adds": [1]}, "adds: must list amounts by name"),
    ],
    ids=lambda value: value if isinstance(value, str) else None,
)
def test_a_definition_that_cannot_be_used_is_refused_in_one_sentence(definition, message):
    """The sentence names the field, what is wrong and what is allowed."""
    with pytest.raises(ChemicalError) as refused:
        chemical_from_dict("own", definition)
    assert str(refused.value).startswith(message)


def test_a_setting_belongs_to_two_chemicals_only():
    """Lime has no basicity to set."""
    with pytest.raises(ChemicalError, match="calcium_oxide has no setting"):
        with_setting("calcium_oxide", 1)
