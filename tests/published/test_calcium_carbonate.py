"""Calcium carbonate: water in contact with it, and the hand calculation of the pH of saturation."""

import numpy as np
import pytest
from numpy.typing import ArrayLike, NDArray

from explorer.chemistry import Solution, System
from explorer.chemistry.carbonate import complete
from explorer.chemistry.constants import log_henry_co2
from explorer.chemistry.elements import molar_mass
from explorer.scenario.indices import saturation_ph

from .reference import CASES, Case, assert_agreement, assert_parting, difference, figure
from .solutions import SYSTEM

CALCIUM_CARBONATE = molar_mass("CaCO3")
WITHOUT_PAIRS = System(pairs=False)


def with_calcite(temperature: float, co2_atm: ArrayLike | None = None) -> Solution:
    """Pure water that has come to equilibrium with calcite, closed or under a pressure of CO2."""
    held = None if co2_atm is None else np.asarray(co2_atm) * 10 ** log_henry_co2(temperature)
    return SYSTEM.equilibrate(SYSTEM.zeros(), temperature, ("calcite",), carbon_dioxide=held)[0]


def total(water: Solution, component: str) -> NDArray:
    return water.totals[water.system.index[component]]


@figure("CALCITE-AIR")
def calcite_and_air(case: Case) -> ArrayLike:
    water = with_calcite(case["temperature"], case["co2_atm"])
    return [water.ph, 1000 * total(water, "calcium"), 1000 * total(water, "alkalinity")]


@figure("CALCITE-PURE")
def calcite_alone(case: Case) -> ArrayLike:
    water = with_calcite(case["temperature"])
    return [water.ph, 1000 * total(water, "calcium")]


@figure("CALCITE-SCHLOESING")
def calcite_under_carbon_dioxide(case: Case) -> ArrayLike:
    return total(with_calcite(case["temperature"], case["CO2_atm"]), "calcium") * CALCIUM_CARBONATE


@figure("LSI-LARSON-BUSWELL")
def constant_of_saturation_ph(case: Case) -> ArrayLike:
    """pK2 − pKs with the activity coefficients of the ionic strength that the table pairs with TDS."""
    water = SYSTEM.solve(
        SYSTEM.totals(sodium=case["TDS_mg_per_litre"] / 40_000, chloride=case["TDS_mg_per_litre"] / 40_000,
                      calcium=1e-9, dic=1e-9),
        case["temperature"], ph=8.0,
    )  # fmt: skip
    logs = sum(np.log10(water.concentration(ion)) for ion in ("Ca+2", "HCO3-"))
    return water.ph - water.saturation_index("calcite") + logs


def hard_water(tds: float, temperature: float, calcium: float, alkalinity: float) -> Solution:
    """Water of pH 7.5, calcium and alkalinity in mg/L as CaCO3, salted to an ionic strength of TDS/40000."""
    calcium, alkalinity = calcium / CALCIUM_CARBONATE / 1000, alkalinity / CALCIUM_CARBONATE / 500
    salt = tds / 40_000 - 2 * calcium - alkalinity / 2
    totals = SYSTEM.totals(calcium=calcium, alkalinity=alkalinity, sodium=max(salt, 0), chloride=max(salt, 0))
    totals, _ = complete(SYSTEM, totals, temperature, ph=7.5, alkalinity=alkalinity)
    return SYSTEM.solve(totals, temperature)


@figure("LSI-STEPS", "LSI-CLOSED")
def ph_of_saturation(case: Case) -> ArrayLike:
    names = ("tds", "temperature", "calcium_as_CaCO3", "alkalinity_as_CaCO3")
    return saturation_ph(hard_water(*(case[name] for name in names)))


@figure("SI-COMPLEX-EFFECT")
def effect_of_pairs(case: Case) -> ArrayLike:
    rises = []
    for name in case["water"]:
        water = case[str(name)]
        amounts = {key: value / 1000 for key, value in water["mmol_per_litre"].items()}
        entered = {"ph": water["ph"], "alkalinity": amounts["alkalinity"]}
        index = []
        for system in (WITHOUT_PAIRS, SYSTEM):
            totals, _ = complete(system, system.totals(**amounts), water["temperature"], **entered)
            index.append(system.solve(totals, water["temperature"]).saturation_index("calcite"))
        rises.append(index[0] - index[1])
    return rises


def test_water_with_calcite_open_to_air():
    """Calcite and air together make the textbook water: pH 8.3 and half a millimole of calcium."""
    assert_agreement("CALCITE-AIR")


def test_pure_water_with_calcite():
    """Calcite alone makes water alkaline: pH 9.9 with 0.12 mmol/L of calcium."""
    assert_agreement("CALCITE-PURE")


def test_calcite_dissolving_under_carbon_dioxide():
    """Measured over three decades of CO2 pressure, what dissolves is met within 11 % and 6 %."""
    assert_agreement("CALCITE-SCHLOESING")


def test_the_ph_of_saturation_in_steps():
    """The stepped table of the trade is met within its steps."""
    assert_agreement("LSI-STEPS")


@pytest.mark.parametrize("hand_calculation", ["LSI-LARSON-BUSWELL", "LSI-CLOSED"])
def test_the_ph_of_saturation_with_the_constants_of_1942(hand_calculation):
    """The old table and the formula fitted to it part from the engine, by no more than their constants do."""
    assert_parting(hand_calculation)


def test_the_langelier_index_by_the_old_table_reads_lower():
    """The table's pHs is higher than the engine's up to 30 °C everywhere; the gap fades with temperature."""
    gap = -difference("LSI-LARSON-BUSWELL")
    cool = np.ravel(CASES["LSI-LARSON-BUSWELL"]["temperature"]) <= 30
    assert (gap[:, cool] >= 0.1).all()
    assert (gap[:, -1] < gap[:, 0]).all()


@pytest.mark.parametrize("temperature", [5.0, 15.0, 25.0, 40.0])
@pytest.mark.parametrize(("tds", "calcium", "alkalinity"), [(60, 20, 25), (200, 120, 100), (450, 300, 280)])
def test_the_ph_of_saturation_by_standard_methods(tds, calcium, alkalinity, temperature):
    """pHs from the tabulated constants of Standard Methods 2330, worked by hand, is the engine's to 0.05.

    pHs = pK2 − pKs + p[Ca] + p[HCO3] + 5 pfm with A = 1.82e6 (εT)^−1.5, ε = 60954/(T + 116) − 68.937 (from
    memory) and the bicarbonate taken as the alkalinity."""
    table = CASES["K-SM2330"]
    column = list(table.along["temperature"]).index(temperature)
    pk2, pks = table.printed[:2, column]
    kelvin = temperature + 273.15
    slope = 1.82e6 * ((60954 / (kelvin + 116) - 68.937) * kelvin) ** -1.5
    root = np.sqrt(tds / 40_000)
    pfm = slope * (root / (1 + root) - 0.3 * root**2)
    by_hand = pk2 - pks - np.log10(calcium / 100_087) - np.log10(alkalinity / 50_044) + 5 * pfm
    water = hard_water(tds, temperature, calcium, alkalinity)
    assert saturation_ph(water) == pytest.approx(by_hand, abs=0.05)


def test_ignoring_the_ion_pairs():
    """Without pairs drinking waters would read 0.02 to 0.05 closer to scaling than they are."""
    assert_agreement("SI-COMPLEX-EFFECT")


def test_the_saturation_index_of_water_that_calcite_has_saturated():
    """It is zero for calcite, and lower for aragonite and vaterite by the published constants' difference."""
    water = with_calcite(25.0, 0.01)
    assert water.saturation_index("calcite") == pytest.approx(0.0, abs=1e-9)
    assert water.saturation_index("aragonite") == pytest.approx(-8.480 + 8.336, abs=0.001)
    assert water.saturation_index("vaterite") == pytest.approx(-8.480 + 7.913, abs=0.001)
