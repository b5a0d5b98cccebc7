"""Blending, splitting and dosing as arithmetic on conserved totals."""

from dataclasses import replace

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from explorer.treatment.chemicals import CATALOGUE, dose_moles, totals_vector
from explorer.treatment.stream import PROBLEMS, Problem, blend, dose, set_temperature, split

FRACTION = st.floats(0, 1)


def dosed(stream, key, value, unit="mg/L"):
    chemical = CATALOGUE[key]
    return dose(stream, totals_vector(chemical, stream.system), dose_moles(chemical, value, unit))


def same(first, second, rel=1e-12):
    np.testing.assert_allclose(first.totals, second.totals, rtol=rel, atol=1e-18)
    np.testing.assert_allclose(first.temperature, second.temperature, rtol=rel)


def test_a_blend_takes_totals_and_heat_in_proportion(stream):
    """A quarter of one, three quarters of the other."""
    river, well = stream("Fern River, winter"), stream("Granite Wellfield")
    mixed = blend([river, well], [0.25, 0.75])
    np.testing.assert_allclose(mixed.totals, 0.25 * river.totals + 0.75 * well.totals, rtol=1e-15)
    assert mixed.temperature == pytest.approx(0.25 * 4 + 0.75 * 11)


@given(share=FRACTION)
def test_a_water_blended_with_itself_is_itself(stream, share):
    """Whatever the shares."""
    well = stream("Granite Wellfield")
    same(blend([well, well], [share, 1 - share]), well)


@given(first=FRACTION, second=FRACTION)
def test_the_order_of_the_waters_does_not_matter(stream, first, second):
    """Three waters in any order."""
    streams = [stream(name) for name in ("Fern River, winter", "Granite Wellfield", "Cobble Wellfield")]
    fractions = [first, (1 - first) * second, (1 - first) * (1 - second)]
    same(blend(streams, fractions), blend(streams[::-1], fractions[::-1]))


@given(share=st.floats(0.01, 0.99))
def test_blending_in_two_goes_is_blending_at_once(stream, share):
    """A blend blended on, by the flows, is the blend of all three."""
    river, well, other = (
        replace(stream(name), flow=flow)
        for name, flow in [
            ("Fern River, winter", 100 * share),
            ("Granite Wellfield", 40),
            ("Linen Reservoir", 25),
        ]
    )
    same(blend([blend([river, well]), other]), blend([river, well, other]))


def test_flows_give_the_fractions_and_add_up(stream):
    """Without fractions a blend follows the flows."""
    river, well = stream("Fern River, winter", flow=300.0), stream("Granite Wellfield", flow=100.0)
    mixed = blend([river, well])
    same(mixed, blend([river, well], [0.75, 0.25]))
    assert mixed.flow == 400


def test_two_supersaturated_waters_make_a_dissolving_blend(stream, system):
    """Both ends precipitate calcite, half-way the blend dissolves it: solve after mixing, never between."""
    river, well = stream("Fern River, winter"), stream("Granite Wellfield")
    mixed = blend([river, well], [np.array([1.0, 0.5, 0.0]), np.array([0.0, 0.5, 1.0])])
    index = system.solve(mixed.totals, mixed.temperature).saturation_index("calcite")
    assert index[0] > 0 and index[2] > 0
    assert index[1] < 0


def test_a_side_stream_that_comes_back_untreated_changes_nothing(stream):
    """Split and blend again."""
    well = stream("Granite Wellfield", flow=80.0)
    side, rest = split(well, 0.3)
    assert (side.flow, rest.flow) == (pytest.approx(24), pytest.approx(56))
    same(blend([side, rest], [0.3, 0.7]), well)
    same(blend([side, rest]), well)


@given(part=FRACTION)
def test_a_dose_in_two_goes_is_the_dose_at_once(stream, part):
    """Splitting a dose does not matter."""
    well = stream("Granite Wellfield")
    twice = dosed(dosed(well, "sodium_hydroxide", 20 * part), "sodium_hydroxide", 20 * (1 - part))
    same(twice, dosed(well, "sodium_hydroxide", 20))


def test_the_order_of_doses_does_not_matter_where_nothing_leaves(stream):
    """Caustic, fluoride, phosphate in any order."""
    well = stream("Linen Reservoir")
    doses = [
        ("sodium_hydroxide", 8, "mg/L"),
        ("fluorosilicic_acid", 0.7, "mg/L as F"),
        ("phosphoric_acid", 1, "mg/L as P"),
    ]
    forward, backward = well, well
    for one in doses:
        forward = dosed(forward, *one)
    for one in doses[::-1]:
        backward = dosed(backward, *one)
    same(forward, backward)


@given(share=st.floats(0.05, 0.95))
def test_dosing_before_blending_is_dosing_the_diluted_dose_after(stream, share):
    """A dose to one source counts by that source's share."""
    river, well = stream("Fern River, winter"), stream("Granite Wellfield")
    before = blend([dosed(river, "sodium_hydroxide", 10), well], [share, 1 - share])
    same(before, dosed(blend([river, well], [share, 1 - share]), "sodium_hydroxide", 10 * share))


def test_chlorine_and_ammonia_react_where_the_waters_meet(stream, system):
    """Chloraminated water with free ammonia meets free chlorine: no free ammonia is left half-way."""
    harbor, pebble = stream("Harbor Transfer"), stream("Pebble Wells")
    mixed = blend([harbor, pebble], [0.5, 0.5])
    assert mixed.total("ammonia") == 0
    assert mixed.total("monochloramine") > 0


def test_chlorine_and_ammonia_react_where_they_are_dosed(stream):
    """1 mg/L Cl2 with 0.2 mg/L N: just monochloramine."""
    well = dosed(
        dosed(stream("Granite Wellfield"), "chlorine", 1, "mg/L as Cl2"), "ammonia", 0.25, "mg/L as N"
    )
    assert well.total("free_chlorine") == 0
    assert well.total("monochloramine") == pytest.approx(1 / 70_900)


def test_a_source_without_share_does_not_count_even_without_a_solution(stream):
    """An impossible analysis at zero share leaves the blend alone; with a share it is the blend's problem."""
    well = stream("Granite Wellfield")
    broken = replace(
        stream("Linen Reservoir"),
        totals=np.full_like(well.totals, np.nan),
        problem=Problem.IMPOSSIBLE_ANALYSIS,
    )
    mixed = blend([well, broken], [np.array([1.0, 0.5]), np.array([0.0, 0.5])])
    np.testing.assert_array_equal(mixed.problem, [Problem.NONE, Problem.IMPOSSIBLE_ANALYSIS])
    np.testing.assert_allclose(mixed.totals[:, 0], well.totals)


def test_a_dose_below_zero_is_allowed_until_nothing_is_left(stream):
    """Taking away more than the water holds is flagged, not painted as a number."""
    well = stream("Granite Wellfield")
    vector = totals_vector(CATALOGUE["calcium_chloride"], well.system)
    after = dose(well, vector, np.array([-1e-4, -1e-2]))
    np.testing.assert_array_equal(after.problem, [Problem.NONE, Problem.NEGATIVE])


def test_the_first_problem_of_a_point_stays(stream):
    """A later problem does not hide an earlier one."""
    well = stream("Granite Wellfield").flagged(True, Problem.IMPOSSIBLE_ANALYSIS)
    assert well.flagged(True, Problem.NOT_SOLVED).problem == Problem.IMPOSSIBLE_ANALYSIS


def test_warming_changes_the_temperature_only(stream, system):
    """Same totals, other pH."""
    well = stream("Granite Wellfield")
    warm = set_temperature(well, [11.0, 60.0])
    assert warm.totals is well.totals
    ph = system.solve(warm.totals, warm.temperature).ph
    assert ph[1] < ph[0]


def test_everything_broadcasts(stream):
    """Shares along one axis, doses along another, temperatures along a third."""
    river, well = stream("Fern River, winter"), stream("Granite Wellfield")
    share = np.linspace(0, 1, 5)
    mixed = blend([river, well], [share, 1 - share])
    after = dosed(mixed, "sodium_hydroxide", np.linspace(0, 20, 3)[:, None])
    after = set_temperature(after, np.array([5.0, 15.0])[:, None, None])
    assert after.shape == (2, 3, 5)
    assert after.totals.shape[1:] == (3, 5)


def test_solids_mix_in_proportion(stream):
    """A settled and an unsettled stream: the solids formed per litre of blend."""
    first = replace(stream("Granite Wellfield"), solids={"calcite": 40.0})
    second = replace(stream("Linen Reservoir"), solids={"brucite": 10.0})
    mixed = blend([first, second], [0.25, 0.75])
    assert {name: float(amount) for name, amount in mixed.solids.items()} == {"calcite": 10.0, "brucite": 7.5}


def test_points_can_be_picked_from_a_spread_stream(stream):
    """A flat list of points, numbered through a larger shape."""
    well = set_temperature(stream("Granite Wellfield"), np.array([5.0, 10.0, 15.0]))
    picked = well.at((2, 3), np.array([0, 4]))
    np.testing.assert_array_equal(picked.temperature, [5.0, 10.0])
    np.testing.assert_array_equal(picked.totals, np.stack([well.totals] * 2, axis=1))
    assert well.at((2, 3)).shape == (6,)


def test_every_problem_has_words():
    """Every reason can be told; none is empty but the absence of one."""
    assert set(PROBLEMS) == set(Problem)
    assert [problem for problem, words in PROBLEMS.items() if not words] == [Problem.NONE]
