"""The batched equilibrium: it converges everywhere, balances, and does not depend on the batch."""

import warnings

import numpy as np
import pytest

from explorer.chemistry import COMPONENTS, System, WeakAcid
from explorer.chemistry.equilibrium import REASONS

from .states import ordinary_waters, random_states


@pytest.fixture(scope="module")
def solved(system):
    """100,000 random states at given pH, and the same states solved again from their totals."""
    totals, temperature, ph = random_states(system, 100_000, seed=1)
    with warnings.catch_warnings():
        warnings.simplefilter("error")
        at_ph = system.solve(totals, temperature, ph=ph)
        within = at_ph.ionic_strength <= 0.5
        again = system.solve(at_ph.totals[:, within], temperature[within])
    return at_ph, again, ph[within]


def test_every_random_state_is_solved_at_its_ph_and_from_its_totals(solved):
    """pH 1–13, 0–60 °C, totals from exactly zero to high: nothing is left without an answer."""
    at_ph, again, _ = solved
    assert at_ph.solved.all()
    assert again.solved.all()
    assert again.solved.size > 99_000


def test_a_state_solved_from_its_totals_has_the_ph_it_was_made_with(solved):
    """Fixing the pH and finding the alkalinity, then the reverse, comes back to the same pH."""
    _, again, ph = solved
    assert np.abs(again.ph - ph).max() < 1e-9


def test_every_component_balances(system, solved):
    """What the species hold adds up to the total, for every component, to 1e-10."""
    _, again, _ = solved
    network = system.network
    amounts = np.stack([again.concentration(species) for species in again.species])
    for column, key in enumerate(network.master_of):
        counts = network.counts[:, column]
        if key == "alkalinity":
            organic = again.organic_ions - system.solve(again.totals, again.temperature, ph=4.5).organic_ions
            held, total = organic - counts @ amounts, again.totals[0]
            size = np.abs(counts) @ amounts + np.abs(organic)
        else:
            held, total = counts @ amounts, again.totals[system.index[key]]
            size = np.maximum(total, 1e-300)
        assert np.abs((held - total) / size).max() < 1e-10, key


def test_an_absent_component_has_no_species(system):
    """A total of exactly zero gives concentrations of exactly zero."""
    water = system.solve(system.totals(alkalinity=1e-3, dic=1e-3, sodium=1e-3), 20.0)
    assert water.concentration("CaCO3(aq)") == 0.0
    assert water.concentration("HPO4-2") == 0.0


def test_pure_water_is_neutral(system):
    """With every total zero the pH is half of pKw."""
    water = system.solve(system.zeros(), 25.0)
    assert water.ph == pytest.approx(13.995 / 2, abs=2e-3)


def test_a_point_alone_and_in_any_batch_agree(system):
    """The answer does not depend on the company it is solved in."""
    totals, temperature = ordinary_waters(system, 5_000, seed=3)
    batch = system.solve(totals, temperature).ph
    for point in (0, 1, 17, 2047, 2048, 4999):
        alone = system.solve(totals[:, point], temperature[point])
        assert alone.shape == ()
        assert alone.ph == pytest.approx(batch[point], abs=1e-9)
    backwards = system.solve(totals[:, ::-1], temperature[::-1]).ph
    assert np.abs(backwards[::-1] - batch).max() < 1e-9


def test_totals_and_temperature_broadcast(system):
    """One water at many temperatures, many waters at one temperature, and a grid of both."""
    totals, _ = ordinary_waters(system, 3, seed=4)
    grid = system.solve(totals[:, :, None], np.array([5.0, 15.0, 25.0, 35.0]))
    assert grid.shape == (3, 4)
    assert grid.ph[2, 1] == pytest.approx(float(system.solve(totals[:, 2], 15.0).ph), abs=1e-9)
    assert system.solve(totals[:, 0], np.linspace(0, 60, 7)).shape == (7,)


@pytest.mark.parametrize(
    ("change", "temperature", "reason"),
    [
        ({"calcium": -1e-6}, 20.0, "more of a substance"),
        ({"calcium": np.nan}, 20.0, "not a finite"),
        ({"alkalinity": np.inf}, 20.0, "not a finite"),
        ({}, 75.0, "0 to 60"),
        ({}, -1.0, "0 to 60"),
    ],
)
def test_a_point_that_cannot_be_asked_says_why(system, change, temperature, reason):
    """No number is shown for it, and its neighbours are not disturbed."""
    good = {"alkalinity": 2e-3, "dic": 2e-3, "calcium": 1e-3}
    totals = np.stack([system.totals(**good), system.totals(**(good | change))], axis=1)
    water = system.solve(totals, [20.0, temperature])
    assert water.solved.tolist() == [True, False]
    assert reason in REASONS[water.reason[1]]
    assert np.isnan(water.ph[1])
    assert water.ph[0] == pytest.approx(float(system.solve(totals[:, 0], 20.0).ph), abs=1e-12)


def test_totals_with_the_wrong_number_of_rows_are_refused(system):
    """The message says how many rows there must be."""
    with pytest.raises(ValueError, match=f"{len(COMPONENTS)} rows"):
        system.solve(np.zeros(5), 20.0)


def test_ph_falls_with_acid_and_rises_with_base(system):
    """Along an alkalinity titration the pH never turns."""
    totals, temperature = ordinary_waters(system, 40, seed=5)
    titration = totals[:, :, None] + np.zeros(400)
    titration[0] += np.linspace(-0.02, 0.02, 400)
    ph = system.solve(titration, temperature[:, None]).ph
    assert (np.diff(ph, axis=1) > 0.0).all()


def test_waters_none_of_which_is_solved_have_no_buffer_intensity(system):
    """As every other quantity then: nan, whatever the number of points."""
    water = system.solve(np.full((len(system.keys), 3), np.nan), 15.0)
    assert np.isnan(water.ph).all()
    assert np.isnan(water.buffer_intensity).all() and water.buffer_intensity.shape == (3,)


def test_the_buffer_intensity_is_the_slope_of_the_titration(system):
    """The analytic derivative agrees with a central difference to 1e-6."""
    totals, temperature = ordinary_waters(system, 200, seed=6)
    step = 1e-8
    up, down = totals.copy(), totals.copy()
    up[0] += step
    down[0] -= step
    rise = system.solve(up, temperature).ph - system.solve(down, temperature).ph
    assert system.solve(totals, temperature).buffer_intensity == pytest.approx(2 * step / rise, rel=1e-6)


def test_the_ph_of_a_closed_water_follows_its_temperature(system):
    """Nothing else changes: a bicarbonate water reads higher when it is cold."""
    water = system.solve(system.totals(alkalinity=2e-3, dic=2.1e-3, calcium=1e-3), [5.0, 25.0])
    assert water.ph[0] > water.ph[1] + 0.1


def test_a_user_defined_acid_acts_like_the_same_acid_built_in(system):
    """Acetic acid entered by hand gives the pH of the built-in one where calcium and magnesium are absent."""
    own = System([WeakAcid("vinegar", "Vinegar", 60.052, (4.7562,), (-0.39,))])
    ours = own.solve(own.totals(vinegar=1e-3, alkalinity=5e-4, sodium=5e-4), 25.0)
    built_in = system.solve(system.totals(acetate=1e-3, alkalinity=5e-4, sodium=5e-4), 25.0)
    assert ours.ph == pytest.approx(float(built_in.ph), abs=1e-3)
    assert sum(ours.family("vinegar").values()) == pytest.approx(1e-3, rel=1e-10)


def test_a_user_defined_acid_with_a_charged_protonated_form_balances():
    """Four pKa values from a doubly positive form: species names and charges follow."""
    own = System([WeakAcid("base", "Base", 100.0, (2.0, 4.0, 7.0, 9.0), None, 2)])
    water = own.solve(own.totals(base=1e-3, alkalinity=2.5e-3, chloride=2e-3), 25.0)
    assert set(water.family("base")) == {"base.0+2", "base.1+", "base.2", "base.3-", "base.4-2"}
    assert sum(water.family("base").values()) == pytest.approx(1e-3, rel=1e-10)


@pytest.mark.parametrize("pka", [(), (1.0, 2.0, 3.0, 4.0, 5.0)])
def test_an_acid_needs_one_to_four_pka_values(pka):
    """Otherwise the message says how many are allowed."""
    with pytest.raises(ValueError, match="allowed 1 to 4"):
        WeakAcid("acid", "Acid", 50.0, pka)


def test_families_are_complete_and_ordered(system):
    """Most protonated first; the parts of a family add up to its total."""
    totals, temperature = ordinary_waters(system, 20, seed=8)
    water = system.solve(totals, temperature)
    assert water.family_species("carbonate")[:3] == ("CO2(aq)", "HCO3-", "CO3-2")
    for family, key in (("carbonate", "dic"), ("phosphate", "phosphate"), ("silicate", "silica")):
        assert sum(water.family(family).values()) == pytest.approx(totals[system.index[key]], rel=1e-10)


def test_metal_ligand_pairs_can_be_left_out_to_show_what_they_do(system):
    """Without pairs all calcium is free."""
    bare = System(pairs=False)
    totals = system.totals(alkalinity=4e-3, dic=4.2e-3, calcium=5e-3, sulfate=7e-3, magnesium=2.7e-3)
    assert bare.solve(totals, 15.0).concentration("Ca+2") == pytest.approx(5e-3, rel=1e-12)
    assert system.solve(totals, 15.0).concentration("Ca+2") < 4e-3
