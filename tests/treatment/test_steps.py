"""Steps in which a solid or a gas enters or leaves."""

from dataclasses import replace

import numpy as np
import pytest

from explorer.chemistry.calcium_carbonate import precipitation_potential
from explorer.treatment.chemicals import CATALOGUE, dose_moles, totals_vector
from explorer.treatment.steps import air, co2_in_air, concentrate, limestone, settle
from explorer.treatment.stream import Problem, blend, dose, split

MG = 100_086
"""mg CaCO3 per mol."""


def dosed(stream, key, value, unit="mg/L"):
    chemical = CATALOGUE[key]
    return dose(stream, totals_vector(chemical, stream.system), dose_moles(chemical, value, unit))


def solved(stream):
    return stream.system.solve(stream.totals, stream.temperature)


def potential(stream, solid="calcite"):
    return precipitation_potential(solved(stream), solid) * MG


@pytest.fixture
def aggressive(stream):
    """Desalinated water with carbon dioxide, as it enters a limestone bed."""
    return dosed(stream("Dune permeate"), "carbon_dioxide", 90.5)


@pytest.fixture
def limed(stream):
    """Hard water with the lime of a softening plant."""
    return dosed(stream("Quartz Wellfield"), "calcium_hydroxide", 306)


class TestLimestone:
    def test_full_approach_saturates(self, aggressive):
        """100 % of the way the water neither dissolves nor precipitates."""
        assert potential(limestone(aggressive, 100)) == pytest.approx(0, abs=1e-6)

    def test_half_approach_dissolves_half(self, aggressive):
        """The approach is the part dissolved of what saturation takes."""
        wanted = -potential(aggressive)
        assert potential(limestone(aggressive, 50)) == pytest.approx(-wanted / 2, rel=1e-8)

    def test_what_dissolves_arrives_as_calcium_carbonate(self, aggressive):
        """One calcium, one DIC, two equivalents."""
        change = limestone(aggressive, 90).totals - aggressive.totals
        index = aggressive.system.index
        calcium = change[index["calcium"]]
        assert calcium > 0
        assert change[index["dic"]] == pytest.approx(calcium)
        assert change[index["alkalinity"]] == pytest.approx(2 * calcium)
        assert np.count_nonzero(change) == 3

    def test_a_scaling_water_passes_unchanged(self, stream):
        """The bed does not precipitate."""
        well = stream("Granite Wellfield")
        np.testing.assert_array_equal(limestone(well, 90).totals, well.totals)

    def test_a_more_soluble_form_dissolves_further(self, aggressive):
        """Aragonite stops later than calcite."""
        assert potential(limestone(aggressive, 100, "aragonite")) > 1
        assert potential(limestone(aggressive, 100, "aragonite"), "aragonite") == pytest.approx(0, abs=1e-6)

    def test_a_desalination_plant_with_half_the_flow_through_the_bed(self, aggressive, stream):
        """90.5 mg/L CO2 and 90 % approach in half the flow, then 15.05 mg/L NaOH: the invented plant's design
        figures, alkalinity above 80, calcium about 83 and 4 mg/L that would precipitate."""
        _, rest = split(stream("Dune permeate"), 0.5)
        mixed = dosed(blend([limestone(aggressive, 90), rest], [0.5, 0.5]), "sodium_hydroxide", 15.05)
        assert mixed.total("alkalinity") * 50_043 == pytest.approx(104, abs=1)
        assert mixed.total("calcium") * MG == pytest.approx(83.5, abs=1)
        assert potential(mixed) == pytest.approx(4.0, abs=0.5)


class TestSettle:
    def test_full_settling_saturates(self, limed):
        """All that can precipitate does, as calcite."""
        clear = settle(limed, 0)
        assert potential(clear) == pytest.approx(0, abs=1e-6)
        assert clear.solids["calcite"] == pytest.approx(float(potential(limed)), rel=1e-9)

    def test_a_stated_residual_stays(self, limed):
        """Softened water leaves 15 mg/L above saturation."""
        clear = settle(limed, 15 / MG)
        assert potential(clear) == pytest.approx(15, abs=1e-6)
        assert clear.solids["calcite"] == pytest.approx(float(potential(limed)) - 15, rel=1e-9)

    def test_a_water_below_the_residual_is_left_alone(self, stream):
        """Less supersaturation than stated: nothing happens; below saturation nothing dissolves."""
        for name in ("Granite Wellfield", "Moss Reservoir, summer"):
            water = stream(name)
            np.testing.assert_allclose(settle(water, 50 / MG).totals, water.totals, rtol=1e-12)

    def test_magnesium_stays_in_a_water_limed_below_its_hydroxide(self, limed):
        """Total hardness of this water cannot fall below about 150 mg/L: magnesium stays."""
        clear = settle(limed, 15 / MG, ("calcite", "brucite"))
        hardness = (clear.total("calcium") + clear.total("magnesium")) * MG
        assert hardness == pytest.approx(154, abs=2)
        assert clear.solids["brucite"] == 0

    @pytest.mark.parametrize("residual", [0, 15])
    def test_excess_lime_takes_magnesium_too(self, stream, residual):
        """Both solids together: brucite saturated, the carbonate at its stated residual."""
        limed = dosed(stream("Quartz Wellfield"), "calcium_hydroxide", np.array([400.0, 450.0, 600.0]))
        clear = settle(limed, residual / MG, ("calcite", "brucite"))
        water = solved(clear)
        assert (clear.solids["brucite"] > 0).all()
        np.testing.assert_allclose(water.saturation_index("brucite"), 0, atol=1e-6)
        np.testing.assert_allclose(potential(clear), residual, atol=1e-5)

    def test_mass_and_charge_balance_with_both_solids(self, stream, charge):
        """What left the water is in the solids."""
        limed = dosed(stream("Quartz Wellfield"), "calcium_hydroxide", 450)
        clear = settle(limed, 15 / MG, ("calcite", "brucite"))
        lost = {key: float(limed.total(key) - clear.total(key)) for key in limed.system.keys}
        assert lost["calcium"] == pytest.approx(clear.solids["calcite"] / MG, rel=1e-12)
        assert lost["dic"] == pytest.approx(lost["calcium"], rel=1e-12)
        assert lost["magnesium"] == pytest.approx(clear.solids["brucite"] / 58_319, rel=1e-12)
        assert lost["alkalinity"] == pytest.approx(2 * (lost["calcium"] + lost["magnesium"]), rel=1e-12)
        assert charge(clear.totals) == pytest.approx(float(charge(limed.totals)), abs=1e-15)

    def test_without_a_residual_only_floc_leaves(self, limed):
        """Supersaturation is not precipitation: a filter alone takes no carbonate."""
        clear = settle(replace(limed, floc={"iron_hydroxide": 1e-5}))
        assert clear.floc == {}
        assert clear.totals is limed.totals

    def test_residuals_of_any_shape(self, limed):
        """A sweep over the residual."""
        residual = np.array([0.0, 5.0, 15.0])
        np.testing.assert_allclose(potential(settle(limed, residual / MG)), residual, atol=1e-6)


class TestAir:
    def test_to_a_stated_carbon_dioxide(self, stream):
        """3 mg/L behind the tower, alkalinity untouched."""
        permeate = stream("Ember permeate")
        after = air(permeate, co2=3 / 44_009)
        assert solved(after).concentration("CO2(aq)") * 44_009 == pytest.approx(3, rel=1e-9)
        assert after.total("alkalinity") == pytest.approx(float(permeate.total("alkalinity")), rel=1e-12)
        assert after.total("dic") < permeate.total("dic")

    def test_full_approach_is_equilibrium_with_air(self, stream):
        """The activity of CO2 is that of Henry's law."""
        after = air(stream("Ember permeate"), approach=100)
        assert solved(after).activity("CO2(aq)") == pytest.approx(float(co2_in_air(21)), rel=1e-9)

    def test_part_of_the_way_is_part_of_the_difference(self, stream):
        """80 % removes 80 % of the surplus of CO2."""
        permeate = stream("Ember permeate")
        start, end = (
            float(solved(water).concentration("CO2(aq)")) for water in (permeate, air(permeate, approach=100))
        )
        found = solved(air(permeate, approach=80)).concentration("CO2(aq)")
        assert found == pytest.approx(start + 0.8 * (end - start), rel=1e-6)

    def test_no_contact_changes_nothing(self, stream):
        """0 % of the way."""
        permeate = stream("Ember permeate")
        np.testing.assert_allclose(air(permeate, approach=0).totals, permeate.totals, rtol=1e-9)

    def test_alkaline_water_takes_carbon_dioxide_up(self, stream):
        """Air gives as well as takes."""
        river = stream("Fern River, winter")
        limed = dosed(river, "calcium_hydroxide", 40)
        assert air(limed, approach=100).total("dic") > limed.total("dic")

    def test_pure_water_in_air_has_the_textbook_ph(self, system, stream):
        """5.60 at 25 °C and 420 ppm (Henry's constant and K1 of Plummer & Busenberg 1982)."""
        pure = replace(stream("Ember permeate"), totals=system.zeros(), temperature=25.0)
        assert solved(air(pure, approach=100)).ph == pytest.approx(5.60, abs=0.02)

    def test_thin_air_holds_less(self):
        """At 2000 m the air presses with 79.5 kPa (standard atmosphere); 1.23 of it vapour at 10 °C."""
        expected = (79.5 - 1.23) / (101.325 - 1.23)
        assert co2_in_air(10, altitude=2000) / co2_in_air(10) == pytest.approx(expected, rel=1e-3)

    def test_settings_of_any_shape(self, stream):
        """Approach along one axis, carbon dioxide of the air along the other."""
        after = air(
            stream("Ember permeate"), approach=np.array([20.0, 80.0])[:, None], co2_ppm=[400, 420, 800]
        )
        assert after.totals.shape[1:] == (2, 3)


class TestConcentrate:
    def test_everything_dissolved_stays_in_less_water(self, stream):
        """Four cycles: four times the totals, a quarter of the flow."""
        main = stream("Cinder Town Main", flow=100.0)
        after = concentrate(main, 4.0)
        np.testing.assert_allclose(after.totals, 4 * main.totals)
        assert after.flow == 25
        assert after.temperature is main.temperature

    def test_one_cycle_is_no_change(self, stream):
        """Nothing evaporates."""
        main = stream("Cinder Town Main")
        np.testing.assert_array_equal(concentrate(main, 1.0).totals, main.totals)

    def test_cycles_of_any_shape(self, stream):
        """A sweep over the cycles."""
        assert concentrate(stream("Cinder Town Main"), np.linspace(1, 6, 11)).totals.shape[1:] == (11,)


@pytest.mark.parametrize(
    "step",
    [
        lambda water: limestone(water, 90),
        lambda water: settle(water, 0),
        lambda water: settle(water, 1e-4, ("calcite", "brucite")),
        lambda water: air(water, approach=80),
    ],
    ids=["limestone", "settle", "settle both", "air"],
)
def test_a_point_without_a_solution_carries_its_reason_through(stream, step):
    """One impossible point among good ones: the good ones are computed, the other is flagged."""
    well = stream("Granite Wellfield")
    totals = np.stack([well.totals, np.full_like(well.totals, np.nan)], axis=1)
    after = step(replace(well, totals=totals))
    np.testing.assert_array_equal(after.problem, [Problem.NONE, Problem.NOT_SOLVED])
    assert np.isfinite(after.totals[:, 0]).all()
