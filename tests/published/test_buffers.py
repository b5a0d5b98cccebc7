"""Buffer intensity of standards, and dose curves: what acid or base does to the pH and to the buffering."""

import numpy as np
import pytest
from numpy.typing import ArrayLike

from explorer.chemistry import Solution

from .reference import CASES, Case, assert_agreement, assert_parting, figure
from .solutions import WITH_PHTHALATE, mixture


@figure("BETA-NBS", "BETA-NBS-BORAX", "BETA-NBS-LIME")
def buffer_intensity_of_standards(case: Case) -> ArrayLike:
    recipes = [mixture(case["recipes"][name], WITH_PHTHALATE) for name in case["standard"]]
    return WITH_PHTHALATE.solve(np.stack(recipes, axis=1), 25.0).buffer_intensity


def dosed(case: Case) -> Solution:
    """The base solution with sodium hydroxide, or hydrochloric acid where the dose is negative."""
    dose = case["NaOH_mmol_per_litre"] * 1e-3
    recipe = case["recipe"] | {"NaOH": np.maximum(dose, 0.0), "HCl": np.maximum(-dose, 0.0)}
    return WITH_PHTHALATE.solve(mixture(recipe, WITH_PHTHALATE), case["temperature"])


@figure("DOSE-LANGE-KHP-PH", "DOSE-BB-PHOS", "DOSE-BB-BORAX", "DOSE-LANGE-HCL-PH")
def ph_after_dose(case: Case) -> ArrayLike:
    return dosed(case).ph


@figure("DOSE-LANGE-KHP-BETA", "DOSE-LANGE-HCL-BETA")
def buffer_intensity_after_dose(case: Case) -> ArrayLike:
    return dosed(case).buffer_intensity


def test_the_buffer_intensity_of_standards():
    """Carbonate, phosphate and phthalate standards buffer as printed, within 5 % (phthalate 7 %)."""
    assert_agreement("BETA-NBS")


def test_the_buffer_intensity_of_borax_is_printed_lower_than_boric_acid_allows():
    """A half-neutralised acid of c mol/L has ln 10 · c/4; the printed borax figure is below that."""
    assert_parting("BETA-NBS-BORAX")
    assert CASES["BETA-NBS-BORAX"].printed[0] < np.log(10) * 0.04 / 4


def test_the_buffer_intensity_of_lime_water():
    """Hydroxide buffers saturated lime water."""
    assert_agreement("BETA-NBS-LIME")


@pytest.mark.parametrize("curve", ["DOSE-LANGE-KHP-PH", "DOSE-BB-PHOS", "DOSE-BB-BORAX", "DOSE-LANGE-HCL-PH"])
def test_the_ph_along_a_dose_curve(curve):
    """Acid and caustic take a buffer to the published pH, dose by dose."""
    assert_agreement(curve)


@pytest.mark.parametrize("curve", ["DOSE-LANGE-KHP-BETA", "DOSE-LANGE-HCL-BETA"])
def test_the_buffer_intensity_along_a_dose_curve(curve):
    """The buffer intensity published beside each dose is met: the derivative is that of the curve."""
    assert_agreement(curve)


@pytest.mark.parametrize("curve", ["DOSE-LANGE-KHP-PH", "DOSE-LANGE-HCL-PH"])
def test_the_buffer_intensity_is_the_slope_of_the_published_curve(curve):
    """Between two neighbouring doses the mean buffer intensity is the published rise of dose over pH."""
    case = CASES[curve]
    beta = dosed(case).buffer_intensity
    dose, ph = np.ravel(case["NaOH_mmol_per_litre"]) * 1e-3, case.printed
    slope = np.diff(dose) / np.diff(ph)
    mean = np.sqrt(beta[1:] * beta[:-1])
    # two pH readings of ±0.02 each leave 14 % of a step of 0.2
    assert np.abs(mean / slope - 1.0).max() <= 0.14
