"""The constants against tables, measurements and general-purpose libraries."""

import iapws
import numpy as np
import pytest
from chempy.electrolytes import A, davies_log_gamma
from iapws._iapws import _Dielectric, _Kw
from numpy.typing import ArrayLike, NDArray

from explorer.chemistry.activity import davies, debye_hueckel_slope
from explorer.chemistry.constants import ZERO_CELSIUS, Constant, dissolved, log_henry_co2, log_k, solids

from .reference import Case, assert_agreement, assert_parting, figure

CONSTANTS: dict[str, Constant] = {constant.name: constant for constant in dissolved()} | solids()
TEMPERATURES = np.arange(0.0, 61.0, 5.0)


def constant(name: str, temperature: ArrayLike = 25.0) -> NDArray:
    """log K of a row of the tables, or of CO2 dissolving, at °C."""
    return log_henry_co2(temperature) if name == "CO2(g)" else log_k([CONSTANTS[name]], temperature)[0]


def water_density(temperature: float) -> float:
    """kg/m³ at 0.101325 MPa, IAPWS-95."""
    return iapws.IAPWS95(T=temperature + ZERO_CELSIUS, P=0.101325).rho


@figure("K-PB1982", "K-CHRIST1974")
def log_k_at_25(case: Case) -> ArrayLike:
    return [constant(str(name)) for name in case["constant"]]


@figure("K-PB1982-FITS")
def log_k_by_temperature(case: Case) -> ArrayLike:
    return [constant(str(name), case["temperature"]) for name in np.ravel(case["constant"])]


@figure("K-SM2330")
def pk_by_temperature(case: Case) -> ArrayLike:
    return [-constant(str(name), case["temperature"]) for name in np.ravel(case["constant"])]


@figure("K-WATER", "K-SM2330-WATER")
def pk_water(case: Case) -> ArrayLike:
    return -constant("OH-", case["temperature"])


@figure("K-CO2-HENRY")
def bunsen_coefficient(case: Case) -> ArrayLike:
    density = np.array([water_density(t) for t in case["temperature"]]) / 1000
    return 10 ** log_henry_co2(case["temperature"]) * density * case["molar_volume_litre"]


@figure("K-CO2-SHEDLOVSKY")
def co2_solubility(case: Case) -> ArrayLike:
    return 10 ** log_henry_co2(case["temperature"]) * water_density(case["temperature"]) / 1000


@figure("K-CRC-PKA")
def pka_at_25(case: Case) -> ArrayLike:
    return [-constant(str(name)) for name in case["acid"]]


@figure("K-CRC-BORIC")
def pka_of_boric_acid(case: Case) -> ArrayLike:
    return -constant("B(OH)4-", case["temperature"])


@figure("K-CRC-HOCL")
def pka_of_hypochlorous_acid(case: Case) -> ArrayLike:
    return -constant("OCl-", case["temperature"])


@pytest.mark.parametrize("table", ["K-PB1982", "K-PB1982-FITS"])
def test_the_calcium_carbonate_system(table):
    """Carbonic acid, the three solids and the calcium pairs are those of Plummer & Busenberg."""
    assert_agreement(table)


def test_the_solubility_products_of_another_laboratory():
    """An independent determination of calcite and aragonite is met within its own uncertainty."""
    assert_agreement("K-CHRIST1974")


def test_the_ion_product_of_water():
    """The tabulated evaluation is reproduced from 0 to 60 °C."""
    assert_agreement("K-WATER")


def test_the_ion_product_of_water_against_the_iapws_release():
    """The later international formulation differs by no more than 0.012 up to 50 °C."""
    temperatures = np.arange(0.0, 51.0, 5.0)
    other = [_Kw(water_density(t), t + ZERO_CELSIUS) for t in temperatures]
    assert np.abs(-constant("OH-", temperatures) - other).max() <= 0.012


@pytest.mark.parametrize("measurement", ["K-CO2-HENRY", "K-CO2-SHEDLOVSKY"])
def test_the_solubility_of_carbon_dioxide(measurement):
    """Measured solubilities in pure water between 1 and 35 °C are met within 1.2 %."""
    assert_agreement(measurement)


@pytest.mark.parametrize("table", ["K-CRC-PKA", "K-CRC-BORIC"])
def test_the_acids_of_the_handbook(table):
    """pKa in the handbook and in the engine are the same figures."""
    assert_agreement(table)


def test_hypochlorous_acid_is_the_one_of_water_treatment():
    """The handbook has 7.40, the engine 7.54: Morris 1966, on which the trade's tables rest."""
    assert_parting("K-CRC-HOCL")


@pytest.mark.parametrize("table", ["K-SM2330", "K-SM2330-WATER"])
def test_the_constants_of_the_index_calculation(table):
    """The table used for saturation indices holds the engine's own pK2, pKs and, to 0.02, pKw."""
    assert_agreement(table)


def test_the_debye_hueckel_slope_from_density_and_dielectric_constant():
    """A follows from IAPWS density and dielectric constant by the theory, to 0.0002."""
    kelvin = TEMPERATURES + ZERO_CELSIUS
    density = np.array([water_density(t) for t in TEMPERATURES])
    dielectric = np.array([_Dielectric(rho, t) for rho, t in zip(density, kelvin, strict=True)])
    theory = A(dielectric, kelvin, density) / np.log(10)
    assert debye_hueckel_slope(TEMPERATURES) == pytest.approx(theory, abs=2e-4)


@pytest.mark.parametrize("charge", [1, 2, 3])
def test_the_davies_equation_of_another_library(charge):
    """Activity coefficients up to 0.5 mol/L are those of the same equation written by others."""
    strength = np.array([1e-5, 1e-3, 0.01, 0.1, 0.5])
    slope = debye_hueckel_slope(25.0)
    factor, _ = davies(slope, strength)
    other = [davies_log_gamma(i, charge, float(slope)) for i in strength]
    assert -(charge**2) * factor / np.log(10) == pytest.approx(other, rel=1e-12)
