"""Solids and gas in equilibrium with the water; solids that only form."""

import numpy as np
import pytest

from explorer.chemistry.calcium_carbonate import precipitation_potential
from explorer.chemistry.constants import log_henry_co2
from explorer.chemistry.solids import precipitate

from .states import ordinary_waters, random_states


def with_calcium_carbonate(system, totals, amount):
    """Totals after ``amount`` mol/L of CaCO3 has dissolved."""
    changed = totals.copy()
    changed[system.index["calcium"]] += amount
    changed[system.index["dic"]] += amount
    changed[system.index["alkalinity"]] += 2 * amount
    return changed


@pytest.mark.parametrize("solid", ["calcite", "aragonite", "vaterite"])
def test_taking_the_potential_out_leaves_a_water_just_saturated(system, solid):
    """Removing what precipitates, or adding what dissolves, brings the index to zero."""
    totals, temperature = ordinary_waters(system, 2_000, seed=21)
    potential = precipitation_potential(system.solve(totals, temperature), solid)
    assert (potential > 0).any() and (potential < 0).any()
    after = system.solve(with_calcium_carbonate(system, totals, -potential), temperature)
    assert np.abs(after.saturation_index(solid)).max() < 1e-6


def test_the_potential_has_the_sign_of_the_index(system):
    """Supersaturated waters precipitate, undersaturated ones dissolve."""
    totals, temperature = ordinary_waters(system, 2_000, seed=22)
    water = system.solve(totals, temperature)
    assert (np.sign(precipitation_potential(water)) == np.sign(water.saturation_index("calcite"))).all()


@pytest.mark.parametrize("absent", ["calcium", "dic"])
def test_the_potential_is_defined_without_calcium_or_carbonate(system, absent):
    """Water with none of it dissolves some; the index itself does not exist."""
    totals, temperature = ordinary_waters(system, 500, seed=23)
    totals[system.index[absent]] = 0.0
    water = system.solve(totals, temperature)
    potential = precipitation_potential(water)
    assert (potential < 0.0).all()
    assert np.isnan(water.saturation_index("calcite")).all()
    after = system.solve(with_calcium_carbonate(system, totals, -potential), temperature)
    assert np.abs(after.saturation_index("calcite")).max() < 1e-6


def test_the_potential_is_found_for_every_random_state(system):
    """pH 4–12 with totals from exactly zero to high."""
    totals, temperature, ph = random_states(system, 5_000, seed=24)
    water = system.solve(totals, temperature, ph=4.0 + ph * 8.0 / 13.0)
    assert np.isfinite(precipitation_potential(water)).all()


def test_air_brings_carbon_dioxide_to_its_pressure_and_leaves_the_alkalinity(system):
    """Gas takes or gives CO2 only."""
    totals, temperature = ordinary_waters(system, 100, seed=25)
    activity = 10.0 ** log_henry_co2(temperature) * 420e-6
    water, lost = system.equilibrate(totals, temperature, carbon_dioxide=activity)
    assert water.activity("CO2(aq)") == pytest.approx(activity, rel=1e-9)
    changed = water.totals - totals
    assert changed[system.index["dic"]] == pytest.approx(-lost["carbon_dioxide"], rel=1e-9)
    others = np.delete(changed, system.index["dic"], axis=0)
    assert np.abs(others).max() == 0.0


def test_solids_and_gas_can_be_held_together(system):
    """Calcite and air: both conditions hold at once."""
    totals, temperature = ordinary_waters(system, 100, seed=26)
    water, _ = system.equilibrate(totals, temperature, ["calcite"], carbon_dioxide=1.5e-5)
    assert np.abs(water.saturation_index("calcite")).max() < 1e-8
    assert water.activity("CO2(aq)") == pytest.approx(np.full(100, 1.5e-5), rel=1e-9)


def test_solids_that_only_form_leave_an_undersaturated_water_alone(system):
    """Nothing dissolves because nothing is there."""
    totals, temperature = ordinary_waters(system, 400, seed=27)
    index = system.solve(totals, temperature).saturation_index("calcite")
    water, formed = precipitate(system, totals, temperature, ["calcite", "brucite"])
    assert (formed["calcite"][index < 0] == 0.0).all()
    assert (formed["calcite"][index > 1e-6] > 0.0).all()
    assert water.totals[:, index < 0] == pytest.approx(totals[:, index < 0], rel=1e-12)


def test_lime_beyond_softening_forms_both_calcite_and_brucite(system):
    """Each solid that is there is at saturation, each that is not there is below it, and mass is kept."""
    totals, temperature = ordinary_waters(system, 200, seed=28)
    lime = np.linspace(0.0, 6e-3, 200)
    totals[system.index["calcium"]] += lime
    totals[system.index["alkalinity"]] += 2 * lime
    water, formed = precipitate(system, totals, temperature, ["calcite", "brucite"])
    assert (formed["brucite"] > 0).any() and (formed["brucite"] == 0).any()
    for solid, amount in formed.items():
        index = water.saturation_index(solid)
        assert np.abs(index[amount > 1e-10]).max() < 1e-6, solid
        assert index[amount == 0.0].max(initial=-1.0) < 1e-6, solid
    calcium = water.totals[system.index["calcium"]] + formed["calcite"]
    assert calcium == pytest.approx(totals[system.index["calcium"]], rel=1e-12)
    alkalinity = water.totals[0] + 2 * formed["calcite"] + 2 * formed["brucite"]
    assert alkalinity == pytest.approx(totals[0], rel=1e-11, abs=1e-15)


def test_a_solid_that_cannot_be_held_is_named(system):
    """So are two solids that would fix the same metal."""
    with pytest.raises(ValueError, match="gypsum cannot be held"):
        system.equilibrate(system.zeros(), 20.0, ["gypsum"])
    with pytest.raises(ValueError, match="only one"):
        system.equilibrate(system.zeros(), 20.0, ["calcite", "aragonite"])
