"""Chlorine, ammonia and dechlorination as completed stoichiometry."""

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from explorer.treatment.chlorine import REACTIONS, completed_chlorine

CHLORINE_ATOMS = {"free_chlorine": 1, "monochloramine": 1, "chloride": 1}
SULFUR_ATOMS = {"sulfite": 1, "thiosulfate": 2, "sulfate": 1}
OXIDISING_POWER = {"free_chlorine": 2, "monochloramine": 2, "sulfite": -2, "thiosulfate": -8}
"""Electrons each can take, or give where negative, on the way to chloride, ammonia and sulfate."""

MG_CL2_PER_MG_N = 70.9 / 14.007


def react(system, **moles):
    """Amounts after reaction, by key."""
    totals = completed_chlorine(system.totals(**moles), system)
    return {key: totals[system.index[key]] for key in system.keys}


def count(totals, system, atoms):
    return sum(number * totals[system.index[key]] for key, number in atoms.items())


@pytest.mark.parametrize("reaction", REACTIONS)
def test_each_reaction_conserves_charge_chlorine_and_sulfur(system, charge, reaction):
    """The alkalinity in the table is exactly the protons released against the zero levels."""
    change = system.totals(**reaction)
    assert charge(change) == 0
    assert count(change, system, CHLORINE_ATOMS) == count(change, system, SULFUR_ATOMS) == 0


@pytest.mark.parametrize("reaction", REACTIONS)
def test_each_reaction_conserves_nitrogen_but_for_the_gas_at_breakpoint(system, reaction):
    """Nitrogen is only lost as N2, with three electrons a nitrogen."""
    change = system.totals(**reaction)
    nitrogen = count(change, system, {"ammonia": 1, "monochloramine": 1})
    electrons = count(change, system, OXIDISING_POWER)
    assert electrons == 3 * nitrogen


def test_ammonia_takes_chlorine_up_to_one_mole_per_mole(system):
    """Below 5.07 mg Cl2 per mg N all chlorine is monochloramine and the rest of the ammonia stays."""
    after = react(system, free_chlorine=3e-5, ammonia=4e-5, alkalinity=1e-3)
    assert after["free_chlorine"] == 0
    assert after["monochloramine"] == pytest.approx(3e-5)
    assert after["ammonia"] == pytest.approx(1e-5)
    assert after["alkalinity"] == pytest.approx(1e-3 - 3e-5)


@pytest.mark.parametrize(
    ("ratio_by_mass", "combined", "free"),
    [(2.53, 0.5, 0.0), (5.06, 1.0, 0.0), (6.33, 0.5, 0.0), (7.593, 0.0, 0.0), (10.12, 0.0, 0.5)],
)
def test_the_breakpoint_curve(system, ratio_by_mass, combined, free):
    """Combined chlorine rises to 1:1 mol and falls to the breakpoint at 1.5:1; then free chlorine rises."""
    nitrogen = 5e-5
    after = react(system, ammonia=nitrogen, free_chlorine=nitrogen * ratio_by_mass / MG_CL2_PER_MG_N)
    assert after["monochloramine"] == pytest.approx(combined * nitrogen, abs=2e-3 * nitrogen)
    assert after["free_chlorine"] == pytest.approx(free * nitrogen, abs=2e-3 * nitrogen)


def test_breakpoint_takes_the_alkalinity_of_the_overall_reaction(system):
    """2 NH4+ + 3 HOCl -> N2 + 3 Cl- + 5 H+ + 3 H2O: 2.5 eq per mol of ammonium."""
    after = react(system, ammonia=2e-5, free_chlorine=3e-5, alkalinity=1e-3)
    assert after["alkalinity"] == pytest.approx(1e-3 - 5e-5)
    assert after["chloride"] == pytest.approx(3e-5)
    assert after["ammonia"] == after["monochloramine"] == after["free_chlorine"] == 0


def test_bisulfite_removes_free_chlorine_mole_for_mole(system):
    """1.47 mg NaHSO3 per mg Cl2, and two equivalents of alkalinity."""
    after = react(system, free_chlorine=3e-5, sulfite=2e-5, alkalinity=1e-3)
    assert after["free_chlorine"] == pytest.approx(1e-5)
    assert after["sulfite"] == 0
    assert after["sulfate"] == pytest.approx(2e-5)
    assert after["alkalinity"] == pytest.approx(1e-3 - 4e-5)


def test_thiosulfate_removes_four_free_chlorine(system):
    """One mole for four, and six equivalents of alkalinity."""
    after = react(system, free_chlorine=4e-5, thiosulfate=1e-5, alkalinity=1e-3)
    assert after["free_chlorine"] == after["thiosulfate"] == 0
    assert after["alkalinity"] == pytest.approx(1e-3 - 6e-5)


@pytest.mark.parametrize(("reductant", "alkalinity"), [("sulfite", 1), ("thiosulfate", 2)])
def test_dechlorinating_monochloramine_gives_its_ammonia_back(system, reductant, alkalinity):
    """The nitrogen returns as ammonium."""
    power = {"sulfite": 1, "thiosulfate": 4}[reductant]
    after = react(system, monochloramine=8e-5, alkalinity=1e-3, **{reductant: 1e-5})
    assert after["ammonia"] == pytest.approx(power * 1e-5)
    assert after["monochloramine"] == pytest.approx(8e-5 - power * 1e-5)
    assert after["alkalinity"] == pytest.approx(1e-3 - alkalinity * 1e-5)


def test_free_chlorine_is_removed_before_monochloramine(system):
    """A reductant spends itself on free chlorine first."""
    after = react(system, free_chlorine=2e-5, monochloramine=3e-5, sulfite=2e-5)
    assert after["free_chlorine"] == 0
    assert after["monochloramine"] == pytest.approx(3e-5)


def test_water_without_chlorine_is_left_alone(system):
    """Ammonia and sulfite together do nothing; the very same totals come back."""
    totals = system.totals(ammonia=1e-5, sulfite=1e-5, alkalinity=1e-3)
    assert completed_chlorine(totals, system) is totals


AMOUNT = st.floats(0, 1e-3) | st.just(0.0)
LEAST = 1e-300
"""mol/L that a reaction of the smallest floating-point numbers may leave behind: they cannot be divided."""


@given(free=AMOUNT, combined=AMOUNT, ammonia=AMOUNT, sulfite=AMOUNT, thiosulfate=AMOUNT)
def test_any_mixture_conserves_charge_and_atoms_and_leaves_nothing_that_would_react(
    system, charge, free, combined, ammonia, sulfite, thiosulfate
):
    """Whatever meets: no negative amount, and of each reacting pair one is used up."""
    before = system.totals(
        free_chlorine=free, monochloramine=combined, ammonia=ammonia, sulfite=sulfite,
        thiosulfate=thiosulfate, alkalinity=2e-3,
    )  # fmt: skip
    after = completed_chlorine(before, system)
    assert charge(after) == pytest.approx(charge(before), abs=1e-16)
    for atoms in (CHLORINE_ATOMS, SULFUR_ATOMS):
        assert count(after, system, atoms) == pytest.approx(count(before, system, atoms), abs=1e-16)
    left = {key: after[system.index[key]] for key in system.keys if key != "alkalinity"}
    assert min(left.values()) >= 0
    for reaction in REACTIONS:
        reactants = [key for key, number in reaction.items() if number < 0 and key != "alkalinity"]
        assert min(left[key] for key in reactants) <= LEAST


def test_many_waters_react_at_once(system):
    """Any shape; each point as if alone."""
    chlorine = np.linspace(0, 1e-4, 7)
    totals = completed_chlorine(system.totals(free_chlorine=chlorine, ammonia=np.full(7, 4e-5)), system)
    for point, dose in enumerate(chlorine):
        alone = completed_chlorine(system.totals(free_chlorine=dose, ammonia=4e-5), system)
        np.testing.assert_array_equal(totals[:, point], alone)


def test_points_without_a_value_stay_without(system):
    """nan in one point does not touch the others."""
    totals = completed_chlorine(system.totals(free_chlorine=[np.nan, 1e-5], ammonia=[1e-5, 1e-5]), system)
    assert np.isnan(totals[system.index["monochloramine"], 0])
    assert totals[system.index["monochloramine"], 1] == pytest.approx(1e-5)
