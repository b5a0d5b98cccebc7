"""The carbonate system of an analysis from any two of pH, alkalinity, DIC and CO2."""

from itertools import combinations

import numpy as np
import pytest

from explorer.chemistry.carbonate import complete

from .states import ordinary_waters


@pytest.fixture(scope="module")
def waters(system):
    """Known waters, their four carbonate quantities, and the same totals with these left out."""
    totals, temperature = ordinary_waters(system, 300, seed=11)
    totals[0] = totals[1] * np.linspace(0.1, 1.7, 300)
    known = system.solve(totals, temperature)
    quantities = {
        "ph": known.ph,
        "alkalinity": totals[0],
        "dic": totals[1],
        "co2": known.concentration("CO2(aq)"),
    }
    bare = totals.copy()
    bare[:2] = 0.0
    return totals, temperature, bare, quantities


@pytest.mark.parametrize("pair", list(combinations(["ph", "alkalinity", "dic", "co2"], 2)))
def test_any_two_give_back_the_water(system, waters, pair):
    """Alkalinity and DIC found from two quantities are those of the water they were read from."""
    totals, temperature, bare, quantities = waters
    found, possible = complete(system, bare, temperature, **{name: quantities[name] for name in pair})
    assert possible.all()
    assert found[:2] == pytest.approx(totals[:2], rel=1e-7)


def test_the_ph_holds_at_its_reading_temperature(system):
    """A pH read warm belongs to a colder water with another pH, and to the same totals."""
    bare = system.totals(calcium=1e-3, sodium=1e-3)
    found, _ = complete(system, bare, 25.0, ph=7.5, alkalinity=2e-3)
    assert system.solve(found, 25.0).ph == pytest.approx(7.5, abs=1e-9)
    assert system.solve(found, 5.0).ph > 7.6


def test_an_alkalinity_smaller_than_its_silicate_is_impossible(system):
    """More alkalinity in OH- and silicate than was measured: no DIC can mend it."""
    bare = system.totals(silica=1e-2)
    found, possible = complete(system, bare, 20.0, ph=[10.5, 7.5], alkalinity=1e-3)
    assert possible.tolist() == [False, True]
    assert np.isnan(found[:2, 0]).all()


def test_more_co2_than_dic_is_impossible(system):
    """CO2 is a part of the DIC."""
    _, possible = complete(system, system.zeros(), 20.0, dic=1e-3, co2=[2e-3, 5e-4])
    assert possible.tolist() == [False, True]


def test_one_quantity_is_not_enough(system):
    """The message names what was given."""
    with pytest.raises(ValueError, match="got ph"):
        complete(system, system.zeros(), 20.0, ph=7.0)


def test_no_waters_at_all_are_completed_too(system):
    """An empty batch gives an empty answer."""
    found, possible = complete(system, system.zeros(0), 20.0, ph=7.0, alkalinity=1e-3)
    assert found.shape == (len(system.keys), 0)
    assert possible.shape == (0,)
