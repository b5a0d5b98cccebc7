"""Where rules of thumb go wrong in blending and dosing, and the plant must not."""

import numpy as np
import pytest

from explorer.chemistry import System
from explorer.chemistry.calcium_carbonate import precipitation_potential
from explorer.scenario.evaluate import evaluate
from explorer.scenario.files import open_scenario
from explorer.scenario.shipped import shipped

CALCIUM_CARBONATE = 100_086.0
"""mg/mol."""


@pytest.fixture(scope="module")
def faulty():
    return evaluate(open_scenario(shipped()["faulty_analyses"]))


def test_ignoring_ion_pairs_overstates_the_potential_of_a_high_sulfate_water(faulty):
    """About a quarter of the calcium is paired; without pairs the CCPP reads tens of percent too high."""
    water = faulty.solution("gypsum_well")
    paired = 1 - water.concentration("Ca+2") / water.totals[water.system.index["calcium"]]
    assert paired == pytest.approx(0.23, abs=0.02)
    bare = System(pairs=False).solve(water.totals, water.temperature, ph=water.ph)
    with_pairs, without = (float(precipitation_potential(w)) * CALCIUM_CARBONATE for w in (water, bare))
    assert 1.2 < without / with_pairs < 3.0


def test_reading_all_alkalinity_as_carbonate_overstates_dic(faulty):
    """At pH 9 with silicate, borate, phosphate, ammonia and hypochlorite in the titration: about 30 %."""
    water = faulty.solution("mixed")
    system = water.system
    others = ("silica", "boron", "phosphate", "ammonia", "free_chlorine")
    bare = water.totals.copy()
    bare[[system.index[key] for key in others]] = 0.0
    fraction = system.solve(bare, water.temperature, ph=water.ph)
    naive = bare[system.index["dic"]] * water.totals[0] / fraction.totals[0]
    assert naive / water.totals[system.index["dic"]] == pytest.approx(1.30, abs=0.05)


def test_ccpp_corners_miss_the_worst_blend(plant):
    """Both ends precipitate; the worst blend lies inside and dissolves."""
    blends = evaluate(plant({"river": 50, "well": 50}), {"waters.well.share": np.linspace(0, 100, 101)})
    ccpp = blends.readout("ccpp")
    assert ccpp[0] > 0 and ccpp[-1] > 0
    assert ccpp.min() < -5
    assert 0 < int(ccpp.argmin()) < 100


def test_order_does_not_matter_while_nothing_leaves(plant):
    """Acid, alkali, carbon dioxide and warming in any order: the same water to 1e-9 pH."""
    steps = [
        plant.dosed("acid", "sulfuric_acid", 12, "mg/L"),
        plant.dosed("alkali", "sodium_hydroxide", 9, "mg/L"),
        plant.dosed("gas", "carbon_dioxide", 15, "mg/L"),
        {"id": "heater", "step": "temperature", "temperature": {"value": 21, "unit": "°C"}},
    ]
    forwards = evaluate(plant({"well": 100}, steps)).readout("ph")
    backwards = evaluate(plant({"well": 100}, steps[::-1])).readout("ph")
    assert forwards == pytest.approx(float(backwards), abs=1e-9)


@pytest.mark.parametrize(
    "leaving",
    [
        {"id": "tower", "step": "air", "approach": 80, "co2_ppm": 420},
        {"id": "clarifier", "step": "settle", "residual": 0},
        {"id": "bed", "step": "limestone", "approach": 90},
    ],
    ids=["gas", "solid leaves", "solid enters"],
)
def test_order_matters_where_something_leaves_or_enters(plant, leaving):
    """Alkali before or behind the step gives different waters."""
    lift = 60 if leaving["step"] == "settle" else 4
    alkali = plant.dosed("alkali", "sodium_hydroxide", lift, "mg/L")
    source = {"permeate": 100} if leaving["step"] == "limestone" else {"well": 100}
    before = evaluate(plant(source, [alkali, leaving])).readout("ph")
    behind = evaluate(plant(source, [leaving, alkali])).readout("ph")
    assert abs(before - behind) > 0.05


def test_permeate_with_a_little_alkali_jumps_in_ph(plant):
    """Near zero alkalinity a milligram moves the pH by half a unit or more, and the buffer says so."""
    doses = evaluate(
        plant({"permeate": 100}, [plant.dosed("alkali", "sodium_hydroxide", 6, "mg/L")]),
        {"train.alkali.dose": np.array([6.0, 7.0, 8.0])},
    )
    assert (np.diff(doses.readout("ph")) > 0.4).all()
    assert (doses.readout("buffer_intensity") < 0.2).all()


def test_too_much_alum_in_soft_water_is_a_gap_with_its_reason(plant):
    """From where the alkalinity is used up there is no pH to print."""
    doses = evaluate(
        plant({"moor": 100}, [plant.dosed("alum", "aluminium_sulfate", 10, "mg/L")]),
        {"train.alum.dose": np.array([5.0, 32.0])},
    )
    assert np.isfinite(doses.readout("ph")).tolist() == [True, False]
    assert "alkalinity exhausted" in doses.reasons()[1]
