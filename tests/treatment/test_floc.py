"""Coagulants: the hydroxide forms at once, takes alkalinity, and says when it cannot."""

import numpy as np
import pytest

from explorer.treatment.chemicals import CATALOGUE, dose_moles, totals_vector, with_setting
from explorer.treatment.floc import HYDROXIDES
from explorer.treatment.steps import settle
from explorer.treatment.stream import Problem, blend, dose, set_temperature


def dosed(stream, chemical, value, unit="mg/L"):
    chemical = CATALOGUE[chemical] if isinstance(chemical, str) else chemical
    return dose(stream, totals_vector(chemical, stream.system), dose_moles(chemical, value, unit))


def alkalinity(stream):
    return stream.total("alkalinity") * 50_043


@pytest.mark.parametrize(
    ("coagulant", "value", "factor", "solid", "per_metal", "metal_share"),
    [
        # Alkalinity taken and sludge formed per dose: the trade's hand checks (common practice).
        ("aluminium_sulfate", 30, 0.505, "aluminium_hydroxide", 2.89, 2 * 26.98 / 594.34),
        ("ferric_chloride", 19, 0.926, "iron_hydroxide", 1.91, 55.845 / 162.195),
        ("ferric_sulfate", 20, 0.751, "iron_hydroxide", 1.91, 2 * 55.845 / 399.858),
    ],
)
def test_the_hydroxide_takes_the_alkalinity_of_the_hand_check(
    stream, coagulant, value, factor, solid, per_metal, metal_share
):
    """In a well buffered water nearly all metal precipitates."""
    before = stream("Linen Reservoir")
    after = dosed(before, coagulant, value)
    assert alkalinity(before) - alkalinity(after) == pytest.approx(factor * value, rel=0.03)
    assert after.solids[solid] == pytest.approx(per_metal * metal_share * value, rel=0.03)
    assert after.problem == Problem.NONE


@pytest.mark.parametrize("coagulant", ["aluminium_sulfate", "ferric_chloride", "polyaluminium_chloride"])
def test_metal_and_charge_are_conserved(stream, charge, coagulant):
    """What is not in the water is in the floc, three equivalents of alkalinity per mole."""
    before = stream("Linen Reservoir")
    moles = dose_moles(CATALOGUE[coagulant], 3.0, CATALOGUE[coagulant].default_unit)
    after = dosed(before, coagulant, 3.0, CATALOGUE[coagulant].default_unit)
    (solid,) = after.floc
    metal = HYDROXIDES[solid].metal
    added = moles * CATALOGUE[coagulant].totals[metal]
    assert after.total(metal) + after.floc[solid] == pytest.approx(float(added), rel=1e-9)
    assert charge(after.totals) == pytest.approx(float(charge(before.totals)), abs=1e-13)


def test_what_stays_dissolved_is_the_solubility(stream, system):
    """The water is just saturated with the hydroxide named, and the residual is reported by the total."""
    after = dosed(stream("Linen Reservoir"), "ferric_chloride", 19)
    solution = system.solve(after.totals, after.temperature)
    assert solution.saturation_index("iron_hydroxide") == pytest.approx(0, abs=1e-8)
    assert 0 < after.total("iron") * 55_845 < 0.1


def test_basic_coagulant_leaves_more_alkalinity(stream):
    """At equal aluminium the basic product takes less."""
    linen = stream("Linen Reservoir")
    left = [
        float(alkalinity(dosed(linen, with_setting("polyaluminium_chloride", basicity), 2.7, "mg/L as Al")))
        for basicity in (0, 40, 80)
    ]
    assert left == sorted(left)
    assert left[0] == pytest.approx(float(alkalinity(dosed(linen, "aluminium_sulfate", 29.737))), rel=0.01)


def test_exhausted_alkalinity_is_said_not_painted_as_a_ph(stream):
    """32 mg/L of alum want 16 of alkalinity where there are 7.5."""
    after = dosed(stream("Moss Reservoir, winter"), "aluminium_sulfate", np.array([0.0, 8.0, 32.0]))
    np.testing.assert_array_equal(after.problem, [Problem.NONE, Problem.NONE, Problem.ALKALINITY_EXHAUSTED])


def test_a_ph_below_the_window_is_said_even_with_alkalinity_left(stream):
    """Plenty of carbon dioxide: alkalinity is left, but the pH is too low for aluminium hydroxide."""
    sour = dosed(stream("Linen Reservoir"), "carbon_dioxide", 600)
    assert dosed(sour, "aluminium_sulfate", 30).problem == Problem.OUTSIDE_WINDOW


def test_alkali_after_the_coagulant_mends_it_while_the_floc_is_there(stream):
    """Alum first, caustic second: the same water as the other way round, and no problem left."""
    moss = stream("Moss Reservoir, winter")
    after = dosed(dosed(moss, "aluminium_sulfate", 32), "sodium_hydroxide", 10.89)
    other = dosed(dosed(moss, "sodium_hydroxide", 10.89), "aluminium_sulfate", 32)
    assert after.problem == Problem.NONE
    np.testing.assert_allclose(after.totals, other.totals, rtol=1e-7, atol=1e-14)
    assert after.solids["aluminium_hydroxide"] == pytest.approx(float(other.solids["aluminium_hydroxide"]))


def test_alkali_after_the_filter_comes_too_late(stream):
    """The floc has left; the problem of the point stays."""
    after = settle(dosed(stream("Moss Reservoir, winter"), "aluminium_sulfate", 32))
    assert after.floc == {}
    assert dosed(after, "sodium_hydroxide", 10.89).problem == Problem.ALKALINITY_EXHAUSTED


def test_floc_dissolves_again_when_the_ph_rises_before_the_filter(stream):
    """Aluminate: alkali before the filter costs residual aluminium, behind it not."""
    clear = dosed(stream("Linen Reservoir"), "aluminium_sulfate", 30)
    before_filter = settle(dosed(clear, "sodium_hydroxide", 25))
    behind_filter = dosed(settle(clear), "sodium_hydroxide", 25)
    assert before_filter.total("aluminium") > 10 * behind_filter.total("aluminium")
    assert before_filter.solids["aluminium_hydroxide"] < behind_filter.solids["aluminium_hydroxide"]


def test_floc_answers_to_temperature_and_blending(stream, system):
    """Wherever the water changes while the floc is suspended, it is at its solubility again."""
    clear = dosed(stream("Linen Reservoir"), "aluminium_sulfate", 30)
    for changed in (set_temperature(clear, 20.0), blend([clear, stream("Granite Wellfield")], [0.5, 0.5])):
        solution = system.solve(changed.totals, changed.temperature)
        assert solution.saturation_index("aluminium_hydroxide") == pytest.approx(0, abs=1e-8)


def test_metal_of_the_source_does_not_precipitate_by_itself(stream, system):
    """Supersaturation is not precipitation: only a coagulant starts a floc."""
    well = stream("Granite Wellfield")
    well.totals[system.index["iron"]] = 1e-6
    after = dosed(well, "sodium_hydroxide", 5)
    assert after.total("iron") == 1e-6
    assert after.floc == {}


def test_without_a_dose_nothing_happens(stream):
    """A coagulant dial at zero leaves the water as it was."""
    linen = stream("Linen Reservoir")
    after = dosed(linen, "aluminium_sulfate", 0.0)
    np.testing.assert_allclose(after.totals, linen.totals, rtol=1e-12)
    assert after.problem == Problem.NONE
    assert after.solids["aluminium_hydroxide"] == 0
