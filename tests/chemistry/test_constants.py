"""The tables of constants: complete, balanced, with their pedigree."""

import numpy as np
import pytest

from explorer.chemistry import constants
from explorer.chemistry.components import COMPONENT
from explorer.chemistry.network import Network

ROWS = [*constants.dissolved(), *constants.solids().values()]


@pytest.mark.parametrize("row", ROWS, ids=lambda row: row.name)
def test_every_constant_says_where_it_comes_from(row):
    """Source, confidence, and for those left out the reason."""
    assert row.source
    assert row.confidence in {"verified", "memory"}
    assert row.used or "left out" in row.note


@pytest.mark.parametrize("row", ROWS, ids=lambda row: row.name)
def test_every_reaction_balances_its_charge(row):
    """Charges on both sides are equal."""
    assert sum(n * constants.charge_of(species) for species, n in row.reaction.items()) == 0


def test_the_pairs_left_out_are_those_that_spoil_the_ph_standards():
    """Sodium with carbonate and with hydrogen phosphate, and no others."""
    assert {row.name for row in constants.dissolved() if not row.used} == {"NaCO3-", "NaHCO3(aq)", "NaHPO4-"}


def test_a_constant_known_by_enthalpy_follows_van_t_hoff():
    """d(ln K)/dT = ΔH/(R T²), here by a central difference at 25 °C."""
    enthalpy = 30.0
    at = np.array([24.99, 25.01]) + constants.ZERO_CELSIUS
    row = constants.van_t_hoff(-5.0, enthalpy)
    low, high = (row[0] + row[2] / t for t in at)
    slope = (high - low) * constants.LN10 / (at[1] - at[0])
    assert slope == pytest.approx(enthalpy / (constants.GAS_CONSTANT * 298.15**2), rel=1e-6)


def test_a_form_not_to_be_extrapolated_keeps_its_end_value():
    """CaHPO4(aq) is fitted for 5–37.5 °C and strongly curved."""
    (row,) = (row for row in constants.dissolved() if row.name == "CaHPO4(aq)")
    low, end, high, top = constants.log_k([row], [0.0, 5.0, 60.0, 37.5])[0]
    assert low == end
    assert high == top


def test_species_charges_follow_from_their_masters():
    """A species' charge is the sum of its masters' charges; the network refuses anything else."""
    network = Network()
    masters = np.array([constants.charge_of(name) for name in network.masters])
    assert (network.counts @ masters == network.charges).all()


def test_inert_components_carry_a_charge_or_none():
    """Chloride, nitrate and thiosulfate count in the ionic strength without forming species."""
    inert = {key for key, component in COMPONENT.items() if component.master is None and component.charge}
    assert inert == {"chloride", "nitrate", "thiosulfate"}
