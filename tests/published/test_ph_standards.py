"""pH of solutions that others have measured or worked out: primary standards, open water, dilute salts."""

import numpy as np
import pytest
from numpy.typing import ArrayLike

from explorer.chemistry.constants import log_henry_co2

from .reference import CASES, Case, assert_agreement, difference, figure
from .solutions import SYSTEM, WITH_PHTHALATE, mixture, solution


@figure("PH-PHOS-11", "PH-PHOS-135", "PH-BORAX", "PH-CARB", "PH-CARB-25", "PH-BORAX-25", "LIME-SAT")
def ph_of_recipe(case: Case) -> ArrayLike:
    return solution(case["recipe"], case["temperature"]).ph


@figure("PH-PHTHALATE", "PH-PHTHALATE-25")
def ph_of_phthalate(case: Case) -> ArrayLike:
    return solution(case["recipe"], case["temperature"], WITH_PHTHALATE).ph


@figure("DILUTION-NBS")
def rise_on_dilution(case: Case) -> ArrayLike:
    recipes = [mixture(case["recipes"][name], WITH_PHTHALATE) for name in case["standard"]]
    strong, weak = (WITH_PHTHALATE.solve(np.stack(recipes, axis=1) * part, 25.0) for part in (1.0, 0.5))
    return weak.ph - strong.ph


@figure("OPEN-AIR-WATER")
def ph_open_to_air(case: Case) -> ArrayLike:
    held = case["co2_atm"] * 10 ** log_henry_co2(case["temperature"])
    water, _ = SYSTEM.equilibrate(SYSTEM.zeros(), case["temperature"], carbon_dioxide=held)
    return water.ph


@figure("SALTS-DILUTE")
def ph_of_dilute_salts(case: Case) -> ArrayLike:
    return [solution({str(name): case["mol_per_litre"]}).ph for name in case["substance"]]


@figure("ENDPOINT-BARNES")
def ph_at_end_point(case: Case) -> ArrayLike:
    carbon = np.array(case["bicarbonate_mg_per_litre"]) / 61_016
    return solution({"CO2": carbon}, case["temperature"]).ph


@pytest.mark.parametrize("standard", ["PH-PHOS-11", "PH-PHOS-135", "PH-BORAX", "PH-CARB"])
def test_a_primary_standard_from_0_to_50_degrees(standard):
    """Each primary standard has its tabulated pH at every temperature: pK, its slope and activity at once."""
    assert_agreement(standard)


@pytest.mark.parametrize("standard", ["PH-CARB-25", "PH-BORAX-25", "PH-PHTHALATE-25"])
def test_a_standard_measured_to_three_decimals(standard):
    """At 25 °C the measured pH is met within what the Davies equation allows."""
    assert_agreement(standard)


def test_a_weak_acid_defined_by_the_user():
    """Phthalic acid, given by two pKa and two enthalpies, has the pH of its standard from 10 to 40 °C."""
    assert_agreement("PH-PHTHALATE")


def test_water_saturated_with_lime():
    """The high end of lime dosing: the pair CaOH+ brings the pH down to the measured one."""
    assert_agreement("LIME-SAT")
    without_pairs = type(SYSTEM)(pairs=False).solve(mixture(CASES["LIME-SAT"]["recipe"]), 25.0).ph
    assert without_pairs - CASES["LIME-SAT"].printed > 0.05


def test_a_standard_diluted_with_the_same_volume_of_water():
    """Dilution moves the pH by the published dilution value: ionic strength alone does it."""
    assert_agreement("DILUTION-NBS")


def test_pure_water_open_to_air():
    """CO2 from the air makes pure water as acid as the textbooks say."""
    assert_agreement("OPEN-AIR-WATER")


def test_dilute_salts_and_acids():
    """Where activity corrections are small the classic ideal results come out."""
    assert_agreement("SALTS-DILUTE")


def test_the_end_point_of_an_alkalinity_titration():
    """Water whose bicarbonate has all become CO2 has the end-point pH, dilute and cold or hard and warm."""
    assert_agreement("ENDPOINT-BARNES")


def test_the_deviation_of_phosphate_is_the_same_at_all_temperatures():
    """Phosphate deviates by activity, not by a wrong slope: over 50 °C it changes by less than 0.02."""
    for standard in ("PH-PHOS-11", "PH-PHOS-135"):
        assert np.ptp(difference(standard)) <= 0.02
